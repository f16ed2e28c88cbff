"""Amending: a row ends and its successor takes over its record number."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from sqlalchemy import select

from campaign.errors import refused
from campaign.ledger import schema
from campaign.ledger.fields import Field, field_of, read_value, refuse_disorder
from campaign.ledger.finding import describe, find_record
from campaign.ledger.journal import Entry, Pen, writing
from campaign.ledger.settings import in_force, zone
from campaign.ledger.withdrawing import end_parts

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from campaign.ledger.database import Database

Row = dict[str, Any]


def amend(
    database: Database,
    kind: str,
    name: str,
    changes: Mapping[str, str],
    reason: str | None = None,
    who: str | None = None,
) -> dict[str, tuple[Any, Any]]:
    """Amend a record; return each changed field with what it was and what it is.

    changes: field name -> text; an empty text empties the field. A fit's quantities
    (R_ct, R_ct_se ...) are fields of the fit. Raises Refused for unknown fields, values out
    of range, and where nothing would change.
    """
    with writing(database, who=who, reason=reason) as pen:
        row = find_record(pen.connection, kind, name)
        entry = pen.entry("amend", describe(pen.connection, kind, row))
        parts = _parts(pen.connection, kind, row)
        successor, changed = _changed(pen.connection, kind, row, parts, changes)
        if not changed:
            raise refused(
                f"nothing would change: {kind} {name} reads so already",
                expected="a field with another value",
            )
        refuse_disorder(kind, successor)
        if kind == "cell":
            _refuse_unstated_potentials(pen.connection, row, successor)
        entry.before["was"] = {field: before for field, (before, _) in changed.items()}
        entry.after["is"] = {field: after for field, (_, after) in changed.items()}
        _replace(pen, entry, kind, row, successor, parts)
    return changed


def _refuse_unstated_potentials(connection: Connection, row: Row, successor: Row) -> None:
    """Only a symmetric cell may have measurements without a potential."""
    if successor["configuration"] == "symmetric":
        return
    table = schema.measurement
    numbers = connection.execute(
        select(table.c.record).where(
            table.c.cell == row["record"], table.c.potential_V.is_(None), in_force(table)
        )
    ).scalars()
    empty = sorted(numbers)
    if empty:
        shown = ", ".join(map(str, empty[:5])) + (" ..." if len(empty) > 5 else "")
        raise refused(
            f"cell {row['label']} has measurements without a potential ({shown}), which only a "
            "symmetric cell may have; amend those first",
            column="configuration",
            value=successor["configuration"],
            expected="symmetric, or measurements with a potential",
        )


def _parts(connection: Connection, kind: str, row: Row) -> dict[str, list[Row]]:
    found: dict[str, list[Row]] = {}
    for table, column in schema.PARTS.get(kind, ()):
        rows = connection.execute(
            select(table).where(table.c[column] == row["id"], in_force(table))
        ).mappings()
        found[table.name] = [dict(item) for item in rows]
    return found


def _changed(
    connection: Connection,
    kind: str,
    row: Row,
    parts: dict[str, list[Row]],
    changes: Mapping[str, str],
) -> tuple[Row, dict[str, tuple[Any, Any]]]:
    successor = {k: v for k, v in row.items() if k not in ("id", "entry", "ended_by")}
    changed: dict[str, tuple[Any, Any]] = {}
    for name, text in changes.items():
        if kind == "fit" and _change_value(parts, name, text, changed):
            continue
        field = field_of(kind, name)
        before = field.written(row[field.column])
        values = read_stated(connection, kind, field, text)
        successor.update(values)
        after = field.written(successor[field.column])
        if successor[field.column] != row[field.column]:
            changed[name] = (before, after)
    return successor, changed


def read_stated(connection: Connection, kind: str, field: Field, text: str) -> Row:
    """Return the stored columns a field's text stands for; an empty text empties the field.

    Raises Refused for a value out of range or an unknown label.
    """
    if not text.strip():
        if field.required or field.name in ("specimen", "configuration", "temperature_C"):
            raise refused(
                f"{field.name} cannot be empty for a {kind}; write {field.expected}",
                column=field.name,
                expected=field.expected,
            )
        emptied: Row = {field.column: None}
        if field.kind == "instant":
            emptied[_offset_column(field)] = None
        return emptied
    if field.kind == "instant":
        return _instant(connection, field, text)
    if field.kind == "ion":
        from campaign.chemistry.ions import parse_ion

        ion = parse_ion(text)
        return {"ion": ion.symbol, "charge": ion.charge}
    if field.kind in ("electrode", "electrolyte"):
        return {field.column: find_record(connection, field.kind, text)["record"]}
    return {field.column: read_value(field, text)}


def _instant(connection: Connection, field: Field, text: str) -> Row:
    from campaign.ledger.instants import InstantError, format_utc, parse_instant

    try:
        instant = parse_instant(text, zone(connection))
    except InstantError as error:
        raise refused(
            f"{field.name} is '{text}': {error}",
            column=field.name,
            value=text,
            expected=error.expected,
        ) from None
    return {
        field.column: format_utc(instant.utc),
        _offset_column(field): instant.offset_minutes,
    }


def _offset_column(field: Field) -> str:
    return field.column.removesuffix("_at") + "_offset"


def _change_value(
    parts: dict[str, list[Row]], name: str, text: str, changed: dict[str, tuple[Any, Any]]
) -> bool:
    """Change a fitted value of a fit's parts; return False where `name` is not a quantity."""
    from campaign.ledger.flat.values import read_amended
    from campaign.ledger.quantities import QUANTITIES

    quantity = name.removesuffix("_se")
    if quantity not in QUANTITIES:
        return False
    rows = {row["quantity"]: row for row in parts["fitted_value"]}
    before = rows.get(quantity, {"value": None, "se": None})
    after = read_amended(quantity, name.endswith("_se"), text, before)
    was = _shown(rows.get(quantity), name.endswith("_se"))
    if after is None:
        rows.pop(quantity, None)
    else:
        rows[quantity] = {"quantity": quantity, **after}
    now = _shown(rows.get(quantity), name.endswith("_se"))
    if now != was:
        changed[name] = (was, now)
    if not rows:
        raise refused(
            "a fit needs at least one value; withdraw the fit instead", expected="a fitted value"
        )
    parts["fitted_value"] = list(rows.values())
    return True


