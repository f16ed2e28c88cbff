"""What a resistance beside a constant-phase element shows at a time after a current step.

The step response of R || CPE is R[1 - E_n(-(t/tau)^n)], E_n the Mittag-Leffler function [1];
E_1 = exp and E_1/2(-x) = erfcx(x).

[1] R. Gorenflo, F. Mainardi, Fractional calculus: integral and differential equations of
    fractional order, in: Fractals and Fractional Calculus in Continuum Mechanics, Springer
    (1997) 223: for 0 < n < 1 and t > 0,
    E_n(-t^n) = integral over r > 0 of exp(-rt) K_n(r) dr with
    K_n(r) = sin(n pi)/pi * r^(n-1) / (r^(2n) + 2 r^n cos(n pi) + 1).
[2] L. N. Trefethen, J. A. C. Weideman, The exponentially convergent trapezoidal rule,
    SIAM Review 56 (2014) 385 (also the correction for a pole inside the strip).
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from campaign.kinetics.cpe import time_constant

FloatArray = npt.NDArray[np.float64]

_REACH = 30.0  # weights beyond e^-30 do not matter
_SMALL_EXPONENT = 0.7
_STEP_SMALL = 0.25  # error e^(-2 pi 1.35/0.25), 1.35 the distance of the nearest singularity
_STEP_LARGE = 0.2  # error e^(-2 pi 1.1/0.2)
_NEAR_ZERO, _FAR = 0.03, 100.0  # where eight terms of a series are below 1e-13
_TERMS = 8
_CHUNK = 4096


def mittag_leffler(exponent: npt.ArrayLike, x: npt.ArrayLike) -> FloatArray:
    """Return E_n(-x) for 0 < n <= 1 and x >= 0, accurate to about 1e-12; inputs broadcast.

    NaN where either input is NaN. Raises ValueError outside that range.
    """
    n, arguments = np.broadcast_arrays(
        np.asarray(exponent, dtype=np.float64), np.asarray(x, dtype=np.float64)
    )
    if np.any((n <= 0) | (n > 1) | (arguments < 0)):
        raise ValueError("the Mittag-Leffler function is computed for 0 < n <= 1 and x >= 0 only")
    result = np.where(arguments == 0, 1.0, np.where(np.isposinf(arguments), 0.0, np.nan))
    result[np.isnan(n)] = np.nan
    proper = np.isfinite(n) & np.isfinite(arguments) & (arguments > 0)
    large = proper & (n > _SMALL_EXPONENT)
    near, far = arguments <= _NEAR_ZERO, arguments >= _FAR
    for rows, rule in (
        (proper & ~large, _small_exponent),
        (large & near, _power_series),
        (large & far, _tail),
        (large & ~near & ~far, _large_exponent),
    ):
        index = np.flatnonzero(rows)
        for start in range(0, index.size, _CHUNK):
            part = index[start : start + _CHUNK]
            result.flat[part] = rule(n.flat[part], np.log(arguments.flat[part]))
    return result


def _power_series(n: FloatArray, log_x: FloatArray) -> FloatArray:
    """Return the first terms of E_n(-x) = sum over k >= 0 of (-x)^k / Gamma(1 + nk), [1]."""
    from scipy.special import rgamma

    x = np.exp(log_x)
    total = np.zeros_like(x)
    for k in reversed(range(_TERMS)):
        total = rgamma(1 + n * k) - x * total
    return total


def _tail(n: FloatArray, log_x: FloatArray) -> FloatArray:
    """Return the first terms of E_n(-x) ~ sum over k >= 1 of (-1)^(k-1) x^-k / Gamma(1 - nk), [1].

    What it leaves out falls as exp(x^(1/n) cos(pi/n)), far below rounding here.
    """
    from scipy.special import rgamma

    inverse = np.exp(-log_x)
    total = np.zeros_like(inverse)
    for k in reversed(range(1, _TERMS + 1)):
        total = inverse * (rgamma(1 - n * k) - total)
    return total


def _small_exponent(n: FloatArray, log_x: FloatArray) -> FloatArray:
    """Integrate [1] by parts: E_n(-x) = integral of exp(w - e^w) G(n w - ln x) dw.

    G(v) = arg(1 + e^v e^(i n pi)) / (n pi) is the integral of K_n over ln r = v/n. The nearest
    singularities lie at |Im w| = min(pi/2, pi(1-n)/n), so the trapezoidal rule converges
    exponentially [2] down to n -> 0.
    """
    w = np.arange(-_REACH / _STEP_SMALL, 4.5 / _STEP_SMALL) * _STEP_SMALL
    weight = np.exp(w - np.exp(w)) * _STEP_SMALL
    angle = (np.pi * n)[:, None]
    v = np.clip(n[:, None] * w - log_x[:, None], -700.0, 700.0)
    # both arguments of arctan2 divided by e^v where e^v is large
    grown = np.exp(np.minimum(v, 0.0))
    rest = np.exp(np.minimum(-v, 0.0))
    share = np.arctan2(grown * np.sin(angle), rest + grown * np.cos(angle)) / angle
    return np.asarray(share @ weight)


def _large_exponent(n: FloatArray, log_x: FloatArray) -> FloatArray:
    """Integrate [1] over v = n ln r by the midpoint rule, with the pole's correction [2].

    E_n(-x) = sin(n pi)/(2 n pi) * integral of exp(-(x e^v)^(1/n))/(cosh v + cos(n pi)) dv.
    The pole v = i pi(1-n) nears the axis as n -> 1; its residue is known, and at n = 1 the
    correction alone is exp(-x).
    """
    h = _STEP_LARGE
    lowest = -(_REACH + max(0.0, float(log_x.max())))
    v = (np.arange(np.floor(lowest / h), np.ceil(_REACH / h)) + 0.5) * h
    fall = np.exp(-np.abs(v))
    # cosh v + cos(n pi), both times 2 e^-|v|, without cancellation
    bottom = np.expm1(-np.abs(v)) ** 2 + 4 * fall * np.cos(np.pi * n[:, None] / 2) ** 2
    power = np.exp(np.minimum((log_x[:, None] + v) / n[:, None], 7.0))
    integral = h * np.sum(np.exp(-power) * 2 * fall / bottom, axis=1)
    turn = np.pi * (1 - n) / n
    modulus = np.exp(np.minimum(log_x / n, 7.0))
    residue = np.exp(-modulus * np.cos(turn)) * np.cos(modulus * np.sin(turn))
    correction = 2 * residue / (n * (np.exp(2 * np.pi**2 * (1 - n) / h) + 1))
    return np.asarray(np.sin(np.pi * n) / (2 * np.pi * n) * integral + correction)


def arc_response(
    resistance: npt.ArrayLike,
    cpe: npt.ArrayLike,
    exponent: npt.ArrayLike,
    time_s: npt.ArrayLike,
) -> FloatArray:
    """Return R[1 - E_n(-(t/tau)^n)] in the unit of R, tau = (RQ)^(1/n) [s], [1].

    resistance R [ohm cm2], cpe Q [S s^n cm^-2], exponent n [1], time_s t >= 0 [s] broadcast.
    An arc without Q or n (NaN) counts fully; R = 0 (an absent arc) gives 0; NaN R gives NaN.
    """
    r, q, n, t = np.broadcast_arrays(
        *(np.asarray(item, dtype=np.float64) for item in (resistance, cpe, exponent, time_s))
    )
    known = np.isfinite(r) & np.isfinite(q) & np.isfinite(n) & (r > 0)
    result = r.copy()
    if known.any():
        tau = time_constant(r[known], q[known], n[known])
        argument = (t[known] / tau) ** n[known]
        result[known] = r[known] * np.clip(1 - mittag_leffler(n[known], argument), 0, 1)
    return result
