"""Moving a campaign between stores: the journal is replayed, so the copy passes every rule.

Each journal entry is written with its own number, instant and hash, then the rows it ended
and the rows it made. What the rules of the target would refuse cannot be copied.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import zip_longest
from typing import TYPE_CHECKING, Any

from sqlalchemy import select

from campaign.errors import refused
from campaign.ledger import schema
from campaign.ledger.checking import check, damage
from campaign.ledger.database import Database, Place, place, revision
from campaign.ledger.history import head
from campaign.ledger.journal import end_rows, keys
from campaign.ledger.starting import made_whole, refuse_taken

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

Row = dict[str, Any]


@dataclass(frozen=True)
class Copied:
    """Where the copy is, how many entries and rows it holds, and the hash both journals end in."""

    where: Place
    entries: int
    rows: int
    head: str


def copy_campaign(source: Database, target: str) -> Copied:
    """Copy a whole campaign to an empty place and prove the two equal.

    Raises Refused where something is there already, or the copy differs.
    """
    where = place(target)
    if where.path is None:
        with source.reading() as origin:
            return _copy(origin, where)
    refuse_taken(where.path)
    with source.reading() as origin, made_whole(where.path) as draft:
        made = _copy(origin, Place(path=draft, alias=where.path))
    return Copied(where, made.entries, made.rows, made.head)


def _copy(origin: Connection, where: Place) -> Copied:
    from campaign.ledger.migrating import migrate
    from campaign.ledger.starting import use_write_ahead_log

    database = Database(where, create=True)
    use_write_ahead_log(database)
    with database.writing() as goal:
        if revision(goal) is not None:
            raise refused(
                f"there is a campaign at {where.shown} already; copy to an empty place",
                value=where.shown,
                expected="an empty database",
            )
        migrate(goal)
        entries, rows = _replay(origin, goal)
        _prove_equal(origin, goal, where)
        last = head(goal)
    return Copied(where, entries, rows, last["hash"] if last else "")


def _replay(origin: Connection, goal: Connection) -> tuple[int, int]:
    made = {table.name: _by_entry(origin, table, "entry") for table in schema.JOURNALLED}
    ended = {table.name: _by_entry(origin, table, "ended_by") for table in schema.JOURNALLED}
    entries = origin.execute(select(schema.journal).order_by(schema.journal.c.id)).mappings().all()
    count = 0
    for entry in entries:
        goal.execute(schema.journal.insert(), dict(entry))
        for table in reversed(schema.JOURNALLED):
            gone = ended[table.name].get(entry["id"], [])
            found = [tuple(row[name] for name in keys(table)) for row in gone]
            end_rows(goal, table, found, entry["id"])
        for table in schema.JOURNALLED:
            rows = made[table.name].get(entry["id"])
            if rows:
                goal.execute(table.insert(), [{**row, "ended_by": None} for row in rows])
                count += len(rows)
    return len(entries), count


def _by_entry(connection: Connection, table: Table, column: str) -> dict[int, list[Row]]:
    grouped: dict[int, list[Row]] = {}
    query = select(table).where(table.c[column].is_not(None)).order_by(*table.primary_key)
    for row in connection.execute(query).mappings():
        grouped.setdefault(row[column], []).append(dict(row))
    return grouped


def _prove_equal(origin: Connection, goal: Connection, where: Place) -> None:
    """Compare every row of every table, and check the copy's own journal."""
    for table in (schema.journal, *schema.JOURNALLED):
        query = select(table).order_by(*table.primary_key)
        left, right = origin.execute(query), goal.execute(query)
        if any(a != b for a, b in zip_longest(left, right)):
            raise refused(f"the copy differs in {table.name}; nothing was kept")
    grave = damage(check(goal))
    if grave:
        raise refused(
            f"the copy does not pass its check ({grave[0].about}: "
            f"{grave[0].message}); run 'campaign check' on the original",
            value=where.shown,
        )
