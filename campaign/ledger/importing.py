"""Entering flat tables: matched against what is stored, all rows or none.

First every row is compared with the ledger and with the other rows, and every fault is
collected; only a table without fault reaches the pen. `log` is the import of one row.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from campaign.errors import Fault, Refused
from campaign.ledger import schema
from campaign.ledger.book import Book
from campaign.ledger.bulk import many_objects, stated
from campaign.ledger.flat.rows import settle_area
from campaign.ledger.instants import format_utc
from campaign.ledger.journal import Entry, Pen, writing
from campaign.ledger.progress import counted
from campaign.ledger.quantities import QUANTITIES
from campaign.ledger.resolving import Resolver
from campaign.ledger.stored import Stored, Values, same_number, stored_measurements

if TYPE_CHECKING:
    from campaign.ledger.database import Database
    from campaign.ledger.flat.reading import FlatRow, FlatTable

Row = dict[str, Any]

MEASUREMENT_NUMBERS = (
    "potential_V", "ion_content", "E_half_V", "rest_h", "amplitude_mV", "f_min_Hz", "f_max_Hz",
)  # fmt: skip
# What a row states itself, in the order of the tables' columns (see `bulk.stated`).
CONDITIONS = stated(schema.measurement)[5:]
FIT = stated(schema.fit)[5:]
IN_ORDER = tuple(sorted(QUANTITIES))


@dataclass
class Outcome:
    """What an import did, or on a dry run would do.

    electrodes, electrolytes, cells: the labels it makes. withdrawn: rows among the unchanged
    that were withdrawn earlier and stay so. imports: the numbers of the imports made.
    """

    electrodes: list[str] = field(default_factory=list)
    electrolytes: list[str] = field(default_factory=list)
    cells: list[str] = field(default_factory=list)
    measurements: int = 0
    refits: int = 0
    unchanged: int = 0
    withdrawn: int = 0
    imports: list[int] = field(default_factory=list)
    warnings: list[str] = field(default_factory=list)
    dry_run: bool = False

    def as_dict(self) -> dict[str, Any]:
        """Return the keys of the fixed interface, and a few more."""
        return {
            "added": {
                "electrodes": len(self.electrodes),
                "electrolytes": len(self.electrolytes),
                "cells": len(self.cells),
                "measurements": self.measurements,
            },
            "unchanged": self.unchanged,
            "refitted": self.refits,
            "withdrawn_unchanged": self.withdrawn,
            "new": {
                "electrodes": self.electrodes,
                "electrolytes": self.electrolytes,
                "cells": self.cells,
            },
            "imports": self.imports,
            "dry_run": self.dry_run,
            "warnings": self.warnings,
        }


@dataclass(frozen=True)
class Choices:
    """How an import treats rows that differ from, or were withdrawn from, the ledger."""

    refit: bool = False
    restore: bool = False
    dry_run: bool = False


def import_tables(
    database: Database,
    tables: Sequence[FlatTable],
    choices: Choices | None = None,
    who: str | None = None,
    reason: str | None = None,
) -> Outcome:
    """Enter the rows of flat tables; raises Refused with every fault, nothing written."""
    choices = choices or Choices()
    outcome = Outcome(dry_run=choices.dry_run)
    with (
        many_objects(),
        writing(database, who=who, reason=reason, dry_run=choices.dry_run) as pen,
    ):
        book = Book.read(pen)
        faults = [fault for table in tables for fault in table.faults]
        # Rows that lack a column would only repeat what is wrong with the header.
        tables = [table for table in tables if not table.misread]
        entering = _Entering(pen, book, choices, outcome)
        faults += entering.settle_areas([row for table in tables for row in table.rows])
        entering.load([row for table in tables for row in table.rows])
        for table in tables:
            outcome.warnings += [w for w in table.warnings if w not in outcome.warnings]
            faults += entering.enter_table(table)
        if faults:
            raise Refused(faults)
    return outcome


def log_row(
    database: Database, row: FlatRow, choices: Choices | None = None, who: str | None = None
) -> Outcome:
    """Enter one measurement; raises Refused with every fault, nothing written."""
    choices = choices or Choices()
    outcome = Outcome(dry_run=choices.dry_run)
    with writing(database, who=who, dry_run=choices.dry_run) as pen:
        book = Book.read(pen)
        entering = _Entering(pen, book, choices, outcome)
        faults = entering.settle_areas([row])
        entering.load([row])
        entry = pen.entry("log", f"measurement of cell {row.values.get('cell', '?')}")
        faults += entering.enter_rows(entry, [row])
        if faults:
            raise Refused(faults)
    return outcome


def instant_text(instant: Any) -> str:
    """Return the stored text of a row's instant."""
    return format_utc(instant.utc)


