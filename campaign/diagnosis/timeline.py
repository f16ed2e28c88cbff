"""The verdict as it stood at the end of each period: when it was settled, whether it flipped."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, fields
from typing import Any, Final

from campaign.diagnosis.headline import with_headline
from campaign.diagnosis.summary import EvidenceSource, diagnose, of_electrode, to_row
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrodeFacts, Readings, Snapshot

Row = dict[str, Any]

UNNAMED: Final = ("undetermined", "conflicting")
FIRM: Final = ("moderate", "strong")


@dataclass(frozen=True)
class Moment:
    """A campaign and its criteria as they stood at the end of a period (its last local day)."""

    period: str
    last_day: str
    snapshot: Snapshot
    criteria: Criteria


def follow(moments: Iterable[Moment], evidence: EvidenceSource | None = None) -> list[Row]:
    """Return a row for every electrode with readings at every moment, marked.

    An electrode of which nothing changed since the moment before keeps its row. `mark` says
    what a row is to the rows before it: settled, flipped or reopened ('' = none of them).
    """
    known: dict[str, tuple[Any, Row]] = {}
    rows: list[Row] = []
    for moment in moments:
        for label in sorted(set(moment.snapshot.readings.electrode.tolist())):
            part = of_electrode(moment.snapshot, label)
            stamp = _stamp(part.readings, part.electrodes.get(label), part, moment.criteria)
            if label not in known or known[label][0] != stamp:
                known[label] = (stamp, _row(part, moment.criteria, evidence))
            at = {"period": moment.period, "last_day": moment.last_day}
            rows.append({**at, **known[label][1]})
    for label in known:
        _mark([row for row in rows if row["electrode"] == label])
    return rows


def _stamp(
    readings: Readings, facts: ElectrodeFacts | None, part: Snapshot, criteria: Criteria
) -> tuple[Any, ...]:
    """Return what a verdict rests on, in a form that compares equal where nothing changed."""
    columns: list[Any] = []
    for one in fields(readings):
        column = getattr(readings, one.name)
        for array in column.values() if isinstance(column, Mapping) else (column,):
            columns.append(
                tuple(array.tolist()) if array.dtype == object else array.tobytes()
            )
    recipes = sorted(set(readings.electrolyte.tolist()))
    return (*columns, facts, tuple(part.electrolytes.get(name) for name in recipes), criteria)


def _row(part: Snapshot, criteria: Criteria, evidence: EvidenceSource | None) -> Row:
    (found,) = diagnose(part, criteria, evidence=evidence)
    whole = to_row(found)
    if evidence is None:
        whole = with_headline(whole, part, criteria, found)
    diagnostics = whole["diagnostics"]
    order, solvent = diagnostics["concentration"], diagnostics["solvent"]
    barrier = diagnostics["barrier"]
    barriers = [
        one["Ea_kJ_mol"] for one in barrier.get("series", ()) if one["Ea_kJ_mol"] is not None
    ]
    return {
        "electrode": whole["electrode"],
        "n_specimens": whole["n_specimens"],
        "n_measurements": whole["n_measurements"],
        "dominant": whole["dominant"],
        "share": whole["share"],
        "share_ci": whole["share_ci"],
        "order": order["estimate"],
        "order_ci": order["interval"],
        "solvent_ratio": solvent["estimate"],
        "solvent_ratio_ci": solvent["interval"],
        "solvent_between": solvent.get("between"),
        "Ea_kJ_mol": [min(barriers), max(barriers)] if barriers else None,
        "Ea_difference_kJ_mol": barrier["estimate"],
        "Ea_difference_ci": barrier["interval"],
        "decisions": {axis: one["decision"] for axis, one in diagnostics.items()},
        "verdict": whole["verdict"],
        "strength": whole["strength"],
        "text": whole["text"],
    }


def _named(row: Row) -> bool:
    return row["verdict"] not in UNNAMED


def _firm(row: Row) -> bool:
    return _named(row) and row["strength"] in FIRM


def _mark(rows: Sequence[Row]) -> None:
    """Mark the rows of one electrode, in order of time."""
    start = _settled_from(rows)
    control = ""
    before: Row | None = None
    for index, row in enumerate(rows):
        row["settled"] = start is not None and index >= start
        row["flipped"] = bool(control) and _named(row) and row["verdict"] != control
        row["mark"] = ""
        if row["flipped"]:
            row["mark"] = f"flipped from {control}"
        elif before is not None and _firm(before) and not _firm(row):
            row["mark"] = "reopened"
        if index == start:
            row["mark"] = f"{row['mark']}, settled".lstrip(", ")
        if _named(row):
            control = row["verdict"]
        before = row


def _settled_from(rows: Sequence[Row]) -> int | None:
    """Return from which row on a control is named firmly and stays so to the end."""
    if not rows or not _firm(rows[-1]):
        return None
    start = len(rows) - 1
    while start and _firm(rows[start - 1]) and rows[start - 1]["verdict"] == rows[-1]["verdict"]:
        start -= 1
    return start


def conclusions(rows: Sequence[Row]) -> list[Row]:
    """Return for every electrode when its question was settled and how often it flipped."""
    found = []
    for label in dict.fromkeys(row["electrode"] for row in rows):
        own = [row for row in rows if row["electrode"] == label]
        settled = next((row for row in own if row["settled"]), None)
        found.append(
            {
                "electrode": label,
                "verdict": own[-1]["verdict"],
                "strength": own[-1]["strength"],
                "settled_in": settled["period"] if settled else None,
                "measurements_then": settled["n_measurements"] if settled else None,
                "ever_named": any(_named(row) for row in own),
                "flips": sum(row["flipped"] for row in own),
                "flipped_in": [row["period"] for row in own if row["flipped"]],
            }
        )
    return found
