"""What the ledger holds of the measurements a table names: every version, every fit."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from sqlalchemy import select

from campaign.ledger import schema

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

Row = dict[str, Any]
Values = dict[str, tuple[float | None, float | None]]

SAME = 1e-9  # relative difference below which two values are one
_CHUNK = 400
_FEW = 40


@dataclass
class Stored:
    """One measurement record: its versions, whether one is in force, and all its fits."""

    record: int
    versions: list[Row] = field(default_factory=list)
    in_force: Row | None = None
    fits: list[tuple[Row, Values]] = field(default_factory=list)

    @property
    def current(self) -> Row | None:
        """The fit in force, if there is one."""
        return next((fit for fit, _ in self.fits if fit["ended_by"] is None), None)

    def holds(self, values: Values) -> bool:
        """Return whether any fit, current, superseded or withdrawn, has these values."""
        return any(same_values(values, known) for _, known in self.fits)


def same_number(a: float | None, b: float | None) -> bool:
    """Return whether two numbers agree to 1e-9 relative; None agrees with None only."""
    if a is None or b is None:
        return a is b
    return a == b or abs(a - b) <= SAME * max(abs(a), abs(b))


def same_values(a: Values, b: Values) -> bool:
    """Return whether two fits hold the same quantities with the same values and errors."""
    return a.keys() == b.keys() and all(
        same_number(a[name][0], b[name][0]) and same_number(a[name][1], b[name][1]) for name in a
    )


def _in_chunks(numbers: Iterable[int]) -> Iterable[Sequence[int]]:
    ordered = sorted(numbers)
    for start in range(0, len(ordered), _CHUNK):
        yield ordered[start : start + _CHUNK]


def stored_measurements(
    connection: Connection,
    labels: Mapping[str, Iterable[int]],
    instants: Sequence[str],
) -> dict[tuple[str, str], Stored]:
    """Return what is stored at (cell label, instant), withdrawn records included.

    labels: each label with the records of all cells that carry or carried it. instants: those
    asked for; looked up one by one only where they are few.
    """
    of_cell: dict[int, list[str]] = {}
    for label, records in labels.items():
        for record in records:
            of_cell.setdefault(record, []).append(label)
    if not of_cell:
        return {}
    table = schema.measurement
    found: dict[tuple[str, str], Stored] = {}
    by_record: dict[int, Stored] = {}
    for chunk in _in_chunks(of_cell):
        query = select(table).where(table.c.cell.in_(chunk))
        if len(instants) <= _FEW:
            query = query.where(table.c.measured_at.in_(instants))
        for row in connection.execute(query.order_by(table.c.id)).mappings():
            item = by_record.setdefault(row["record"], Stored(row["record"]))
            item.versions.append(dict(row))
            for label in of_cell[row["cell"]]:
                _prefer(found, (label, row["measured_at"]), item)
    _load_versions(connection, by_record)
    _load_fits(connection, by_record)
    return found


def _prefer(
    found: dict[tuple[str, str], Stored], key: tuple[str, str], item: Stored
) -> None:
    """Keep the latest record at a place: an earlier one was withdrawn before it was made."""
    if key not in found or found[key].record < item.record:
        found[key] = item


def _load_versions(connection: Connection, by_record: Mapping[int, Stored]) -> None:
    table = schema.measurement
    for item in by_record.values():
        item.versions.clear()
    for chunk in _in_chunks(by_record):
        query = select(table).where(table.c.record.in_(chunk)).order_by(table.c.id)
        for row in connection.execute(query).mappings():
            version = dict(row)
            by_record[row["record"]].versions.append(version)
            if row["ended_by"] is None:
                by_record[row["record"]].in_force = version


def _load_fits(connection: Connection, by_record: Mapping[int, Stored]) -> None:
    fit, value = schema.fit, schema.fitted_value
    values: dict[int, Values] = {}
    for chunk in _in_chunks(by_record):
        for row in connection.execute(
            select(fit).where(fit.c.measurement.in_(chunk)).order_by(fit.c.id)
        ).mappings():
            values[row["id"]] = {}
            by_record[row["measurement"]].fits.append((dict(row), values[row["id"]]))
    for chunk in _in_chunks(values):
        for number, quantity, amount, se in connection.execute(
            select(value.c.fit, value.c.quantity, value.c.value, value.c.se).where(
                value.c.fit.in_(chunk)
            )
        ):
            values[number][quantity] = (amount, se)


def versions_of(connection: Connection, table: Table, record: int) -> list[Row]:
    """Return every row of a record, oldest first."""
    rows = connection.execute(
        select(table).where(table.c.record == record).order_by(table.c.id)
    ).mappings()
    return [dict(row) for row in rows]
