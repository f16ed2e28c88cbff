"""Taking records, or a whole import, back. Nothing is deleted: rows are ended."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from sqlalchemy import select

from campaign.errors import refused
from campaign.ledger import schema
from campaign.ledger.finding import describe, find_record
from campaign.ledger.journal import Entry, Pen, writing
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

    from campaign.ledger.database import Database

Row = dict[str, Any]

# What goes with a record when it is withdrawn, and what must be withdrawn before it.
CHILDREN = {"cell": ("measurement", "cell"), "measurement": ("fit", "measurement")}
HOLDERS = {
    "electrode": (("cell", "electrode"),),
    "electrolyte": (("cell", "electrolyte"), ("electrode", "pore_electrolyte")),
}


def withdraw(
    database: Database, kind: str, name: str, reason: str | None = None, who: str | None = None
) -> dict[str, int]:
    """Withdraw one record with what hangs on it; return how many rows of each kind.

    Raises Refused where the record is unknown, or cells still stand on it.
    """
    with writing(database, who=who, reason=reason) as pen:
        row = find_record(pen.connection, kind, name)
        _refuse_held(pen.connection, kind, row)
        entry = pen.entry("withdraw", describe(pen.connection, kind, row))
        _end_tree(pen, entry, kind, row)
        return _counts(entry)


def _refuse_held(connection: Connection, kind: str, row: Row) -> None:
    for holder, column in HOLDERS.get(kind, ()):
        table = schema.metadata.tables[holder]
        names = sorted(
            connection.execute(
                select(table.c.label).where(table.c[column] == row["record"], in_force(table))
            ).scalars()
        )
        if names:
            shown = ", ".join(names[:5]) + (" ..." if len(names) > 5 else "")
            many = "s stand" if len(names) > 1 else " stands"
            raise refused(
                f"{len(names)} {holder}{many} on this {kind} ({shown}); withdraw or amend first "
                "what stands on it",
                value=row.get("label") or row.get("key"),
                expected=f"a {kind} nothing stands on",
            )


def _end_tree(pen: Pen, entry: Entry, kind: str, row: Row) -> None:
    table = schema.metadata.tables[kind]
    entry.end(table, row)
    end_parts(pen.connection, entry, kind, row["id"])
    if kind in CHILDREN:
        child, column = CHILDREN[kind]
        children = schema.metadata.tables[child]
        standing = pen.connection.execute(
            select(children).where(children.c[column] == row["record"], in_force(children))
        ).mappings()
        for item in standing.all():
            _end_tree(pen, entry, child, dict(item))


def end_parts(connection: Connection, entry: Entry, kind: str, row_id: int) -> None:
    """End the parts (plateaus, components, values) that belong to one row."""
    for part, column in schema.PARTS.get(kind, ()):
        rows = connection.execute(
            select(part).where(part.c[column] == row_id, in_force(part))
        ).mappings()
        for item in rows.all():
            entry.end(part, dict(item))


def _counts(entry: Entry) -> dict[str, int]:
    return {name: len(rows) for name, rows in entry.ended.items() if name in (*CHILDREN, "fit",
            "electrode", "electrolyte")}  # fmt: skip


def imports(connection: Connection) -> list[Row]:
    """Return the imports, oldest first, with the state of their rows."""
    table, journal = schema.imported_file, schema.journal
    rows = connection.execute(
        select(table, journal.c.at, journal.c.who)
        .select_from(table.join(journal, journal.c.id == table.c.entry))
        .order_by(table.c.id)
    ).mappings()
    return [
        {
            "import": row["id"],
            "file": row["name"],
            "rows": row["row_count"],
            "at": row["at"],
            "who": row["who"],
            "withdrawn": row["ended_by"] is not None,
        }
        for row in rows
    ]


def withdraw_import(
    database: Database, number: int, reason: str | None = None, who: str | None = None
) -> dict[str, int]:
    """Withdraw everything one import made that is still in force; a refit it made falls back.

    Raises Refused where there is no such import, it was taken back already, or later entries
    stand on what it made.
    """
    with writing(database, who=who, reason=reason) as pen:
        row = _import_row(pen.connection, number)
        entry = pen.entry("withdraw", f"import {number}: {row['name']}")
        entry.before["import"] = number
        _end_import(pen.connection, entry, row["entry"])
        _refuse_later(pen.connection, entry)
        _bring_back(pen, entry, row["entry"])
        return _counts(entry)


def _end_import(connection: Connection, entry: Entry, import_entry: int) -> None:
    """End all that the import made, with what amendments have made of it since."""
    for table in schema.JOURNALLED:
        if "record" not in table.c:
            if table is schema.imported_file:
                _end_all(connection, entry, table, table.c.entry == import_entry)
            continue
        made = select(table.c.record).where(
            table.c.entry == import_entry, table.c.id == table.c.record
        )
        for item in _end_all(connection, entry, table, table.c.record.in_(made)):
            end_parts(connection, entry, table.name, item["id"])


def _end_all(connection: Connection, entry: Entry, table: Table, condition: Any) -> list[Row]:
    rows = connection.execute(select(table).where(condition, in_force(table))).mappings()
    found = [dict(row) for row in rows]
    for item in found:
        entry.end(table, item)
    return found


def _import_row(connection: Connection, number: int) -> Row:
    table = schema.imported_file
    row = connection.execute(select(table).where(table.c.id == number)).mappings().first()
    if row is None:
        known = connection.execute(select(table.c.id).order_by(table.c.id)).scalars().all()
        listed = f"those made are {', '.join(map(str, known))}" if known else "none was made yet"
        raise refused(
            f"there is no import {number}; {listed}", value=number, expected="an import's number"
        )
    if row["ended_by"] is not None:
        raise refused(
            f"import {number} was taken back already (journal entry {row['ended_by']})",
            value=number,
            expected="an import in force",
        )
    return dict(row)


def _refuse_later(connection: Connection, entry: Entry) -> None:
    """Refuse where a record that stays would lose what it stands on."""
    for child, column, target in (
        ("cell", "electrode", "electrode"),
        ("cell", "electrolyte", "electrolyte"),
        ("measurement", "cell", "cell"),
        ("fit", "measurement", "measurement"),
    ):
        ended = {key[0] for key in entry.ended.get(target, ())}
        if not ended:
            continue
        lost = _records(connection, schema.metadata.tables[target], ended)
        table = schema.metadata.tables[child]
        staying = {key[0] for key in entry.ended.get(child, ())}
        held = [
            row
            for row in connection.execute(
                select(table.c.id, table.c[column], table.c.entry).where(in_force(table))
            )
            if row[1] in lost and row[0] not in staying
        ]
        if held:
            entries = sorted({row[2] for row in held})
            shown = ", ".join(map(str, entries[:5]))
            raise refused(
                f"{len(held)} {child}{'s' if len(held) > 1 else ''} entered later (journal entry "
                f"{shown}) would lose the {target} this import made; withdraw first what was "
                "entered later",
                expected="an import nothing else stands on",
            )


def _records(connection: Connection, table: Table, ids: set[int]) -> set[int]:
    rows = connection.execute(select(table.c.id, table.c.record).where(in_force(table)))
    return {record for number, record in rows if number in ids}


def _bring_back(pen: Pen, entry: Entry, import_entry: int) -> None:
    """Make the fits that the import had superseded current again, as new rows.

    Only where the import's own fit was still current: what was refitted or withdrawn since
    stays as it is.
    """
    fit, value = schema.fit, schema.fitted_value
    gone = {key[0] for key in entry.ended.get("measurement", ())}
    ended = {key[0] for key in entry.ended.get("fit", ())}
    freed = {
        measurement
        for number, measurement in pen.connection.execute(
            select(fit.c.id, fit.c.measurement).where(in_force(fit))
        )
        if number in ended
    }
    superseded = pen.connection.execute(
        select(fit).where(fit.c.ended_by == import_entry)
    ).mappings()
    for row in superseded.all():
        if row["measurement"] in gone or row["measurement"] not in freed:
            continue
        kept = {k: v for k, v in row.items() if k not in ("id", "entry", "ended_by")}
        made = pen.make(entry, fit, kept)
        values = pen.connection.execute(select(value).where(value.c.fit == row["id"])).mappings()
        for item in values.all():
            pen.make(entry, value, {**item, "fit": made["id"]})
