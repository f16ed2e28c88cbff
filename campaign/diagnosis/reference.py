"""The condition at which the terms of an electrode are weighed against each other."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from campaign.kinetics.constants import ZERO_CELSIUS_K
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import BoolArray, IntArray, Readings
from campaign.trends.strata import combine, factor, match

ROOM_K = ZERO_CELSIUS_K + 25


@dataclass(frozen=True)
class Condition:
    """Readings under one electrolyte, temperature and potential.

    temperature_K [K] and potential_V [V, NaN in cells without one] are means over the rows;
    rows index the readings they were found in; others: the same temperature and potential in
    other electrolytes.
    """

    electrolyte: str
    salt: str
    solvents: str
    additives: str
    concentration: float
    basis: str
    temperature_K: float
    potential_V: float
    reference: str
    rows: tuple[int, ...]
    n_specimens: int
    key: tuple[int, str, int]
    others: tuple[Condition, ...] = field(default=(), repr=False)


def peers(condition: Condition) -> tuple[Condition, ...]:
    """Return the conditions of other electrolytes at the same temperature and potential."""
    return condition.others


def conditions(
    readings: Readings, criteria: Criteria, usable: BoolArray | None = None
) -> list[Condition]:
    """Return every combination of electrolyte, temperature and potential that was measured."""
    temperature = match(readings.temperature_K, criteria.temperature_tolerance_K).codes
    potential = match(readings.potential_V, criteria.potential_tolerance_V).codes
    electrolyte, reference = factor(readings.electrolyte), factor(readings.reference)
    code = combine(electrolyte.codes, temperature, reference.codes, potential)
    rows = np.arange(len(readings)) if usable is None else np.flatnonzero(usable)
    if not len(rows):
        return []
    order = rows[np.argsort(code[rows], kind="stable")]
    groups = np.split(order, np.flatnonzero(np.diff(code[order])) + 1)
    groups.sort(key=lambda group: int(group[0]))
    return [_condition(readings, _key(readings, temperature, potential, group[0]), group.tolist())
            for group in groups]  # fmt: skip


def _key(
    readings: Readings, temperature: IntArray, potential: IntArray, row: int
) -> tuple[str, int, str, int]:
    return (
        str(readings.electrolyte[row]), int(temperature[row]),
        str(readings.reference[row]), int(potential[row]),
    )  # fmt: skip


def _condition(
    readings: Readings, key: tuple[str, int, str, int], rows: Sequence[int]
) -> Condition:
    first, index = rows[0], np.array(rows)
    return Condition(
        electrolyte=key[0],
        salt=str(readings.salt[first]),
        solvents=str(readings.solvents[first]),
        additives=str(readings.additives[first]),
        concentration=float(readings.concentration[first]),
        basis=str(readings.basis[first]),
        temperature_K=float(readings.temperature_K[index].mean()),
        potential_V=float(readings.potential_V[index].mean()),
        reference=key[2],
        rows=tuple(rows),
        n_specimens=len(set(readings.specimen[index].tolist())),
        key=(key[1], key[2], key[3]),
    )


def reference_condition(
    readings: Readings, criteria: Criteria, usable: BoolArray | None = None
) -> Condition | None:
    """Return the reference condition, or None where there is no usable reading.

    Most specimens; then nearest 25 C; ties go to the lower temperature, then to the potential
    nearest the median one, then to the concentration nearest the median one, then by name.
    """
    found = conditions(readings, criteria, usable)
    if not found:
        return None
    potential = _median([one.potential_V for one in found])
    concentration = _median([one.concentration for one in found])

    def rank(one: Condition) -> tuple[float | int | str, ...]:
        # temperatures of one group differ by tenths of a kelvin between electrolytes: the
        # distance from 25 C is compared between groups, so by their common mean
        group = temperatures[one.key[0]]
        return (
            -one.n_specimens,
            round(abs(group - ROOM_K), 6),
            group,
            _distance(one.potential_V, potential),
            _distance(one.concentration, concentration),
            one.electrolyte,
            one.reference,
            _distance(one.potential_V, 0.0),
        )

    temperatures = {
        code: float(np.mean([one.temperature_K for one in found if one.key[0] == code]))
        for code in {one.key[0] for one in found}
    }
    best = min(found, key=rank)
    others = tuple(one for one in found if one.key == best.key and one is not best)
    return Condition(**{**best.__dict__, "others": others})


def _median(values: Sequence[float]) -> float:
    known = [value for value in values if np.isfinite(value)]
    return float(np.median(known)) if known else float("nan")


def _distance(value: float, centre: float) -> float:
    distance = abs(value - centre)
    return round(distance, 9) if np.isfinite(distance) else float("inf")
