"""Reading the journal back: what was entered, amended and withdrawn, by whom and why."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

from sqlalchemy import func, or_, select

from campaign.ledger import schema

if TYPE_CHECKING:
    from sqlalchemy import Connection

Row = dict[str, Any]


def history(
    connection: Connection, kind: str | None = None, record: int | None = None
) -> list[Row]:
    """Return the journal, oldest first; of one record only when its kind and number are given."""
    table = schema.journal
    query = select(table).order_by(table.c.id)
    if kind is not None and record is not None:
        query = query.where(table.c.id.in_(_entries_of(connection, kind, record)))
    return [
        {
            "entry": row["id"],
            "at": row["at"],
            "who": row["who"],
            "action": row["action"],
            "what": row["subject"],
            "reason": row["reason"],
            "before": json.loads(row["before"]) if row["before"] else {},
            "after": json.loads(row["after"]) if row["after"] else {},
            "hash": row["hash"],
        }
        for row in connection.execute(query).mappings()
    ]


def _entries_of(connection: Connection, kind: str, record: int) -> set[int]:
    """Return the entries that made or ended any row of a record (and of its fits)."""
    table = schema.metadata.tables[kind]
    condition = table.c.record == record
    found = set(_lives(connection, table, condition))
    if kind == "measurement":
        found |= set(_lives(connection, schema.fit, schema.fit.c.measurement == record))
    return found


def _lives(connection: Connection, table: Any, condition: Any) -> list[int]:
    rows = connection.execute(
        select(table.c.entry, table.c.ended_by).where(or_(condition))
    ).all()
    return [number for row in rows for number in row if number is not None]


def head(connection: Connection) -> Row | None:
    """Return the latest journal entry's number, instant and hash, or None."""
    table = schema.journal
    row = (
        connection.execute(
            select(table.c.id, table.c.at, table.c.hash).order_by(table.c.id.desc()).limit(1)
        )
        .mappings()
        .first()
    )
    return None if row is None else {"entry": row["id"], "at": row["at"], "hash": row["hash"]}


def size(connection: Connection) -> tuple[int, int]:
    """Return how many journal entries and ledgered rows a campaign holds."""
    entries = connection.execute(select(func.count()).select_from(schema.journal)).scalar() or 0
    rows = sum(
        connection.execute(select(func.count()).select_from(table)).scalar() or 0
        for table in schema.JOURNALLED
    )
    return entries, rows
