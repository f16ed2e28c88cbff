"""Do the fitted arcs carry the right names? Checks that lower the strength when they fail.

[1] G. J. Brug et al., J. Electroanal. Chem. 176 (1984) 275 (effective capacitance).
The order of the time constants, the flat surface-layer resistance and the ranges of
capacitance are common practice, no source; the ranges are from memory and wide on purpose:
they catch an arc assigned to the wrong process, not an unusual electrode.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final, Literal

import numpy as np

from campaign.diagnosis.budget import ARCS, Terms, terms_of
from campaign.diagnosis.wording import Decider, is_testable, numbers
from campaign.kinetics.cpe import brug_capacitance, hsu_mansfeld_capacitance, time_constant
from campaign.ledger.readings import BoolArray, ElectrodeFacts, FloatArray, Readings
from campaign.trends.scales import in_plateau

Outcome = Literal["passes", "fails", "untested"]

CAPACITANCE_F_cm2: Final = {
    "R_sl": (1e-9, 1e-3),
    "R_ct": (1e-7, 3e-2),
    "R_lat": (1e-5, 1e2),
}
"""Usual effective capacitance per geometric area [F cm^-2], porous composites included."""

TOLERATED: Final = 0.05
"""Share of the tested measurements that may break a rule before the check fails [1]."""

MOSTLY: Final = 0.5
"""Share of measurements in a declared plateau from which the plateau check fails [1]."""


@dataclass(frozen=True)
class Check:
    """One assignment check: its outcome, how many measurements it tested, which break it."""

    name: str
    outcome: Outcome
    tested: int
    measurements: tuple[int, ...]
    sentence: str


def assignment_checks(
    readings: Readings,
    facts: ElectrodeFacts | None = None,
    film_potential: Decider | None = None,
    alpha: float = 0.05,
) -> tuple[Check, ...]:
    """Return the checks on one electrode's readings.

    film_potential: the finding of R_sl against potential.
    """
    values = terms_of(readings)
    return (
        _time_constants(readings, values),
        _flat_film(readings, values, film_potential, alpha),
        _no_film_in_water(readings, values),
        *(_capacitance(readings, values, arc) for arc in ARCS),
        _plateaus(readings, facts),
        _absent_arcs(readings, values),
    )


def failed(checks: Sequence[Check]) -> tuple[str, ...]:
    """Return the names of the checks that fail."""
    return tuple(one.name for one in checks if one.outcome == "fails")


def _check(
    name: str,
    readings: Readings,
    tested: BoolArray,
    broken: BoolArray,
    sentence: str,
    tolerated: float = TOLERATED,
) -> Check:
    """Return a check that fails when more than `tolerated` of the tested rows are broken."""
    count, bad = int(tested.sum()), int((broken & tested).sum())
    if count == 0:
        return Check(name, "untested", 0, (), f"{sentence}: no measurement to test it on")
    measurements = tuple(int(one) for one in readings.measurement[broken & tested])
    outcome: Outcome = "fails" if bad > tolerated * count else "passes"
    return Check(name, outcome, count, measurements, f"{sentence}: broken in {bad} of {count}")


def _shown(values: Terms, arc: str) -> BoolArray:
    """Return where an arc is fitted (neither missing nor absent)."""
    return np.asarray(values.values[arc] > 0)


def _complete(values: Terms, arc: str) -> BoolArray:
    known = np.isfinite(values.cpe[arc]) & np.isfinite(values.exponent[arc])
    return np.asarray(_shown(values, arc) & known)


def _tau(values: Terms, arc: str) -> FloatArray:
    tau = np.full(len(values.values[arc]), np.nan)
    rows = _complete(values, arc)
    tau[rows] = time_constant(
        values.values[arc][rows], values.cpe[arc][rows], values.exponent[arc][rows]
    )
    return tau


def _time_constants(readings: Readings, values: Terms) -> Check:
    tau = [_tau(values, arc) for arc in ("R_sl", "R_ct", "R_lat")]
    tested = np.zeros(len(readings), dtype=bool)
    broken = tested.copy()
    for fast, slow in ((0, 1), (1, 2), (0, 2)):
        both = np.isfinite(tau[fast]) & np.isfinite(tau[slow])
        tested |= both
        broken |= both & ~(tau[fast] < tau[slow])
    return _check("order of time constants", readings, tested, broken, "tau_sl < tau_ct < tau_lat")


def _flat_film(readings: Readings, values: Terms, finding: Decider | None, alpha: float) -> Check:
    name, rule = "R_sl flat in potential", "a surface layer does not follow the potential"
    rows = _shown(values, "R_sl")
    decision = "open" if finding is None or not is_testable(finding) else finding.decision(alpha)
    if decision == "open":
        return Check(name, "untested", 0, (), f"{rule}: not decided")
    figure = numbers("potential", finding, alpha)
    if decision == "unresponsive":
        return Check(name, "passes", int(rows.sum()), (), f"{rule}: unresponsive ({figure})")
    named = tuple(int(one) for one in readings.measurement[rows])
    return Check(name, "fails", len(named), named, f"{rule}: R_sl responds ({figure})")


def _no_film_in_water(readings: Readings, values: Terms) -> Check:
    plain = np.isin(readings.additives.astype(str), ("none", ""))
    tested = np.asarray(readings.aqueous, dtype=bool) & plain
    return _check(
        "no R_sl in water", readings, tested, _shown(values, "R_sl"),
        "additive-free aqueous electrolytes form no film (common practice)",
    )  # fmt: skip


def _capacitance(readings: Readings, values: Terms, arc: str) -> Check:
    rows = _complete(values, arc)
    capacitance = np.full(len(readings), np.nan)
    arguments = (values.values[arc][rows], values.cpe[arc][rows], values.exponent[arc][rows])
    R_el = values.values["R_el"][rows]
    ohmic = R_el > 0
    capacitance[rows] = np.where(
        ohmic,
        brug_capacitance(np.where(ohmic, R_el, 1.0), *arguments),
        hsu_mansfeld_capacitance(*arguments),
    )
    low, high = CAPACITANCE_F_cm2[arc]
    broken = rows & ~((capacitance >= low) & (capacitance <= high))
    spread = ""
    if rows.any():
        spread = f" (found {capacitance[rows].min():.2g} to {capacitance[rows].max():.2g})"
    return _check(
        f"capacitance of {arc}", readings, rows, broken,
        f"usual from {low:.0e} to {high:.0e} F/cm2{spread}",
    )  # fmt: skip


def _plateaus(readings: Readings, facts: ElectrodeFacts | None) -> Check:
    name, rule = "plateau points", "most measurements lie outside declared two-phase plateaus"
    if facts is None or not facts.plateaus:
        return Check(name, "untested", 0, (), f"{rule}: none is declared")
    inside, unchecked = in_plateau(readings, facts)
    tested = np.isfinite(readings.potential_V)
    check = _check(name, readings, tested, np.asarray(inside, dtype=bool), rule, MOSTLY)
    if not unchecked:
        return check
    return Check(
        check.name, check.outcome, check.tested, check.measurements,
        "; ".join((check.sentence, *unchecked)),
    )  # fmt: skip


def _absent_arcs(readings: Readings, values: Terms) -> Check:
    """An arc absent in some cells of an electrolyte and fitted in others is not one process."""
    tested = np.zeros(len(readings), dtype=bool)
    broken = tested.copy()
    for arc in ("R_sl", "R_lat"):
        gone = np.asarray(readings.absent[arc], dtype=bool)
        shown = _shown(values, arc)
        for electrolyte in set(readings.electrolyte[gone].tolist()):
            here = (readings.electrolyte == electrolyte) & (gone | shown)
            tested |= here
            rarer = gone if (gone & here).sum() <= (shown & here).sum() else shown
            broken |= here & rarer
    return _check(
        "absent arcs", readings, tested, broken,
        "an arc is absent from all cells of an electrolyte or from none",
    )  # fmt: skip
