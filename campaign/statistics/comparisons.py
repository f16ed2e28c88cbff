"""Differences between levels, with intervals that hold together.

A simultaneous interval is estimate +- critical(...) x se:

    single      t(1 - alpha/2)
    tukey       q(1 - alpha; k, df)/sqrt 2, all pairs of k levels; with unequal numbers
                conservative [1, 2, 3]
    dunnett     max |t| over k - 1 differences from one control [4]
    bonferroni  t(1 - alpha/(2 N)), N comparisons

[1] Tukey, The Problem of Multiple Comparisons (1953); Kramer, Biometrics 12 (1956) 307.
[2] Hayter, Ann. Stat. 12 (1984) 61 (Tukey-Kramer is conservative).
[3] NIST/SEMATECH e-Handbook of Statistical Methods, sec. 7.4.7.1 (Tukey's method).
[4] Dunnett, J. Am. Stat. Assoc. 50 (1955) 1096; Biometrics 20 (1964) 482.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import lru_cache
from itertools import combinations
from typing import Literal

import numpy as np

from campaign.statistics.roots import root
from campaign.statistics.sums import Array

Family = Literal["single", "tukey", "dunnett", "bonferroni"]


def critical(
    family: Family,
    alpha: float,
    df: float,
    n_levels: int,
    correlation: Array | None = None,
    n_comparisons: int | None = None,
) -> float:
    """Return the multiplier of the se for two-sided 1 - alpha intervals.

    n_levels: k of Tukey, and of Dunnett with the control counted; correlation (k - 1, k - 1):
    of the differences from the control, by default 1/2 (equal numbers); n_comparisons: N of
    Bonferroni, by default all pairs. With two levels every family is the plain t interval.
    Raises ValueError where there is no interval (df <= 0) or for an unknown family.
    """
    if not df > 0 or not 0 < alpha < 1:
        raise ValueError(f"no interval with df = {df} and alpha = {alpha}")
    if family == "bonferroni":
        n = n_comparisons if n_comparisons is not None else n_levels * (n_levels - 1) // 2
        return _student(alpha / max(n, 1), df)
    if family == "single" or n_levels <= 2:
        return _student(alpha, df)
    if family == "tukey":
        return _tukey(alpha, _rounded(df), n_levels)
    if family == "dunnett":
        k = n_levels - 1
        given = np.full((k, k), 0.5) if correlation is None else np.asarray(correlation, float)
        key = tuple(round(float(given[i, j]), 5) for i, j in combinations(range(len(given)), 2))
        return _dunnett(alpha, _rounded(df), len(given), key)
    raise ValueError(f"unknown family {family!r}")


def _student(alpha: float, df: float) -> float:
    from scipy.special import stdtrit

    return float(stdtrit(min(df, 1e9), 1 - alpha / 2))


def _rounded(df: float) -> float:
    """Return df downwards to 4 digits, so that quantiles can be kept; inf beyond a million."""
    if df > 1e6:
        return math.inf
    unit = 10.0 ** (math.floor(math.log10(df)) - 3)
    return math.floor(df / unit + 1e-6) * unit


@lru_cache(maxsize=4096)
def _tukey(alpha: float, df: float, k: int) -> float:
    from scipy.special import ndtr

    z, weight = _normal_grid()

    def below(c: float, s: Array) -> Array:
        # P(range of k normals <= w) = k int phi(z) [Phi(z) - Phi(z - w)]^(k - 1) dz, w = q s
        inside = ndtr(z)[None, :] - ndtr(z[None, :] - math.sqrt(2) * c * s[:, None])
        result: Array = k * (inside ** (k - 1)) @ weight
        return result

    return _quantile(below, alpha, df, k * (k - 1) // 2)


@lru_cache(maxsize=4096)
def _dunnett(alpha: float, df: float, k: int, correlation: tuple[float, ...]) -> float:
    from scipy.special import ndtr

    matrix = np.eye(k)
    for (i, j), value in zip(combinations(range(k), 2), correlation, strict=True):
        matrix[i, j] = matrix[j, i] = value
    loading = _one_factor(matrix)
    if loading is None:
        return _dunnett_general(alpha, df, matrix)
    z, weight = _normal_grid()
    own = np.sqrt(1 - loading**2)

    def below(c: float, s: Array) -> Array:
        # corr_ij = l_i l_j: given the control, the differences are independent [4]
        product = np.ones((s.size, z.size))
        for of_control, of_level in zip(loading, own, strict=True):
            centre = of_control * z[None, :]
            half = c * s[:, None]
            product *= ndtr((centre + half) / of_level) - ndtr((centre - half) / of_level)
        result: Array = product @ weight
        return result

    return _quantile(below, alpha, df, k)


def _one_factor(matrix: Array) -> Array | None:
    """Return l with l_i l_j = matrix_ij off the diagonal, or None where there is none."""
    k = matrix.shape[0]
    if k == 2:
        value = matrix[0, 1]
        size = math.sqrt(abs(value))
        return np.array([size, math.copysign(size, value)]) if size < 1 - 1e-6 else None
    off = matrix - np.diag(matrix.diagonal())
    loading = np.sqrt(np.clip(off.max(axis=1), 1e-6, 0.999))
    for _ in range(500):
        before = loading
        loading = (off @ loading) / np.maximum((loading**2).sum() - loading**2, 1e-12)
        loading = np.clip(0.5 * (loading + before), -0.9999, 0.9999)
        if np.abs(loading - before).max() < 1e-9:
            break
    product = np.outer(loading, loading)
    np.fill_diagonal(product, 0.0)
    return loading if np.abs(product - off).max() < 2e-3 else None


def _dunnett_general(alpha: float, df: float, matrix: Array) -> float:
    """Return max |t| for any correlation, by Gaussian integration over s of box probabilities."""
    from scipy.stats import multivariate_t

    k = matrix.shape[0]
    given = multivariate_t(shape=matrix, df=min(df, 1e6), seed=12345, allow_singular=True)

    def excess(c: float) -> float:
        box = np.full(k, c)
        at = np.random.default_rng(12345)
        return float(given.cdf(box, lower_limit=-box, maxpts=20_000 * k, random_state=at)) - (
            1 - alpha
        )

    low, high = _student(alpha, df), _student(alpha / k, df)
    if excess(low) >= 0:
        return low
    if excess(high) <= 0:
        return high
    return root(excess, low, high, xtol=1e-5)


def _quantile(
    below: Callable[[float, Array], Array], alpha: float, df: float, comparisons: int
) -> float:
    """Return c with E_s[below(c, s)] = 1 - alpha, s^2 ~ chi^2_df/df.

    The answer lies between the plain and the Bonferroni t quantile.
    """
    s, weight = _chi_grid(df)

    def excess(c: float) -> float:
        return float(weight @ below(c, s)) - (1 - alpha)

    low, high = _student(alpha, df), _student(alpha / comparisons, df)
    return root(excess, 0.999 * low, 1.001 * high, xtol=1e-9 * high, rtol=1e-10)


@lru_cache(maxsize=1)
def _normal_grid() -> tuple[Array, Array]:
    """Return nodes and weights of the normal density; trapezium sums converge at once here."""
    z = np.linspace(-8.5, 8.5, 171)
    return z, np.exp(-0.5 * z**2) * (z[1] - z[0]) / math.sqrt(2 * math.pi)


def _chi_grid(df: float) -> tuple[Array, Array]:
    """Return nodes s and weights of sqrt(chi^2_df/df), equally spaced in ln s."""
    if math.isinf(df):
        return np.ones(1), np.ones(1)

    # ln density of x = ln s is df (x - e^(2x)/2 + 1/2) below its top at x = 0, which is about
    # -df x^2 near the top, df x far on the left; the ends lie where it has fallen by 36
    width = 6.4 / math.sqrt(df)
    left = 1.5 * width if df > 50 else max(width, 36.0 / df + 0.5)
    right = min(width, 0.5 * math.log(1 + 80 / df + 2 * width))
    x = np.linspace(-left, right, 301)
    log_density = df * (x - 0.5 * np.exp(2 * x) + 0.5)
    density = np.exp(log_density)
    return np.exp(x), density / density.sum()
