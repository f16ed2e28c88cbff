"""Which condition of a query leaves nothing over."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from sqlalchemy import func

from campaign.ledger.filters import Filter
from campaign.ledger.selecting import measurements_query

if TYPE_CHECKING:
    from sqlalchemy import Connection

NEAR = 0.5


@dataclass(frozen=True)
class Emptied:
    """alone: how many measurements each condition keeps on its own; without: how many all the
    others keep without it; near: what the campaign holds that is spelled like it."""

    alone: dict[str, int]
    without: dict[str, int]
    near: dict[str, list[str]]


def emptied(connection: Connection, wanted: Filter) -> Emptied:
    """Count the measurements behind each condition of a filter that found nothing."""
    stated = {name: value for name, value in wanted.stated().items() if name != "as_of"}
    alone = {
        name: _count(connection, Filter(**{name: value}, as_of=wanted.as_of))
        for name, value in stated.items()
    }
    without = {
        name: _count(connection, Filter(**{**stated, name: None}, as_of=wanted.as_of))
        for name in stated
    }
    near = {
        name: found
        for name, value in stated.items()
        if alone[name] == 0 and (found := _near(connection, name, value))
    }
    return Emptied(alone, without, near)


def _count(connection: Connection, wanted: Filter) -> int:
    return int(connection.execute(measurements_query(wanted, func.count())).scalar() or 0)


def _near(connection: Connection, name: str, value: Any) -> list[str]:
    from difflib import get_close_matches

    from campaign.ledger import schema

    column = {
        "electrode": schema.electrode.c.label,
        "salt": schema.electrolyte.c.salt_key,
        "solvents": schema.electrolyte.c.solvent_key,
        "additives": schema.electrolyte.c.additive_key,
    }.get(name)
    if column is None:
        return []
    rows = connection.execute(measurements_query(Filter(), column).distinct())
    known = sorted(str(word) for (word,) in rows)
    return get_close_matches(str(value), known, n=3, cutoff=NEAR) or known[:3]
