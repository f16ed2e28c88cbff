"""Setting the criteria of a campaign, with a reason, and reading their history back."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import asdict
from difflib import get_close_matches
from typing import TYPE_CHECKING, Any, Final

from sqlalchemy import select

from campaign.errors import Fault, Refused, refused
from campaign.ledger import schema
from campaign.ledger.criteria import LIMITS, Criteria
from campaign.ledger.durations import read_duration
from campaign.ledger.fields import clean_text
from campaign.ledger.journal import writing
from campaign.ledger.settings import criteria, in_force

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from campaign.ledger.database import Database

Row = dict[str, Any]

MEANINGS: Final[Mapping[str, tuple[str, str]]] = {
    "order_margin": ("", "an order inside it, both ways, is no response to concentration"),
    "ratio_margin": ("factor", "ratios inside it are no response to solvent, additive, E or age"),
    "barrier_margin_kJ_mol": ("kJ/mol", "barrier differences inside it are none"),
    "error_probability": ("", "two-sided, of one decision"),
    "potential_window_V": ("V", "the least window that a decision on potential needs"),
    "temperature_tolerance_K": ("K", "temperatures closer than this are one temperature"),
    "potential_tolerance_V": ("V", "potentials closer than this are one potential"),
    "content_tolerance": ("", "ion contents closer than this are one ion content"),
    "working_time_s": ("s", "time after a current step at which the terms are weighed"),
    "confounding_r": ("", "|r| with age, date or batch above which a trend is confounded"),
    "heterogeneity_p": ("", "below it strata that decide differently leave it open"),
}
"""Unit and meaning of each criterion."""

ALL: Final = "all"

_DEFAULTS: Final[dict[str, float]] = asdict(Criteria())
_BELOW_HALF: Final = "error_probability"


def read_assignments(texts: Sequence[str]) -> dict[str, float]:
    """Return criterion -> value for NAME=VALUE texts; a time may carry its unit.

    Raises Refused with every fault: unknown names (with near ones), values that are no
    number or outside their limits, a name given twice.
    """
    found: dict[str, float] = {}
    faults: list[Fault] = []
    for text in texts:
        try:
            name, value = _assignment(text)
            if name in found:
                raise refused(
                    f"{name} is given twice; give it once", column=name, expected="each name once"
                )
            found[name] = value
        except Refused as error:
            faults += error.faults
    if faults:
        raise Refused(faults)
    return found


def read_names(names: Sequence[str]) -> tuple[str, ...]:
    """Return the criteria named; 'all' stands for every one. Raises Refused for others."""
    if ALL in names:
        return tuple(_DEFAULTS)
    return tuple(dict.fromkeys(_known(name.strip()) for name in names))


def _assignment(text: str) -> tuple[str, float]:
    name, equals, value = text.partition("=")
    if not equals or not name.strip():
        raise refused(
            f"'{text}' does not say what to set; write NAME=VALUE such as order_margin=0.2",
            value=text, expected="NAME=VALUE",
        )  # fmt: skip
    name = _known(name.strip())
    number = read_duration(value, name) if name == "working_time_s" else _number(name, value)
    return name, _inside(name, number)


def _known(name: str) -> str:
    if name in _DEFAULTS:
        return name
    near = get_close_matches(name, _DEFAULTS, n=3, cutoff=0.5)
    hint = f"near: {', '.join(near)}" if near else f"one of {', '.join(_DEFAULTS)} is expected"
    raise refused(
        f"there is no criterion '{name}'; {hint}",
        column=name, value=name, expected=", ".join(near or _DEFAULTS),
    )  # fmt: skip


def _number(name: str, text: str) -> float:
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise refused(
            f"{name} is '{text.strip()}', which is not a number; write one such as "
            f"{_DEFAULTS[name]:g}",
            column=name, value=text.strip(), expected="a number with a decimal point",
        )  # fmt: skip
    return value


def _inside(name: str, value: float) -> float:
    low, high = LIMITS[name]
    below_half = name == _BELOW_HALF
    if low <= value <= high and not (below_half and value >= high):
        return value
    wanted = f"from {low:g} to below {high:g}" if below_half else f"from {low:g} to {high:g}"
    why = ": 'unresponsive' asks for an interval at 1 - 2 x error_probability" if below_half else ""
    raise refused(
        f"{name} is {value:g}; {wanted} is expected{why}",
        column=name, value=f"{value:g}", expected=wanted,
    )  # fmt: skip


def set_criteria(
    database: Database,
    assigned: Mapping[str, float],
    reset: Sequence[str] = (),
    *,
    reason: str | None,
    who: str | None = None,
) -> dict[str, tuple[float, float]]:
    """Put criteria in force, or back to their defaults; return name -> (was, is).

    One journal entry for all of them. Raises Refused without a reason, for a name both set
    and reset, and where nothing would change.
    """
    if not (reason and reason.strip()):
        raise refused(
            "criteria are set with a reason, which is kept beside them; add --reason TEXT",
            column="reason", expected="--reason TEXT",
        )  # fmt: skip
    reason = clean_text(reason, "reason")
    both = [name for name in reset if name in assigned]
    if both:
        raise refused(
            f"{both[0]} is both set and reset; do one of them",
            column=both[0], expected="--set or --reset",
        )  # fmt: skip
    wanted: dict[str, float | None] = {**assigned, **dict.fromkeys(reset)}
    with writing(database, who=who, reason=reason) as pen:
        table = schema.criterion
        rows = {
            row["name"]: dict(row)
            for row in pen.connection.execute(select(table).where(in_force(table))).mappings()
        }
        entry = pen.entry("criteria", ", ".join(wanted))
        changed: dict[str, tuple[float, float]] = {}
        for name, value in wanted.items():
            row = rows.get(name)
            was = _DEFAULTS[name] if row is None else float(row["value"])
            now = _DEFAULTS[name] if value is None else value
            if was == now and (value is not None or row is None):
                continue
            changed[name] = (was, now)
            if row is not None:
                entry.end(table, row)
            if value is not None:
                made = {"name": name, "value": value}
                pen.make(entry, table, made if row is None else {**made, "record": row["record"]})
        if not changed:
            raise refused(
                "nothing would change: the criteria in force read so already; "
                "'campaign criteria' shows them",
                expected="another value",
            )
        entry.subject = ", ".join(changed)
        entry.before["was"] = {name: was for name, (was, _) in changed.items()}
        entry.after["is"] = {name: now for name, (_, now) in changed.items()}
    return changed


def criteria_in_force(connection: Connection, as_of: int | None = None) -> list[Row]:
    """Return every criterion with its value, default, meaning, and the entry that set it."""
    stand = asdict(criteria(connection, as_of))
    table, journal = schema.criterion, schema.journal
    found = connection.execute(
        select(table.c.name, table.c.entry, journal.c.at, journal.c.who, journal.c.reason)
        .select_from(table.join(journal, journal.c.id == table.c.entry))
        .where(in_force(table, as_of))
    ).mappings()
    stated = {row["name"]: row for row in found}
    return [
        {
            "name": name,
            "value": value,
            "unit": MEANINGS[name][0],
            "default": _DEFAULTS[name],
            "set_at": stated[name]["at"] if name in stated else None,
            "who": stated[name]["who"] if name in stated else None,
            "reason": stated[name]["reason"] if name in stated else None,
            "entry": stated[name]["entry"] if name in stated else None,
            "meaning": MEANINGS[name][1],
        }
        for name, value in stand.items()
    ]


def criteria_history(connection: Connection, as_of: int | None = None) -> list[Row]:
    """Return every change of a criterion, oldest first: what it was, what it became, why."""
    table, journal = schema.criterion, schema.journal
    changes: dict[tuple[int, str], Row] = {}

    def change(entry: int, name: str) -> Row:
        return changes.setdefault(
            (entry, name), {"name": name, "was": _DEFAULTS[name], "is": _DEFAULTS[name]}
        )

    query = select(table.c.name, table.c.value, table.c.entry, table.c.ended_by)
    for name, value, made, ended in connection.execute(query):
        if name not in _DEFAULTS:
            continue
        change(made, name)["is"] = value
        if ended is not None:
            change(ended, name)["was"] = value
    entries = {
        row["id"]: row
        for row in connection.execute(
            select(journal).where(journal.c.id.in_({entry for entry, _ in changes}))
        ).mappings()
    }
    return [
        {
            "entry": entry,
            "at": entries[entry]["at"],
            "who": entries[entry]["who"],
            **row,
            "reason": entries[entry]["reason"],
        }
        for (entry, _), row in sorted(changes.items())
        if as_of is None or entry <= as_of
    ]
