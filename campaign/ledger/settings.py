"""Settings, criteria and costs of a campaign, each row with its history."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any

from sqlalchemy import or_, select

from campaign.ledger import schema
from campaign.ledger.criteria import Criteria

if TYPE_CHECKING:
    from sqlalchemy import ColumnElement, Connection, Table


def in_force(table: Table, as_of: int | None = None) -> ColumnElement[bool]:
    """Return the condition that a row is in force, now or as of a journal entry."""
    if as_of is None:
        return table.c.ended_by.is_(None)
    return (table.c.entry <= as_of) & or_(table.c.ended_by.is_(None), table.c.ended_by > as_of)


def setting(connection: Connection, name: str, default: str) -> str:
    """Return a setting in force, or the default."""
    table = schema.setting
    found: Any = connection.execute(
        select(table.c.value).where(table.c.name == name, in_force(table))
    ).scalar()
    return default if found is None else str(found)


def zone(connection: Connection) -> str:
    """Return the IANA zone that times without offset take."""
    return setting(connection, "zone", "UTC")


def criteria(connection: Connection, as_of: int | None = None) -> Criteria:
    """Return the criteria in force, defaults where none was set."""
    table = schema.criterion
    rows = connection.execute(
        select(table.c.name, table.c.value).where(in_force(table, as_of))
    ).all()
    return replace(Criteria(), **dict(rows))
