"""The run sheet of a proposal: rows of the flat table with conditions filled, results empty.

Cells are built in blocks that hold each kind of cell once, in random order inside a block:
what is compared is then spread evenly over time, and age or date cannot stand in for it. Within
a cell the conditions come in random order too, except where the order is the point (age).
"""

from __future__ import annotations

import math
import re
from collections.abc import Collection, Sequence
from typing import Any

import numpy as np

from campaign.diagnosis.next_cells import Condition, NewCell, grouped
from campaign.kinetics.constants import ZERO_CELSIUS_K
from campaign.ledger.readings import Snapshot

Row = dict[str, Any]


def run_order(cells: Sequence[NewCell], seed: int) -> list[tuple[int, NewCell]]:
    """Return (block, cell) in the order the cells are to be built."""
    rng = np.random.default_rng(seed)
    kinds = grouped(cells)
    found: list[tuple[int, NewCell]] = []
    for block in range(max((count for _, count in kinds), default=0)):
        inside = [kind for kind, count in kinds if count > block]
        found += [(block + 1, inside[place]) for place in rng.permutation(len(inside))]
    return found


def sheet(snapshot: Snapshot, cells: Sequence[NewCell], seed: int) -> list[Row]:
    """Return the rows of the run sheet, canonical header -> value (None for empty).

    seed: of the random order; it is stated in every row's note.
    """
    rng = np.random.default_rng([seed, 1])
    order = run_order(cells, seed)
    labels = new_labels(snapshot, [cell.electrode for _, cell in order])
    rows = []
    for run, ((block, cell), label) in enumerate(zip(order, labels, strict=True), start=1):
        note = f"planned: cell {run} of {len(order)}, block {block}, order from seed {seed}"
        for condition in _conditions(cell, rng):
            later = f"; {condition.after_d:.3g} d after the first" if condition.after_d else ""
            rows.append(_row(snapshot, cell, label, condition, note + later))
    return rows


def _conditions(cell: NewCell, rng: np.random.Generator) -> list[Condition]:
    """Return the conditions of a cell in the order to be measured, repeats apart."""
    found: list[Condition] = []
    for _ in range(cell.repeats):
        mixed = [cell.conditions[place] for place in rng.permutation(len(cell.conditions))]
        found += sorted(mixed, key=lambda one: one.after_d)
    return sorted(found, key=lambda one: one.after_d)


def _row(snapshot: Snapshot, cell: NewCell, label: str, at: Condition, note: str) -> Row:
    facts = snapshot.electrodes.get(cell.electrode)
    return {
        "electrode": cell.electrode,
        "material": facts.material or None if facts else None,
        "ion": facts.ion if facts else None,
        "form": facts.form or None if facts else None,
        "cell": label,
        "area_cm2": _number(cell.area_cm2),
        "configuration": cell.configuration,
        "reference": at.reference or None,
        "electrolyte": cell.electrolyte,
        "potential_V": _number(at.potential_V),
        "temperature_C": round(at.temperature_K - ZERO_CELSIUS_K, 2),
        "ion_content": _number(at.ion_content),
        "E_half_V": _number(at.E_half_V),
        "note": note,
    }


def _number(value: float) -> float | None:
    return float(value) if math.isfinite(value) else None


def new_labels(snapshot: Snapshot, electrodes: Sequence[str]) -> list[str]:
    """Return a label not in use for each new cell, going on from its electrode's labels."""
    r = snapshot.readings
    taken = set(r.cell.tolist()) | set(r.specimen.tolist())
    found: list[str] = []
    for electrode in electrodes:
        label = _next(taken, set(r.cell[r.electrode == electrode].tolist()) | set(found))
        taken.add(label)
        found.append(label)
    return found


_NUMBERED = re.compile(r"(.*?)(\d+)$")


def _next(taken: Collection[str], own: Collection[str]) -> str:
    """Return the label after the highest of the commonest kind, such as D05 after D04."""
    numbered = [match for match in map(_NUMBERED.match, sorted(own)) if match]
    starts = [match[1] for match in numbered]
    start = max(sorted(set(starts)), key=starts.count) if starts else "new-"
    digits = [match[2] for match in numbered if match[1] == start]
    width = max(map(len, digits), default=2)
    number = max(map(int, digits), default=0) + 1
    while f"{start}{number:0{width}d}" in taken:
        number += 1
    return f"{start}{number:0{width}d}"
