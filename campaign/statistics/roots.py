"""The root of a function of one number inside a bracket.

[1] R. P. Brent, Algorithms for Minimization without Derivatives (1973), ch. 4: bisection,
    secant and inverse quadratic steps.
"""

from __future__ import annotations

import math
from collections.abc import Callable

_STEPS = 500


def root(
    function: Callable[[float], float],
    low: float,
    high: float,
    *,
    xtol: float,
    rtol: float = 1e-15,
) -> float:
    """Return x in [low, high] with function(x) = 0, to xtol + rtol |x| [1].

    Raises ValueError where the function has one sign at both ends.
    """
    a, b = low, high
    fa, fb = function(a), function(b)
    if fa == 0.0 or fb == 0.0:
        return a if fa == 0.0 else b
    if (fa > 0.0) == (fb > 0.0):
        raise ValueError("the function has the same sign at both ends of the bracket")
    c, fc = a, fa
    last = before = b - a
    for _ in range(_STEPS):
        if (fb > 0.0) == (fc > 0.0):
            c, fc = a, fa
            last = before = b - a
        if abs(fc) < abs(fb):
            a, b, c, fa, fb, fc = b, c, b, fb, fc, fb
        tolerance = 0.5 * (xtol + rtol * abs(b))
        middle = 0.5 * (c - b)
        if abs(middle) <= tolerance or fb == 0.0:
            return b
        step = middle
        if abs(before) >= tolerance and abs(fa) > abs(fb):
            step = _interpolated(a, b, c, fa, fb, fc, middle, tolerance, before)
        before, last = (last, step) if step != middle else (middle, middle)
        a, fa = b, fb
        b += step if abs(step) > tolerance else math.copysign(tolerance, middle)
        fb = function(b)
    return b


def _interpolated(
    a: float, b: float, c: float, fa: float, fb: float, fc: float,
    middle: float, tolerance: float, before: float,
) -> float:  # fmt: skip
    """Return the secant or inverse quadratic step, or the bisection where it goes too far."""
    s = fb / fa
    if a == c:
        p, q = 2.0 * middle * s, 1.0 - s
    else:
        q, r = fa / fc, fb / fc
        p = s * (2.0 * middle * q * (q - r) - (b - a) * (r - 1.0))
        q = (q - 1.0) * (r - 1.0) * (s - 1.0)
    q, p = (-q, p) if p > 0.0 else (q, -p)
    fits = 2.0 * p < min(3.0 * middle * q - abs(tolerance * q), abs(before * q))
    return p / q if fits else middle
