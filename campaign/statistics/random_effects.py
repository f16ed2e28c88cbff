"""Combining one estimate per specimen: random-effects meta-analysis.

b_i = mu_g + t_i + e_i, t_i ~ N(0, tau^2), Var(e_i) = v_i taken as known, g the group of the
specimen; tau^2 by REML [1]; the variance of the mean is multiplied by max(1, q),
q = sum w_i (b_i - mu)^2 / (k - p), w_i = 1/(v_i + tau^2), and its t distribution has k - p
degrees of freedom [2, 3]. The bound at 1 keeps an interval from being shorter than the one
that takes all v_i as exact [4].

[1] Raudenbush, in: The Handbook of Research Synthesis (2009), ch. 16; Viechtbauer,
    J. Educ. Behav. Stat. 30 (2005) 261.
[2] Hartung & Knapp, Stat. Med. 20 (2001) 1771.
[3] Knapp & Hartung, Stat. Med. 22 (2003) 2693 (several groups: meta-regression).
[4] Roever, Knapp & Friede, BMC Med. Res. Methodol. 15 (2015) 99.
[5] Welch, Biometrika 34 (1947) 28; Satterthwaite, Biometrics Bull. 2 (1946) 110.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from itertools import combinations

import numpy as np
import numpy.typing as npt

from campaign.statistics.design import NoContrast
from campaign.statistics.estimate import Estimate
from campaign.statistics.sums import Array

Group = tuple[npt.ArrayLike, npt.ArrayLike]


@dataclass(frozen=True)
class Combined:
    """The mean over specimens, the scatter `tau` between them, the factor q, their number."""

    estimate: Estimate
    tau: float
    q: float
    k: int


@dataclass(frozen=True)
class Difference:
    """The mean of group `a` less that of group `b`."""

    a: str
    b: str
    estimate: Estimate


def combine(effects: npt.ArrayLike, variances: npt.ArrayLike) -> Combined:
    """Return the random-effects mean of `effects` (k,) with error `variances` (k,) [1, 2].

    Where a variance is not finite all are set aside and the effects weigh the same: their own
    scatter is then all the error. One specimen: an estimate without interval. Raises
    NoContrast without any, ValueError for negative variances.
    """
    values, errors = _checked(effects, variances)
    k = values.size
    if k == 1:
        return Combined(Estimate(float(values[0]), math.nan, 0.0), math.nan, math.nan, 1)
    mean, cov, tau, q = _fit(values, errors, np.ones((k, 1)))
    estimate = Estimate(float(mean[0]), math.sqrt(cov[0, 0]), float(k - 1))
    return Combined(estimate, tau, q, k)


def compare(groups: Mapping[str, Group], common_tau: bool = False) -> tuple[Difference, ...]:
    """Return every difference a - b between the means of named groups (effects, variances).

    Default: each group has its own tau; degrees of freedom of the difference after Welch and
    Satterthwaite [5]; a group of one specimen gives no interval. `common_tau`: one tau for all
    groups, k - groups degrees of freedom [3], which is what Tukey-Kramer factors assume and
    what a group of one specimen can be compared by.
    """
    return _pooled(groups) if common_tau else _welch(groups)


def _welch(groups: Mapping[str, Group]) -> tuple[Difference, ...]:
    means = {name: combine(*group).estimate for name, group in groups.items()}
    return tuple(
        Difference(a, b, welch_difference(means[a], means[b])) for a, b in combinations(means, 2)
    )


def welch_difference(a: Estimate, b: Estimate) -> Estimate:
    """Return a - b of two independent estimates, with Satterthwaite degrees of freedom [5]."""
    value = a.value - b.value
    if not (math.isfinite(a.se) and math.isfinite(b.se) and a.df > 0 and b.df > 0):
        return Estimate(value, math.nan, 0.0)
    variance = a.se**2 + b.se**2
    about = a.se**4 / a.df + b.se**4 / b.df
    return Estimate(value, math.sqrt(variance), variance**2 / about if about else a.df + b.df)


def _pooled(groups: Mapping[str, Group]) -> tuple[Difference, ...]:
    pairs = [_checked(*group) for group in groups.values()]
    sizes = [values.size for values, _ in pairs]
    values = np.concatenate([pair[0] for pair in pairs])
    errors = np.concatenate([pair[1] for pair in pairs])
    if not np.isfinite(errors).all():
        errors = np.full(errors.size, math.nan)
    x = np.repeat(np.eye(len(sizes)), sizes, axis=0)
    df = values.size - len(sizes)
    names = list(groups)
    if df == 0:
        mean, cov = values, np.full((len(sizes), len(sizes)), math.nan)
    else:
        mean, cov, _, _ = _fit(values, errors, x)
    found = []
    for i, j in combinations(range(len(names)), 2):
        se = math.sqrt(cov[i, i] + cov[j, j] - 2 * cov[i, j])
        found.append(Difference(names[i], names[j], Estimate(float(mean[i] - mean[j]), se, df)))
    return tuple(found)


def _checked(effects: npt.ArrayLike, variances: npt.ArrayLike) -> tuple[Array, Array]:
    values = np.atleast_1d(np.asarray(effects, dtype=float))
    errors = np.atleast_1d(np.asarray(variances, dtype=float))
    if values.size == 0:
        raise NoContrast("no specimen to combine")
    if values.shape != errors.shape or not np.isfinite(values).all() or (errors < 0).any():
        raise ValueError("effects and variances must be as many, finite and not negative")
    return values, errors


def _fit(values: Array, errors: Array, x: Array) -> tuple[Array, Array, float, float]:
    """Return means, their covariance, tau and q of the model with design x (k, p)."""
    if not np.isfinite(errors).all():
        errors = np.zeros(values.size)
    k, p = x.shape
    plain = np.asarray(np.linalg.lstsq(x, values, rcond=None)[0], dtype=np.float64)
    rest = values - x @ plain
    scale = float(rest @ rest) / (k - p) + float(errors.mean())
    if scale <= 1e-24 * max(1.0, float(np.abs(values).max()) ** 2):
        return plain, np.zeros((p, p)), 0.0, 0.0
    tau2 = scale * _reml(rest / math.sqrt(scale), errors / scale, x)
    means, cov, q = hartung_knapp(values, errors, x, tau2)
    return means, cov, math.sqrt(tau2), q


def hartung_knapp(
    values: Array, errors: Array, x: Array, tau2: float
) -> tuple[Array, Array, float]:
    """Return weighted means (p,), their covariance with the factor max(1, q), and q [2, 3].

    values, errors (k,): effects and their variances; x (k, p): design; tau2: scatter between.
    """
    k, p = x.shape
    weight = 1.0 / (errors + tau2)
    inverse = np.asarray(np.linalg.inv((x.T * weight) @ x), dtype=np.float64)
    means = inverse @ (x.T * weight) @ values
    q = float(weight @ (values - x @ means) ** 2) / (k - p)
    return means, max(1.0, q) * inverse, q


def _reml(values: Array, errors: Array, x: Array) -> float:
    """Return the tau^2 of highest restricted likelihood [1], in units where all is order one.

    The likelihood may have two maxima: it is searched on a grid, then refined.
    """
    lowest = 0.0 if (errors > 0).all() else 1e-12
    grid = np.concatenate([[lowest], np.geomspace(1e-8, 1e3, 111)])
    levels = [_loglik(tau2, values, errors, x) for tau2 in grid]
    at = int(np.argmax(levels))
    low, high = float(grid[max(at - 1, 0)]), float(grid[min(at + 1, grid.size - 1)])
    if at == 0 and _score(lowest, values, errors, x) <= 0:
        return lowest
    for _ in range(100):
        middle = 0.5 * (low + high)
        if _score(middle, values, errors, x) > 0:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)


def _loglik(tau2: float, values: Array, errors: Array, x: Array) -> float:
    weight = 1.0 / (errors + tau2)
    normal = (x.T * weight) @ x
    rest = values - x @ np.linalg.solve(normal, (x.T * weight) @ values)
    logdet = float(np.linalg.slogdet(normal)[1])
    return 0.5 * (float(np.log(weight).sum()) - logdet - float(weight @ rest**2))


def _score(tau2: float, values: Array, errors: Array, x: Array) -> float:
    """Return dl/d tau^2 = 1/2 [ sum w^2 r^2 - tr(W) + tr((X'WX)^-1 X'W^2 X) ]."""
    weight = 1.0 / (errors + tau2)
    normal = (x.T * weight) @ x
    rest = values - x @ np.linalg.solve(normal, (x.T * weight) @ values)
    lost = float(np.trace(np.linalg.solve(normal, (x.T * weight**2) @ x)))
    return 0.5 * (float(weight**2 @ rest**2) - float(weight.sum()) + lost)
