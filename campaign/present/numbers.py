"""Numbers as a person reads them: a value rounded to its uncertainty, and no further."""

from __future__ import annotations

import math
from collections.abc import Sequence


def number(value: object, digits: int = 4) -> str:
    """Return a number with `digits` significant digits, '' for None or NaN."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, int):
        return str(value)
    if not isinstance(value, float):
        return str(value)
    if math.isnan(value):
        return ""
    return significant(value, digits)


def significant(value: float, digits: int) -> str:
    """Return `value` with `digits` significant digits, without needless exponents."""
    if value == 0 or not math.isfinite(value):
        return f"{value:g}"
    magnitude = math.floor(math.log10(abs(value)))
    if -5 <= magnitude < max(digits, 6):
        rounded = round(value, digits - 1 - magnitude)
        return f"{rounded:.{max(digits - 1 - magnitude, 0)}f}"
    return f"{value:.{digits - 1}e}"


def decimals_of(uncertainty: float, digits: int = 2) -> int:
    """Return the decimals that show `digits` significant digits of an uncertainty."""
    if not math.isfinite(uncertainty) or uncertainty <= 0:
        return 3
    return max(0, digits - 1 - math.floor(math.log10(uncertainty)))


def with_interval(
    value: float | None, interval: Sequence[float] | None, digits: int = 2
) -> str:
    """Return 'value (low to high)' rounded to the width of the interval."""
    if value is None or math.isnan(value):
        return "-"
    if interval is None:
        return f"{significant(value, 3)} (no interval)"
    low, high = interval
    narrow = min(value - low, high - value)
    decimals = min(decimals_of(narrow if narrow > 0 else (high - low) / 2, digits), 6)
    shown = (_fixed(number, decimals) for number in (value, low, high))
    return "{} ({} to {})".format(*shown)


def _fixed(value: float, decimals: int) -> str:
    """Return a number with fixed decimals, never as a negative zero."""
    text = f"{value:.{decimals}f}"
    return text.lstrip("-") if float(text) == 0 else text


def with_error(value: float | None, error: float | None) -> str:
    """Return 'value ± error', the error with two significant digits."""
    if value is None:
        return ""
    if error is None or not error > 0:
        return number(value)
    decimals = decimals_of(error)
    return f"{value:.{decimals}f} ± {error:.{decimals}f}"


def concise(value: float | None, error: float | None) -> str:
    """Return 'value(error)', the error in units of the last digit shown (GUM, 7.2.2)."""
    if value is None or error is None or not error > 0:
        return number(value)
    decimals = decimals_of(error)
    shown = round(error, decimals)
    digits = f"{shown:.0f}" if decimals == 0 else str(round(shown * 10**decimals))
    return f"{value:.{decimals}f}({digits})"


def share(value: float | None) -> str:
    """Return a share as a whole percentage."""
    return "" if value is None or math.isnan(value) else f"{100 * value:.0f} %"


def percent(value: float | None, interval: Sequence[float] | None) -> str:
    """Return a share as a percentage without its sign, with its interval: '79 (72 to 86)'."""
    if value is None or math.isnan(value):
        return ""
    shown = f"{100 * value:.0f}"
    if interval is None:
        return shown
    return f"{shown} ({100 * interval[0]:.0f} to {100 * interval[1]:.0f})"
