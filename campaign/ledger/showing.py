"""One record with everything that is known of it."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from sqlalchemy import select

from campaign.ledger import schema
from campaign.ledger.fields import KINDS
from campaign.ledger.finding import find_record
from campaign.ledger.history import history
from campaign.ledger.selecting import celsius, local
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import Connection

Row = dict[str, Any]


def show_record(connection: Connection, kind: str, name: str) -> Row:
    """Return a record in force as fields a person writes, its parts and its journal entries.

    Raises Refused where there is none.
    """
    row = find_record(connection, kind, name)
    shown: Row = {"record": row["record"], **_own_fields(connection, kind, row)}
    shown.update(_PARTS.get(kind, _nothing)(connection, row))
    entries = history(connection, kind, row["record"])
    shown["entries"] = [_entry_line(item) for item in entries]
    return shown


def _entry_line(item: Row) -> str:
    reason = f" ({item['reason']})" if item["reason"] else ""
    return f"{item['entry']} {item['at'][:16]}Z {item['who']}: {item['action']}{reason}"


def _own_fields(connection: Connection, kind: str, row: Row) -> Row:
    shown: Row = {}
    for field in KINDS[kind]:
        value = row[field.column]
        if field.kind == "instant":
            offset = row[field.column.removesuffix("_at") + "_offset"]
            shown[field.name] = local(value, offset)
        elif field.kind in ("electrode", "electrolyte") and value is not None:
            shown[field.name] = _label(connection, field.kind, value)
        else:
            shown[field.name] = field.written(value)
    return shown


def _label(connection: Connection, kind: str, record: int) -> str | None:
    table = schema.metadata.tables[kind]
    column = table.c.key if kind == "electrolyte" else table.c.label
    found = connection.execute(
        select(column).where(table.c.record == record, in_force(table))
    ).scalar()
    return None if found is None else str(found)


def _nothing(connection: Connection, row: Row) -> Row:
    return {}


def _of_electrode(connection: Connection, row: Row) -> Row:
    part, cell = schema.plateau, schema.cell
    plateaus = connection.execute(select(part).where(part.c.electrode == row["id"])).mappings()
    cells = connection.execute(
        select(cell.c.label)
        .where(cell.c.electrode == row["record"], in_force(cell))
        .order_by(cell.c.label)
    ).scalars()
    return {
        "charge": row["charge"],
        "plateaus": [f"{p['low_V']:g} to {p['high_V']:g} V vs {p['reference']}" for p in plateaus],
        "cells": list(cells),
    }


def _of_electrolyte(connection: Connection, row: Row) -> Row:
    part, item = schema.electrolyte_component, schema.electrolyte_property
    components = connection.execute(
        select(part).where(part.c.electrolyte == row["id"]).order_by(part.c.position)
    ).mappings()
    properties = connection.execute(
        select(item).where(item.c.electrolyte == row["id"]).order_by(item.c.temperature_K)
    ).mappings()
    return {
        "recipe": row["key"],
        "written": row["written"],
        "salt": row["salt_key"],
        "solvents": row["solvent_key"],
        "additives": row["additive_key"],
        "basis": row["basis"],
        "components": [
            f"{c['role']} {c['species']} {c['amount']:.6g} {c['basis']}" for c in components
        ],
        "properties": [
            f"{p['property']} {p['value']:.6g} at {celsius(p['temperature_K']):g} degC"
            for p in properties
        ],
    }


def _of_cell(connection: Connection, row: Row) -> Row:
    table = schema.measurement
    records = connection.execute(
        select(table.c.record)
        .where(table.c.cell == row["record"], in_force(table))
        .order_by(table.c.measured_at)
    ).scalars()
    return {"measurements": list(records)}


def _of_measurement(connection: Connection, row: Row) -> Row:
    fit = schema.fit
    current = (
        connection.execute(select(fit).where(fit.c.measurement == row["record"], in_force(fit)))
        .mappings()
        .first()
    )
    shown: Row = {
        "cell": _label(connection, "cell", row["cell"]),
        "spectrum_sha256": row["spectrum_sha256"],
    }
    if current is not None:
        shown["fit"] = current["record"]
        shown.update(_own_fields(connection, "fit", dict(current)))
        shown.update(_of_fit(connection, dict(current)))
    earlier = connection.execute(
        select(fit.c.record).where(
            fit.c.measurement == row["record"], fit.c.ended_by.is_not(None)
        )
    ).scalars()
    shown["earlier_fits"] = sorted(set(earlier) - {shown.get("fit")})
    return shown


def _of_fit(connection: Connection, row: Row) -> Row:
    value, quantity = schema.fitted_value, schema.quantity
    rows = connection.execute(
        select(value.c.quantity, value.c.value, value.c.se, quantity.c.unit)
        .select_from(value.join(quantity, quantity.c.name == value.c.quantity))
        .where(value.c.fit == row["id"])
    )
    shown: Row = {}
    for name, amount, se, unit in rows:
        error = "" if se is None else f" ± {se:.3g}"
        written = "absent" if amount is None else f"{amount:.8g}{error} {unit}"
        shown[name] = written.removesuffix(" 1")
    return shown


_PARTS = {
    "electrode": _of_electrode,
    "electrolyte": _of_electrolyte,
    "cell": _of_cell,
    "measurement": _of_measurement,
    "fit": _of_fit,
}