class _Entering:
    """One import while it runs: resolver, stored measurements, and places already taken."""

    def __init__(self, pen: Pen, book: Book, choices: Choices, outcome: Outcome) -> None:
        self.pen = pen
        self.book = book
        self.choices = choices
        self.outcome = outcome
        self.stored: dict[tuple[str, str], Stored] = {}
        self.taken: dict[tuple[str, str], FlatRow] = {}
        self._places: dict[int, tuple[str, str] | None] = {}

    def settle_areas(self, rows: Sequence[FlatRow]) -> list[Fault]:
        """Turn values per area into values as fitted, with the cell's area in the ledger.

        The area of a new cell may stand in another row, or another file, of the import.
        """
        faults = []
        waiting = [row for row in rows if row.per_area]
        areas = _stated_areas(rows) if waiting else {}
        for row in waiting:
            label = row.values.get("cell", "")
            cell = self.book.cells.get(label)
            area = areas.get(label) if cell is None else cell["area_cm2"]
            if area is not None:
                settle_area(row, area)
                continue
            if "area_cm2" in row.faulty or "cell" in row.faulty:
                continue  # reported where it was read
            faults.append(
                _fault(
                    row,
                    row.per_area[0],
                    f"{row.per_area[0]} is per area, and the area of cell "
                    f"{row.values.get('cell', '?')} is not stated",
                    "the column area_cm2 in a row of this cell",
                )
            )
        return faults

    def load(self, rows: Sequence[FlatRow]) -> None:
        """Read what is stored at the places the rows name."""
        labels: dict[str, set[int]] = {}
        instants: set[str] = set()
        for row in rows:
            place = self._place(row)
            if place is None:
                continue
            label, instant = place
            instants.add(instant)
            if label not in labels:
                labels[label] = set(self.book.former.get(label, ()))
                if label in self.book.cells:
                    labels[label].add(self.book.cells[label]["record"])
        self.stored = stored_measurements(self.pen.connection, labels, sorted(instants))

    def enter_table(self, table: FlatTable) -> list[Fault]:
        """Enter one file as one journal entry; return its faults."""
        number = self.pen.next_id(schema.imported_file)
        entry = self.pen.entry("import", f"import {number}: {table.file}")
        faults = self.enter_rows(entry, table.rows)
        if entry:
            self.pen.make(
                entry,
                schema.imported_file,
                {
                    "id": number,
                    "name": table.file,
                    "sha256": table.sha256,
                    "row_count": len(table.rows),
                },
            )
            entry.after["import"] = number
            self.outcome.imports.append(number)
        else:
            self.pen.give_back(schema.imported_file, number)
        return faults

    def enter_rows(self, entry: Entry, rows: Sequence[FlatRow]) -> list[Fault]:
        """Enter rows into an entry; return every fault."""
        resolver = Resolver(self.book, entry, self.outcome)
        unchanged = {id(row) for row in rows if self._unchanged(row)} if self.stored else set()
        faults = resolver.resolve([row for row in rows if id(row) not in unchanged])
        faults += resolver.compare([row for row in rows if id(row) in unchanged])
        for row in counted(rows, "rows entered"):
            faults += self._enter_row(entry, row, resolver)
        return faults

    def _place(self, row: FlatRow) -> tuple[str, str] | None:
        """Return cell and instant of a row; worked out once, rows live as long as this."""
        key = id(row)
        if key not in self._places:
            label, instant = row.values.get("cell"), row.values.get("measured_at")
            self._places[key] = (
                None if label is None or instant is None else (label, instant_text(instant))
            )
        return self._places[key]

    def _unchanged(self, row: FlatRow) -> bool:
        """Return whether the row's values are stored already and are to stay as they are."""
        place = self._place(row)
        stored = self.stored.get(place) if place else None
        if stored is None or not stored.holds(fitted(row)):
            return False
        return not (self.choices.restore and stored.current is None)

    def _enter_row(self, entry: Entry, row: FlatRow, resolver: Resolver) -> list[Fault]:
        place = self._place(row)
        if place is None:
            return []
        if place in self.taken:
            first = self.taken[place]
            return [
                _fault(
                    row,
                    "measured_at",
                    f"cell {place[0]} was measured at {row.raw('measured_at')} in line "
                    f"{first.line} already; keep one of the two rows",
                    "one row a measurement",
                )
            ]
        self.taken[place] = row
        stored = self.stored.get(place)
        if row.faulty:
            return []  # nothing will be entered; what was not read is reported already
        if self._unchanged(row):
            return self._keep(row, stored)
        cell = self.book.cells.get(place[0])
        if cell is None:
            return []  # its own fault was reported when the cell was resolved
        if stored is not None and stored.in_force is not None:
            return self._refit(entry, row, stored, resolver)
        if stored is not None and not (self.choices.refit or self.choices.restore):
            return [_withdrawn(row)]
        if row.values.get("potential_V") is None and cell["configuration"] != "symmetric":
            return [
                _fault(
                    row,
                    "potential_V",
                    f"potential_V is empty; only a symmetric cell may leave it so, and cell "
                    f"{place[0]} is {cell['configuration']}",
                    "a potential against the cell's reference",
                )
            ]
        self._new(entry, row, cell, place[1])
        return []

    def _keep(self, row: FlatRow, stored: Stored | None) -> list[Fault]:
        self.outcome.unchanged += 1
        if stored is None or stored.current is None:
            self.outcome.withdrawn += 1
        return list(_contradictions(row, stored)) if stored is not None else []

    def _refit(
        self, entry: Entry, row: FlatRow, stored: Stored, resolver: Resolver
    ) -> list[Fault]:
        faults = list(_contradictions(row, stored))
        if not (self.choices.refit or (self.choices.restore and stored.current is None)):
            faults.append(_differs(row, stored))
        if faults:
            return faults
        if stored.current is not None:
            from campaign.ledger.withdrawing import end_parts

            entry.end(schema.fit, stored.current)
            end_parts(self.pen.connection, entry, "fit", stored.current["id"])
        self._make_fit(entry, row, stored.record)
        self.outcome.refits += 1
        return []

    def _new(self, entry: Entry, row: FlatRow, cell: Row, instant: str) -> None:
        values = row.values
        number = self.pen.next_id(schema.measurement)
        offset = values["measured_at"].offset_minutes
        self.pen.add(
            entry,
            schema.measurement,
            (number, number, cell["record"], instant, offset, *map(values.get, CONDITIONS)),
        )
        self._make_fit(entry, row, number)
        self.outcome.measurements += 1

    def _make_fit(self, entry: Entry, row: FlatRow, measurement: int) -> None:
        values = row.values
        number = self.pen.next_id(schema.fit)
        fitted_at = values.get("fitted_at")
        when = (
            (None, None)
            if fitted_at is None
            else (instant_text(fitted_at), fitted_at.offset_minutes)
        )
        cells = (number, number, measurement, *when, *map(values.get, FIT))
        self.pen.add(entry, schema.fit, cells)
        self.pen.rows(entry, schema.fitted_value).extend(
            [
                (number, quantity, *item)
                for quantity in IN_ORDER
                if (item := values.get(quantity)) is not None
            ]
        )


