"""What bench work costs in hours, per campaign, each change kept in the journal."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass, fields, replace
from typing import TYPE_CHECKING

from campaign.errors import Fault, Refused, refused

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from campaign.ledger.database import Database

MOST_h = 10_000.0


@dataclass(frozen=True)
class Costs:
    """Bench hours of one person [h]; the defaults are common practice, no source.

    build_cell: one cell, electrode and glove box included. prepare_electrolyte: one recipe
    that the campaign has not used so far. change_temperature: each further temperature of a
    cell. settle_potential: each temperature and potential of a cell. measure: one spectrum
    with its fit.
    """

    build_cell: float = 3.0
    prepare_electrolyte: float = 1.0
    change_temperature: float = 1.0
    settle_potential: float = 1.5
    measure: float = 0.5


NAMES = tuple(one.name for one in fields(Costs))


def read_costs(connection: Connection, as_of: int | None = None) -> Costs:
    """Return the costs in force, defaults where none was set."""
    from sqlalchemy import select

    from campaign.ledger import schema
    from campaign.ledger.settings import in_force

    table = schema.cost
    found = connection.execute(
        select(table.c.name, table.c.hours).where(in_force(table, as_of))
    ).all()
    return replace(Costs(), **{name: hours for name, hours in found if name in NAMES})


def read_cost_texts(texts: list[str]) -> dict[str, float]:
    """Return hours by name for NAME=HOURS texts; raises Refused with every fault."""
    read: dict[str, float] = {}
    faults = []
    for text in texts:
        name, equals, hours = (part.strip() for part in text.partition("="))
        if not equals or name not in NAMES:
            faults.append(_unknown(text, name))
            continue
        if name in read:
            faults.append(Fault(f"{name} is given twice; give it once", column=name, value=text))
            continue
        value = _hours(hours)
        if value is None:
            faults.append(
                Fault(
                    f"{name} is '{hours}', which is not a number of hours; write "
                    f"{name}=2.5, at least 0 and at most {MOST_h:g}",
                    column=name, value=hours, expected=f"hours from 0 to {MOST_h:g}",
                )
            )  # fmt: skip
            continue
        read[name] = value
    if faults:
        raise Refused(faults)
    return read


def _unknown(text: str, name: str) -> Fault:
    from difflib import get_close_matches

    near = get_close_matches(name, NAMES, n=1)
    hint = f"; near: {near[0]}" if near else ""
    return Fault(
        f"'{text}' names no cost{hint}; write NAME=HOURS with NAME one of {', '.join(NAMES)}",
        column="cost", value=text, expected="NAME=HOURS",
    )  # fmt: skip


def _hours(text: str) -> float | None:
    try:
        value = float(text)
    except ValueError:
        return None
    return value if 0.0 <= value <= MOST_h else None


def set_costs(
    database: Database, changes: Mapping[str, float], reason: str, who: str | None = None
) -> dict[str, tuple[float, float]]:
    """Set costs through the journal; return each changed one with what it was and what it is.

    Raises Refused where nothing would change.
    """
    from sqlalchemy import select

    from campaign.ledger import schema
    from campaign.ledger.journal import writing
    from campaign.ledger.settings import in_force

    table = schema.cost
    with writing(database, who=who, reason=reason) as pen:
        before = asdict(read_costs(pen.connection))
        changed = {name: (before[name], hours) for name, hours in changes.items()
                   if hours != before[name]}  # fmt: skip
        if not changed:
            raise refused(
                "nothing would change: the costs read so already",
                expected="a cost with other hours",
            )
        entry = pen.entry("set", "costs")
        entry.before["was"] = {name: was for name, (was, _) in changed.items()}
        entry.after["is"] = {name: now for name, (_, now) in changed.items()}
        stored = {
            row["name"]: dict(row)
            for row in pen.connection.execute(select(table).where(in_force(table))).mappings()
        }
        for name, (_, hours) in changed.items():
            row = {"name": name, "hours": hours}
            if name in stored:
                entry.end(table, stored[name])
                row["record"] = stored[name]["record"]
            pen.make(entry, table, row)
    return changed


def change_costs(
    db: str | None, texts: list[str], reason: str | None, who: str | None = None
) -> list[str]:
    """Set costs from NAME=HOURS texts; return what changed, a sentence each.

    Raises Refused without a reason and for texts that cannot be read, nothing written.
    """
    from campaign.ledger.database import open_database
    from campaign.ledger.fields import clean_text

    changes = read_cost_texts(texts)
    if reason is None:
        raise refused(
            "setting a cost needs a reason, which the journal keeps; give --reason TEXT",
            column="reason",
            expected="--reason TEXT",
        )
    changed = set_costs(open_database(db), changes, clean_text(reason, "reason"), who)
    return [f"{name} is now {now:g} h (was {was:g} h)." for name, (was, now) in changed.items()]
