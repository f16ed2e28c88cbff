"""New cells and the conditions to measure them at, and what they cost."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from campaign.kinetics.constants import ZERO_CELSIUS_K
from campaign.ledger.costs import Costs
from campaign.ledger.readings import Readings


@dataclass(frozen=True)
class Condition:
    """One spectrum to be measured: temperature [K], potential [V, NaN: none] vs `reference`.

    ion_content [1] and E_half_V [V] are NaN where the readings to be matched do not state them;
    after_d: days after the first spectrum of the cell.
    """

    temperature_K: float
    potential_V: float
    reference: str
    ion_content: float = float("nan")
    E_half_V: float = float("nan")
    after_d: float = 0.0

    def as_dict(self) -> dict[str, Any]:
        """Return the condition with the units of the flat table."""
        return {
            "temperature_C": round(self.temperature_K - ZERO_CELSIUS_K, 2),
            "potential_V": _known(self.potential_V),
            "reference": self.reference,
            "ion_content": _known(self.ion_content),
            "E_half_V": _known(self.E_half_V),
            "after_d": self.after_d,
        }


def _known(value: float) -> float | None:
    return round(value, 6) if np.isfinite(value) else None


@dataclass(frozen=True)
class NewCell:
    """A cell to be built: its electrode, electrolyte (canonical recipe) and spectra in order.

    known: the campaign has measured this recipe already. repeats: spectra at each condition.
    """

    electrode: str
    electrolyte: str
    conditions: tuple[Condition, ...]
    configuration: str = "three-electrode"
    area_cm2: float = float("nan")
    known: bool = True
    repeats: int = 1

    @property
    def n_spectra(self) -> int:
        """Return the number of spectra of the cell."""
        return len(self.conditions) * self.repeats

    def hours(self, costs: Costs) -> float:
        """Return the bench hours of the cell, without preparing its electrolyte."""
        temperatures = {round(one.temperature_K, 1) for one in self.conditions}
        visits = {(round(one.temperature_K, 1), one.potential_V, one.after_d)
                  for one in self.conditions}  # fmt: skip
        return (
            costs.build_cell
            + costs.change_temperature * (len(temperatures) - 1)
            + costs.settle_potential * len(visits)
            + costs.measure * self.n_spectra
        )


def hours_of(cells: Iterable[NewCell], costs: Costs) -> float:
    """Return the bench hours [h] of a set of cells; a new recipe is prepared once."""
    built = list(cells)
    fresh = {one.electrolyte for one in built if not one.known}
    return sum(one.hours(costs) for one in built) + costs.prepare_electrolyte * len(fresh)


def grouped(cells: Iterable[NewCell]) -> list[tuple[NewCell, int]]:
    """Return equal cells once with their number, in the order they first occur."""
    return list(Counter(cells).items())


def as_dicts(cells: Iterable[NewCell]) -> list[dict[str, Any]]:
    """Return what is to be added as JSON-ready data."""
    return [
        {
            "cells": count,
            "electrolyte": one.electrolyte,
            "configuration": one.configuration,
            "new_electrolyte": not one.known,
            "spectra_at_each": one.repeats,
            "conditions": [condition.as_dict() for condition in one.conditions],
        }
        for one, count in grouped(cells)
    ]


def like(
    readings: Readings, rows: Sequence[int], electrode: str, electrolyte: str,
    conditions: Sequence[Condition], known: bool = True, repeats: int = 1,
) -> NewCell:  # fmt: skip
    """Return a new cell built as the cells behind `rows` of the readings were."""
    index = np.asarray(rows, np.int64)
    return NewCell(
        electrode=electrode,
        electrolyte=electrolyte,
        conditions=tuple(conditions),
        configuration=_commonest(readings.configuration[index]),
        area_cm2=float(_commonest(readings.area_cm2[index])),
        known=known,
        repeats=repeats,
    )


def condition_of(readings: Readings, rows: Sequence[int], after_d: float = 0.0) -> Condition:
    """Return the condition that readings of one stratum share (means, rounded as set)."""
    index = np.asarray(rows, np.int64)
    reference = _commonest(readings.reference[index])
    same = index[readings.reference[index] == reference]
    return Condition(
        temperature_K=_in_tenths_of_a_degree(float(readings.temperature_K[same].mean())),
        potential_V=_mean(readings.potential_V[same], 3),
        reference=str(reference),
        ion_content=_mean(readings.ion_content[same], 3),
        E_half_V=_mean(readings.E_half_V[same], 3),
        after_d=after_d,
    )  # fmt: skip


def _in_tenths_of_a_degree(temperature_K: float) -> float:
    return round(round(temperature_K - ZERO_CELSIUS_K, 1) + ZERO_CELSIUS_K, 6)


def _mean(values: Any, digits: int) -> float:
    known = values[np.isfinite(values)]
    return round(float(np.median(known)), digits) if len(known) else float("nan")


def _commonest(values: Any) -> Any:
    counted = Counter(values.tolist())
    return max(sorted(counted), key=lambda one: counted[one])


def described(cells: Sequence[NewCell]) -> str:
    """Return a set of cells as a phrase: '2 more cells of ... and 1 of ... at 25 degC ...'."""
    groups = grouped(cells)
    parts = []
    for position, (one, count) in enumerate(groups):
        noun = f" more cell{'s' if count != 1 else ''}" if position == 0 else ""
        parts.append(f"{count}{noun} of {one.electrolyte}")
    listed = parts[0] if len(parts) == 1 else f"{', '.join(parts[:-1])} and {parts[-1]}"
    return f"{listed} {at(cells)}".strip()


def at(cells: Sequence[NewCell]) -> str:
    """Return the conditions of a set of cells as a phrase."""
    distinct = list(dict.fromkeys(one.conditions for one in cells))
    repeats = max(one.repeats for one in cells)
    times = f", {repeats} spectra at each" if repeats > 1 else ""
    if len(distinct) > 1 and len({_shown(one) for one in distinct}) > 1:
        return f"each at the conditions of its series{times}"
    return f"at {_shown(distinct[0])}{times}"


def _shown(conditions: Sequence[Condition]) -> str:
    temperatures = sorted({round(one.temperature_K - ZERO_CELSIUS_K, 1) for one in conditions})
    potentials = list(dict.fromkeys((one.potential_V, one.reference) for one in conditions))
    later = max(one.after_d for one in conditions)
    text = ", ".join(f"{value:g}" for value in temperatures) + " degC"
    known = [(value, reference) for value, reference in potentials if np.isfinite(value)]
    if known:
        values = ", ".join(f"{value:g}" for value, _ in sorted(known))
        references = list(dict.fromkeys(reference for _, reference in known if reference))
        text += f", {values} V" + (f" vs {references[0]}" if len(references) == 1 else "")
    if later:
        text += f", and again after {later:.3g} d"
    return text