def _stated_areas(rows: Iterable[FlatRow]) -> dict[str, float]:
    areas: dict[str, float] = {}
    for row in rows:
        if "cell" in row.values and "area_cm2" in row.values:
            areas.setdefault(row.values["cell"], row.values["area_cm2"])
    return areas


def fitted(row: FlatRow) -> Values:
    """Return the fitted values of a row: quantity -> (value, standard error)."""
    found: Values = {}
    for quantity in QUANTITIES:
        item = row.values.get(quantity)
        if item is not None:
            found[quantity] = (item.value, item.se)
    return found


def _fault(row: FlatRow, column: str, message: str, expected: str) -> Fault:
    return Fault(message, row.file, row.line, column, row.raw(column), expected)


def _withdrawn(row: FlatRow) -> Fault:
    return _fault(
        row,
        "measured_at",
        f"this measurement of cell {row.values['cell']} was withdrawn and its values differ from "
        "the withdrawn ones; give --restore to enter it again",
        "a measurement that was not withdrawn, or --restore",
    )


def _differs(row: FlatRow, stored: Stored) -> Fault:
    known = next((v for fit, v in stored.fits if fit["ended_by"] is None), {})
    new = fitted(row)
    quantity = next(
        name
        for name in (*new, *known)
        if name not in new
        or name not in known
        or not same_number(new[name][0], known[name][0])
        or not same_number(new[name][1], known[name][1])
    )
    return _fault(
        row,
        quantity,
        f"{quantity} is {_shown(new.get(quantity))} but {_shown(known.get(quantity))} is stored "
        f"for cell {row.values['cell']} at this instant; give --refit if it was fitted again",
        "the stored value, or --refit",
    )


def _shown(pair: tuple[float | None, float | None] | None) -> str:
    if pair is None:
        return "not fitted"
    value, se = pair
    if value is None:
        return "absent"
    return f"{value:.10g}" if se is None else f"{value:.10g} ± {se:.6g}"


def _contradictions(row: FlatRow, stored: Stored) -> Iterable[Fault]:
    """Yield where a row states another condition than every version of its measurement."""
    for name in (*MEASUREMENT_NUMBERS, "temperature_K"):
        value = row.values.get(name)
        if value is None or any(_agrees(value, version[name]) for version in stored.versions):
            continue
        known = (stored.in_force or stored.versions[-1])[name]
        column = "temperature_C" if name == "temperature_K" else name
        yield _fault(
            row,
            column,
            f"{column} is {row.raw(column)} but the stored measurement has "
            f"{_condition(name, known)}; 'campaign amend measurement {stored.record} "
            f"{column}=...' corrects it",
            "the stored condition",
        )


def _agrees(value: float, known: float | None) -> bool:
    return same_number(float(value), known)


def _condition(name: str, known: float | None) -> str:
    if known is None:
        return "none"
    if name == "temperature_K":
        return f"{known - 273.15:.6g} degC"
    return f"{known:.10g}"
