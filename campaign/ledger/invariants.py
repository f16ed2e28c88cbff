"""What must hold of the rows themselves, looked for again in case a rule was taken away.

The database keeps these by constraints and triggers. A hand that dropped one, wrote a row and a
fitting journal, and put the rule back is found here.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

from sqlalchemy import Double, and_, exists, func, not_, or_, select

from campaign.ledger import schema
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import Column, ColumnElement, Connection, Select, Table

MOST = 10  # rows shown of one broken rule
LARGEST = 1.7976931348623157e308

Found = Iterator[tuple[str, str]]

# Columns with other bounds than "finite": (table, column) -> (low, low included, high).
_BOUNDS: dict[tuple[str, str], tuple[float, bool, float]] = {
    ("measurement", "ion_content"): (0.0, True, 1.0),
    ("measurement", "rest_h"): (0.0, True, LARGEST),
    ("fit", "chi2"): (0.0, True, LARGEST),
    ("criterion", "value"): (0.0, True, LARGEST),
    ("cost", "hours"): (0.0, True, LARGEST),
    ("electrode", "porosity"): (0.0, False, 1.0),
    ("species", "flash_point_C"): (-273.15, False, LARGEST),
}
# Columns that may be negative or zero.
_SIGNED = ("potential_V", "E_half_V", "window_low_V", "window_high_V", "low_V", "high_V",
           "donor_number")  # fmt: skip
# Columns of which one row in force may carry the same values.
_ALONE = {
    "setting": ("name",), "criterion": ("name",), "cost": ("name",), "species": ("name",),
    "electrolyte": ("key",), "electrode": ("label",), "cell": ("label",),
    "measurement": ("cell", "measured_at"), "fit": ("measurement",),
}  # fmt: skip


def broken(connection: Connection) -> Found:
    """Yield (about, message) for every rule that rows break."""
    for table in schema.JOURNALLED:
        yield from _out_of_range(connection, table)
        yield from _lives(connection, table)
    yield from _doubles(connection)
    yield from _fitted(connection)
    yield from _blends(connection)
    yield from _potentials(connection)
    yield from _specimens(connection)
    yield from _parts(connection)


def _numbers(connection: Connection, query: Select[Any]) -> list[int]:
    return [int(number) for number in connection.execute(query.limit(MOST)).scalars()]


def _range(table: Table, column: Column[float]) -> ColumnElement[bool]:
    low, included, high = _BOUNDS.get((table.name, column.name), (0.0, False, LARGEST))
    if column.name in _SIGNED:
        low, included = -LARGEST, True
    above = column >= low if included else column > low
    return and_(above, column <= high)


def _out_of_range(connection: Connection, table: Table) -> Found:
    number = table.primary_key.columns[0] if "id" not in table.c else table.c.id
    for column in table.c:
        if not isinstance(column.type, Double):
            continue
        wrong = and_(column.is_not(None), not_(_range(table, column)))
        for found in _numbers(connection, select(number).where(wrong)):
            yield f"{table.name} {found}", f"{column.name} is out of its range or not finite"


def _lives(connection: Connection, table: Table) -> Found:
    number = table.primary_key.columns[0] if "id" not in table.c else table.c.id
    for found in _numbers(connection, select(number).where(table.c.ended_by <= table.c.entry)):
        yield f"{table.name} {found}", "was ended before it was made"
    if "record" in table.c:
        first = table.alias()
        headless = not_(exists().where(first.c.id == table.c.record, first.c.record == first.c.id))
        for found in _numbers(connection, select(table.c.id).where(headless)):
            yield f"{table.name} {found}", "carries the record number of no first row"


def _doubles(connection: Connection) -> Found:
    for name, columns in _ALONE.items():
        table = schema.metadata.tables[name]
        for group in ((*columns,), ("record",)):
            chosen = [table.c[column] for column in group]
            query = (
                select(func.min(table.c.id), func.count())
                .where(in_force(table))
                .group_by(*chosen)
                .having(func.count() > 1)
            )
            for number, count in connection.execute(query.limit(MOST)):
                what = " and ".join(group)
                yield (
                    f"{name} {number}",
                    f"shares its {what} with {count - 1} other in force; one is allowed",
                )


def _fitted(connection: Connection) -> Found:
    value = schema.fitted_value
    rules = (
        (and_(value.c.quantity.like("n\\_%", escape="\\"), value.c.value > 1),
         "an exponent n is above 1"),
        (and_(value.c.value.is_(None), value.c.quantity.not_in(("R_sl", "R_lat"))),
         "a value is absent that cannot be"),
        (and_(value.c.value.is_(None), value.c.se.is_not(None)),
         "an absent value has a standard error"),
    )  # fmt: skip
    for wrong, message in rules:
        for found in _numbers(connection, select(value.c.fit).where(wrong)):
            yield f"fit {found}", message
    fit = schema.fit
    empty = not_(exists().where(value.c.fit == fit.c.id))
    for found in _numbers(connection, select(fit.c.id).where(empty)):
        yield f"fit {found}", "has no fitted value"


def _blends(connection: Connection) -> Found:
    part, whole = schema.electrolyte_component, schema.electrolyte
    total = (
        select(func.coalesce(func.sum(part.c.amount), 0.0))
        .where(part.c.electrolyte == whole.c.id, part.c.role == "solvent")
        .scalar_subquery()
    )
    wrong = select(whole.c.id).where(func.abs(total - 1.0) > 1e-9)
    for found in _numbers(connection, wrong):
        yield f"electrolyte {found}", "the fractions of its solvents do not sum to 1"
    salt = exists().where(part.c.electrolyte == whole.c.id, part.c.role == "salt")
    for found in _numbers(connection, select(whole.c.id).where(not_(salt))):
        yield f"electrolyte {found}", "names no salt"


def _potentials(connection: Connection) -> Found:
    m, cell = schema.measurement, schema.cell
    symmetric = exists().where(
        cell.c.record == m.c.cell, cell.c.configuration == "symmetric"
    )
    wrong = select(m.c.id).where(in_force(m), m.c.potential_V.is_(None), not_(symmetric))
    for found in _numbers(connection, wrong):
        yield f"measurement {found}", "has no potential, and its cell is not symmetric"
    crossed = select(m.c.id).where(m.c.f_min_Hz >= m.c.f_max_Hz)
    for found in _numbers(connection, crossed):
        yield f"measurement {found}", "its lowest frequency is not below its highest"


def _specimens(connection: Connection) -> Found:
    cell = schema.cell
    query = (
        select(func.min(cell.c.id))
        .where(in_force(cell))
        .group_by(cell.c.specimen)
        .having(func.count(cell.c.electrode.distinct()) > 1)
    )
    for found in _numbers(connection, query):
        yield f"cell {found}", "its specimen is also one of another electrode"


def _parts(connection: Connection) -> Found:
    """Parts live and end with their row."""
    for owner, parts in schema.PARTS.items():
        whole = schema.metadata.tables[owner]
        for part, column in parts:
            differs = or_(
                part.c.entry != whole.c.entry,
                func.coalesce(part.c.ended_by, 0) != func.coalesce(whole.c.ended_by, 0),
            )
            query = (
                select(whole.c.id)
                .select_from(part.join(whole, whole.c.id == part.c[column]))
                .where(differs)
                .distinct()
            )
            for found in _numbers(connection, query):
                yield f"{owner} {found}", f"a row of {part.name} was not made and ended with it"
