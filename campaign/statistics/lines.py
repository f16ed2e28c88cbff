"""Is a straight line enough, is it one line for all strata, and what moves along with it?

[1] Draper & Smith, Applied Regression Analysis (1998), ch. 2: lack of fit against the scatter
    of repeats, here of specimens; NIST/SEMATECH e-Handbook, sec. 4.4.4.6.
[2] Fai & Cornelius, J. Stat. Comput. Simul. 54 (1996) 363: denominator degrees of freedom of a
    Wald F test, nu = 2E/(E - r), E = sum nu_m/(nu_m - 2) over the r principal contrasts.
[3] Pearson, Philos. Trans. R. Soc. A 187 (1896) 253: product-moment correlation.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from campaign.statistics.design import NoContrast
from campaign.statistics.estimate import Estimate
from campaign.statistics.mixed import MixedFit, fit_mixed
from campaign.statistics.sums import Array
from campaign.statistics.two_stage import specimen_slopes


@dataclass(frozen=True)
class WaldTest:
    """An F test: statistic, its degrees of freedom, p value (NaN where it has no error)."""

    statistic: float
    df: int
    df_error: float
    p: float


@dataclass(frozen=True)
class Heterogeneity:
    """The slope in every stratum with a contrast, and the test that they are one."""

    strata: tuple[Any, ...]
    slopes: tuple[Estimate, ...]
    test: WaldTest


def wald(fit: MixedFit, rows: Array) -> WaldTest:
    """Return the F test of rows @ beta = 0, rows (r, p) independent of each other [2]."""
    from scipy.special import fdtrc

    matrix = np.atleast_2d(np.asarray(rows, dtype=float))
    estimates, cov = fit.contrasts(matrix)
    values = np.array([each.value for each in estimates])
    r = values.size
    if any(math.isnan(each.se) for each in estimates):
        return WaldTest(math.nan, r, 0.0, math.nan)
    scale = np.sqrt(cov.diagonal())
    roots, vectors = np.linalg.eigh(cov / scale[:, None] / scale)
    scores = vectors.T @ (values / scale)
    statistic = float((scores**2 / roots).sum()) / r
    each_df = [fit.contrast(vector / scale @ matrix).df for vector in vectors.T]
    df_error = _denominator(each_df)
    return WaldTest(statistic, r, df_error, float(fdtrc(r, min(df_error, 1e9), statistic)))


def _denominator(each: list[float]) -> float:
    r = len(each)
    if r == 1 or min(each) <= 2:
        return min(each)
    total = sum(nu / (nu - 2) if math.isfinite(nu) else 1.0 for nu in each)
    return 2 * total / (total - r) if total > r * (1 + 1e-12) else math.inf


def lack_of_fit(
    y: npt.ArrayLike,
    x: npt.ArrayLike,
    specimen: npt.ArrayLike,
    stratum: npt.ArrayLike,
    known: npt.ArrayLike | None = None,
) -> WaldTest | None:
    """Return the test of a line against free levels of x [1]; None with fewer than 3 levels.

    Arrays (n,); values of x equal to 9 digits are one level.
    """
    axis = np.asarray(x, dtype=float)
    levels, of_level = np.unique(_digits(axis), return_inverse=True)
    extra = levels.size - 2
    if extra < 1:
        return None
    free = (of_level[:, None] == np.arange(1, 1 + extra)).astype(float)
    try:
        fit = fit_mixed(y, np.column_stack([axis, free]), specimen, stratum, known)
    except NoContrast:
        return None
    return wald(fit, np.eye(1 + extra)[1:])


def heterogeneity(
    y: npt.ArrayLike, x: npt.ArrayLike, specimen: npt.ArrayLike, stratum: npt.ArrayLike
) -> Heterogeneity | None:
    """Return the slopes of y on x per stratum and the test that they agree.

    Works on the means of specimen x stratum cells, so that the test rests on how specimens
    differ from stratum to stratum and not on how often each was read. None with fewer than
    two strata that have a contrast.
    """
    cells = _cell_means(np.asarray(y, float), np.asarray(x, float), specimen, stratum)
    wide = [s for s in range(len(cells.strata)) if np.ptp(_digits(cells.x[cells.stratum == s])) > 0]
    if len(wide) < 2:
        return None
    used = np.isin(cells.stratum, wide)
    own = (cells.stratum[:, None] == wide) * cells.x[:, None]
    fit = fit_mixed(cells.y[used], own[used], cells.specimen[used], cells.stratum[used])
    k = len(wide)
    rows = np.hstack([np.ones((k - 1, 1)), -np.eye(k - 1)])
    slopes = tuple(fit.contrast(row) for row in np.eye(k))
    return Heterogeneity(tuple(cells.strata[s] for s in wide), slopes, wald(fit, rows))


def heterogeneity_within(
    y: npt.ArrayLike,
    x: npt.ArrayLike,
    specimen: npt.ArrayLike,
    stratum: npt.ArrayLike,
    known: npt.ArrayLike | None = None,
) -> Heterogeneity | None:
    """Return the same for an axis that is run through within specimens (temperature, age).

    One slope per specimen x stratum; their scatter beyond their own errors is the measure, with
    the specimen as random effect. None with fewer than two strata that have a contrast.
    """
    of_specimen = np.unique(np.asarray(specimen), return_inverse=True)[1]
    labels, of_stratum = np.unique(np.asarray(stratum), return_inverse=True)
    try:
        cells = specimen_slopes(y, x, of_specimen * labels.size + of_stratum, None, known)
    except NoContrast:
        return None
    owner, where = np.divmod(cells.specimen.astype(np.intp), labels.size)
    present = np.unique(where)
    if present.size < 2:
        return None
    errors = cells.variance if np.isfinite(cells.variance).all() else None
    columns = (where[:, None] == present).astype(float)
    fit = fit_mixed(cells.slope, columns, owner, None, errors)
    k = present.size
    rows = np.hstack([np.ones((k - 1, 1)), -np.eye(k - 1)])
    slopes = tuple(fit.contrast(row) for row in np.eye(k))
    return Heterogeneity(tuple(labels[present].tolist()), slopes, wald(fit, rows))


def correlation_within(
    x: npt.ArrayLike, other: npt.ArrayLike, specimen: npt.ArrayLike, stratum: npt.ArrayLike
) -> float:
    """Return the correlation of x with `other` within strata [3]; NaN where one is constant.

    Taken over specimen x stratum means less the stratum means: a specimen counts once a
    stratum, however often it was read.
    """
    cells = _cell_means(np.asarray(other, float), np.asarray(x, float), specimen, stratum)
    count = np.bincount(cells.stratum)
    a = cells.x - (np.bincount(cells.stratum, cells.x) / count)[cells.stratum]
    b = cells.y - (np.bincount(cells.stratum, cells.y) / count)[cells.stratum]
    size_a, size_b = math.sqrt(float(a @ a)), math.sqrt(float(b @ b))
    if size_a <= 1e-9 * _norm(cells.x) or size_b <= 1e-9 * _norm(cells.y):
        return math.nan
    return float(a @ b) / (size_a * size_b)


@dataclass(frozen=True)
class _Cells:
    y: Array
    x: Array
    specimen: npt.NDArray[np.intp]
    stratum: npt.NDArray[np.intp]
    strata: list[Any]


def _cell_means(y: Array, x: Array, specimen: npt.ArrayLike, stratum: npt.ArrayLike) -> _Cells:
    of_specimen = np.unique(np.asarray(specimen), return_inverse=True)[1]
    labels, of_stratum = np.unique(np.asarray(stratum), return_inverse=True)
    pairs, cell = np.unique(of_specimen * labels.size + of_stratum, return_inverse=True)
    count = np.bincount(cell)
    return _Cells(
        np.bincount(cell, y) / count, np.bincount(cell, x) / count,
        pairs // labels.size, pairs % labels.size, labels.tolist(),
    )  # fmt: skip


def _digits(x: Array) -> Array:
    """Return x rounded to 9 digits of its largest value."""
    size = float(np.abs(x).max(initial=0.0)) or 1.0
    return np.round(x / size, 9) * size


def _norm(x: Array) -> float:
    return math.sqrt(float(x @ x))
