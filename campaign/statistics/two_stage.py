"""Slopes within specimens, the first of two stages.

Each specimen gets a regression of its own with its own stratum effects,

    y_j = b_i x_j + a_(i, stratum(j)) + e_j,   Var(e_j) = sigma_within^2 + known_j,

and Var(b_i) = 1 / sum_j w_j (x_j - mean)^2. sigma_within is pooled over the specimens: the
value at which the weighted sum of squares equals its degrees of freedom (the pooled residual
mean square where nothing is known) [2]. The second stage is `random_effects.combine`.

[1] Pinheiro & Bates, Mixed-Effects Models in S and S-PLUS (2000), ch. 1 and 4 (one regression a
    group, pooled residual).
[2] Paule & Mandel, J. Res. Natl. Bur. Stand. 87 (1982) 377.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from campaign.statistics.design import NoContrast
from campaign.statistics.roots import root
from campaign.statistics.sums import Array, Codes


@dataclass(frozen=True)
class Slopes:
    """One slope per specimen that has a contrast.

    specimen (k,): labels as given; slope (k,), variance (k,) of the readings alone, NaN where
    no reading is to spare; df_within (k,); n (k,): readings used; sigma_within, NaN where it
    cannot be estimated; left_out: labels of specimens without contrast.
    """

    specimen: npt.NDArray[Any]
    slope: Array
    variance: Array
    df_within: Codes
    sigma_within: float
    n: Codes
    left_out: tuple[Any, ...]


@dataclass(frozen=True)
class _Fit:
    slope: Array
    sxx: Array
    rest: Array


def specimen_slopes(
    y: npt.ArrayLike,
    x: npt.ArrayLike,
    specimen: npt.ArrayLike,
    stratum: npt.ArrayLike | None = None,
    known: npt.ArrayLike | None = None,
) -> Slopes:
    """Return the slopes of y on x within specimens [1]; arrays (n,).

    Readings in a specimen x stratum cell where x does not vary carry nothing and are not
    counted. Raises NoContrast where x varies within no specimen, ValueError for arrays that do
    not fit together or are not finite.
    """
    response, axis = _vector("y", y), _vector("x", x)
    labels, of_specimen = np.unique(np.asarray(specimen), return_inverse=True)
    strata = np.zeros(response.size, dtype=np.intp)
    if stratum is not None:
        strata = np.unique(np.asarray(stratum), return_inverse=True)[1].astype(np.intp)
    given = np.zeros(response.size) if known is None else _vector("known", known)
    if not response.size == axis.size == of_specimen.size == strata.size == given.size:
        raise ValueError("y, x, specimen, stratum and known must be as many")
    if (given < 0).any():
        raise ValueError("known variances hold a negative value")
    cell = of_specimen * (int(strata.max(initial=0)) + 1) + strata
    used = _varies(axis, cell)
    if not used.any():
        raise NoContrast("x does not vary within any specimen and stratum")
    kept, of_kept = np.unique(of_specimen[used], return_inverse=True)
    response, axis, given = response[used], axis[used], given[used]
    cell = np.unique(cell[used], return_inverse=True)[1]
    return _slopes(response, axis, of_kept, cell, given, labels, kept)


def _slopes(
    y: Array, x: Array, of: Codes, cell: Codes, given: Array, labels: npt.NDArray[Any], kept: Codes
) -> Slopes:
    k = kept.size
    count = np.bincount(of, minlength=k)
    home = np.zeros(int(cell.max()) + 1, dtype=np.intp)
    home[cell] = of
    df = count - np.bincount(home, minlength=k) - 1
    sigma = _pooled_sigma(y, x, of, cell, given, int(df.sum()))
    variance = given + (0.0 if math.isnan(sigma) else sigma**2)
    blind = math.isnan(sigma) and not (given > 0).all()
    floor = 1e-300 if blind or not (variance > 0).all() else 0.0
    weight = np.ones(y.size) if floor else 1.0 / variance
    fit = _fit(y, x, of, cell, weight)
    errors = np.full(k, math.nan if blind else 0.0) if floor else 1.0 / fit.sxx
    left_out = tuple(np.delete(labels, kept).tolist())
    return Slopes(labels[kept], fit.slope, errors, df, sigma, count, left_out)


def _fit(y: Array, x: Array, of: Codes, cell: Codes, weight: Array) -> _Fit:
    total = np.bincount(cell, weight)
    xc = x - (np.bincount(cell, weight * x) / total)[cell]
    yc = y - (np.bincount(cell, weight * y) / total)[cell]
    sxx: Array = np.bincount(of, weight * xc**2).astype(np.float64)
    slope: Array = np.bincount(of, weight * xc * yc) / sxx
    return _Fit(slope, sxx, yc - slope[of] * xc)


def _pooled_sigma(y: Array, x: Array, of: Codes, cell: Codes, given: Array, df: int) -> float:
    """Return sigma_within [2], NaN without degrees of freedom."""
    if df <= 0:
        return math.nan
    plain = _fit(y, x, of, cell, np.ones(y.size)).rest
    mean_square = float(plain @ plain) / df
    if not (given > 0).any():
        return math.sqrt(mean_square)

    def excess(variance: float) -> float:
        weight = 1.0 / (variance + given)
        rest = _fit(y, x, of, cell, weight).rest
        return float(weight @ rest**2) - df

    low = 0.0 if (given > 0).all() else 1e-12 * (mean_square + float(given.max()))
    if excess(low) <= 0:
        return 0.0
    high = mean_square
    while excess(high) > 0:
        high *= 2
    return math.sqrt(root(excess, low, high, xtol=1e-14 * high, rtol=1e-12))


def _varies(x: Array, cell: Codes) -> npt.NDArray[np.bool_]:
    """Return which readings stand in a cell where x takes more than one value."""
    codes = np.unique(cell, return_inverse=True)[1]
    high = np.full(int(codes.max(initial=-1)) + 1, -np.inf)
    low = np.full(high.size, np.inf)
    np.maximum.at(high, codes, x)
    np.minimum.at(low, codes, x)
    size = np.maximum(np.abs(high), np.abs(low))
    wide: npt.NDArray[np.bool_] = (high - low > 1e-9 * size)[codes]
    return wide


def _vector(name: str, values: npt.ArrayLike) -> Array:
    array = np.asarray(values, dtype=float)
    if array.ndim != 1 or not np.isfinite(array).all():
        raise ValueError(f"{name} must be one finite number a reading")
    return array
