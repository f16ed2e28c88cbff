"""How instants, numbers and electrolytes are written in the tables."""

from __future__ import annotations

import math
from datetime import datetime, timedelta, timezone

from maker.plan import Cell

SUMMER = (datetime(2026, 3, 29, 2), timedelta(hours=2), timedelta(hours=1))


def instant(at: datetime) -> str:
    """Return a local instant with its offset: UTC+1, in summer UTC+2."""
    start, summer, winter = SUMMER
    zone = timezone(summer if at >= start else winter)
    return at.replace(tzinfo=zone).isoformat(timespec="minutes")


def significant(value: float, digits: int = 4) -> str:
    """Return a number in plain decimals where that reads well, else with an exponent."""
    if 1e-3 <= abs(value) < 1e6:
        return f"{value:.{max(digits - 1 - math.floor(math.log10(abs(value))), 0)}f}"
    return f"{value:.{digits - 1}e}"


def decimals(se: float) -> int:
    """Return the decimals that show a standard error with two digits."""
    return max(1 - math.floor(math.log10(se)), 0)


def plus_minus(value: float, se: float) -> str:
    """Return value±se, the error with two digits."""
    places = decimals(se)
    return f"{value:.{places}f}±{se:.{places}f}"


def in_brackets(value: float, se: float) -> str:
    """Return value(se) with the error in units of the last digits (GUM 7.2.2)."""
    places = decimals(se)
    return f"{value:.{places}f}({round(se * 10**places)})"


def recipe(cell: Cell, style: int) -> str:
    """Return the electrolyte as people write it, in one of three spellings."""
    medium = cell.medium
    added = f" + {medium.additive}" if medium.additive else ""
    blend = medium.solvents
    if style == 0:
        return f"{cell.molarity:g} M {cell.salt} in {blend}{added}"
    if style == 1:
        return f"{cell.molarity} mol/L {cell.salt} in {blend}{added}"
    if " (" in blend:
        names, ratio = blend.rstrip(")").split(" (")
        return f"{cell.molarity} mol/L {cell.salt} in {names.replace(':', '/')} {ratio}{added}"
    return f"{cell.molarity} mol dm-3 {cell.salt} / {blend}{added}"