def _shown(row: Row | None, error: bool) -> Any:
    """Return a value or error as the history tells it; None where there is none."""
    if row is None:
        return None
    if error:
        return row["se"]
    return "absent" if row["value"] is None else row["value"]


def _replace(
    pen: Pen, entry: Entry, kind: str, row: Row, successor: Row, parts: dict[str, list[Row]]
) -> None:
    table = schema.metadata.tables[kind]
    entry.end(table, row)
    end_parts(pen.connection, entry, kind, row["id"])
    made = pen.make(entry, table, successor)
    for part, column in schema.PARTS.get(kind, ()):
        for item in parts[part.name]:
            kept = {k: v for k, v in item.items() if k not in ("entry", "ended_by")}
            pen.make(entry, part, {**kept, column: made["id"]})


def read_changes(texts: list[str]) -> dict[str, str]:
    """Return field -> text for FIELD=VALUE arguments.

    Raises Refused for an argument without '=', or a field given twice.
    """
    changes: dict[str, str] = {}
    for text in texts:
        name, equals, value = text.partition("=")
        name = name.strip()
        if not equals or not name:
            raise refused(
                f"'{text}' does not say what to change; write FIELD=VALUE",
                value=text,
                expected="FIELD=VALUE",
            )
        if name in changes:
            raise refused(
                f"{name} is given twice; give it once", column=name, expected="each field once"
            )
        changes[name] = value
    return changes
