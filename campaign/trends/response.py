"""The response of every trend: ln of the area-specific resistance of one interface.

R_el, R_sl, R_ct, R_lat and R_int = R_sl + R_ct + R_lat in ohm cm2; sigma_w in
ohm cm2 s^-1/2. A symmetric cell has two identical interfaces in series: its arcs and its
sigma_w are halved, its R_el is not.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from campaign.errors import refused
from campaign.ledger.readings import BoolArray, FloatArray, Readings
from campaign.trends.pores import Pores

ARCS = ("R_sl", "R_ct", "R_lat")
LARGEST_RELATIVE_ERROR = 10.0
"""A fit that wrong carries no weight whatever its error was; larger ones are cut to this."""

RESPONSES = ("R_el", "R_sl", "R_ct", "R_lat", "R_int", "sigma_w")


@dataclass(frozen=True)
class Response:
    """One response of an electrode's readings, row by row [n].

    y: ln of the area-specific value, NaN where there is none. variance: (SE/R)^2 of the
    fit. filled: True where the standard error is the electrode's median relative one.
    absent: True where the arc was looked for and is not there.
    open_because: why concentration and barrier decisions are open (pores), or None.
    """

    name: str
    unit: str
    y: FloatArray
    variance: FloatArray
    filled: BoolArray
    absent: BoolArray
    warnings: tuple[str, ...] = ()
    open_because: str | None = None


def unit(name: str) -> str:
    """Return the unit of a response."""
    return "ohm cm2 s^-1/2" if name == "sigma_w" else "ohm cm2"


def respond(readings: Readings, name: str, pores: Pores | None = None) -> Response:
    """Return the response `name` of one electrode's `readings`.

    pores: the pore ionic resistance of a porous electrode; R_ct is then solved from the
    apparent value first. Raises Refused for an unknown response.
    """
    if name not in RESPONSES:
        raise refused(
            f"There is no response {name}.", value=name, expected="one of " + ", ".join(RESPONSES)
        )
    parts = ARCS if name == "R_int" else (name,)
    solved = [_quantity(readings, part, pores) for part in parts]
    whole = _sum(solved) if name == "R_int" else solved[0]
    value, error, absent = whole.value, whole.error, whole.absent
    filled = whole.filled & np.isfinite(value)
    with np.errstate(invalid="ignore", divide="ignore"):
        y = np.where(value > 0, np.log(value), np.nan)
        relative = np.minimum(error / value, LARGEST_RELATIVE_ERROR)
        variance = np.where(np.isfinite(y), relative**2, np.nan)
    variance = np.where(np.isfinite(y) & ~np.isfinite(variance), 0.0, variance)
    warnings = [text for part in solved for text in part.warnings]
    if filled.any():
        warnings.append(
            f"{int(filled.sum())} values without a standard error took the median relative "
            "error of the electrode"
            if variance[filled].any()
            else f"{int(filled.sum())} values without a standard error, and none to take it from: "
            "the scatter between readings stands for it"
        )
    reason = next((part.open_because for part in solved if part.open_because), None)
    return Response(name, unit(name), y, variance, filled, absent, tuple(warnings), reason)


def per_interface(readings: Readings, quantity: str) -> tuple[FloatArray, FloatArray]:
    """Return value and standard error of a fitted resistance per area and interface.

    [ohm cm2], or [ohm cm2 s^-1/2] for sigma_w; NaN where not fitted or absent.
    """
    share = np.where(readings.configuration == "symmetric", 0.5, 1.0)
    scale = readings.area_cm2 * (share if quantity != "R_el" else 1.0)
    return readings.values[quantity] * scale, readings.se[quantity] * scale


@dataclass(frozen=True)
class _Part:
    value: FloatArray
    error: FloatArray
    absent: BoolArray
    filled: BoolArray
    warnings: tuple[str, ...] = ()
    open_because: str | None = None


def _quantity(readings: Readings, name: str, pores: Pores | None) -> _Part:
    value, error = per_interface(readings, name)
    with np.errstate(invalid="ignore", divide="ignore"):
        relative = error / value
    known = np.isfinite(relative) & (relative >= 0)
    filled = np.isfinite(value) & ~known
    usual = float(np.median(relative[known])) if known.any() else 0.0
    error = np.where(filled, usual * value, error)
    absent = np.asarray(readings.absent[name], np.bool_)
    if name != "R_ct" or pores is None:
        return _Part(value, error, absent, filled)
    solved = pores.solve(readings, value)
    return _Part(
        solved.value, error / value * solved.sensitivity * solved.value, absent, filled,
        solved.warnings, solved.open_because,
    )  # fmt: skip


def _sum(parts: list[_Part]) -> _Part:
    """Add the arcs: an absent one adds zero, one not fitted makes the sum missing."""
    value = np.zeros_like(parts[0].value)
    square = np.zeros_like(value)
    for part in parts:
        value = value + np.where(part.absent, 0.0, part.value)
        square = square + np.where(part.absent, 0.0, part.error) ** 2
    absent = np.all([part.absent for part in parts], axis=0)
    filled = np.any([part.filled for part in parts], axis=0)
    return _Part(value, np.sqrt(square), absent, filled)
