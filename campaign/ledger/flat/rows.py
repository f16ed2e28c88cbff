"""Turning rows of cells into typed values, collecting every fault."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from functools import partial
from typing import Any

from campaign.errors import Fault
from campaign.ledger.flat.columns import WrongMark, column_for
from campaign.ledger.flat.headers import Header, shown
from campaign.ledger.flat.values import Value, ValueFault
from campaign.ledger.quantities import QUANTITIES, WITH_ERROR

# The flat table is in degrees Celsius; what is kept is kelvin.
STORED_AS = {"temperature_C": "temperature_K"}
REQUIRED = {
    "cell": "the label of a cell",
    "measured_at": "a date and time such as 2026-03-14T09:30+01:00",
    "temperature_C": "a temperature in degrees Celsius",
}

ERRORS = tuple(f"{quantity}_se" for quantity in WITH_ERROR)
Block = Sequence[tuple[int, Any, Sequence[Any]]]  # line, row as written, its cells


@dataclass(frozen=True)
class Form:
    """What the rows of one file share.

    places: where each column stands. headers: how each is written. delimiter: of the cells.
    """

    places: Mapping[str, int] = field(default_factory=dict)
    headers: Mapping[str, str] = field(default_factory=dict)
    delimiter: str = ","


@dataclass(slots=True)
class FlatRow:
    """One row: where it stands, its values by canonical header, and its cells as written.

    values holds only what is filled; `temperature_K` [K] stands for temperature_C, fitted
    quantities are `Value`s in canonical units as fitted. per_area: quantities that are still
    per geometric area. written: the row's text, or its cells. faulty: the columns a fault was
    reported for.
    """

    file: str
    line: int
    values: dict[str, Any]
    written: str | Sequence[Any] = ()
    per_area: tuple[str, ...] = ()
    form: Form = field(default_factory=Form)
    faulty: frozenset[str] = frozenset()

    def raw(self, name: str) -> str | None:
        """Return the cell of a column as it was written, or None."""
        place = self.form.places.get(name)
        if place is None:
            return None
        cells = self.written
        if isinstance(cells, str):
            lines = io.StringIO(cells, newline="")
            cells = next(csv.reader(lines, delimiter=self.form.delimiter), [])
        given = cells[place] if place < len(cells) else None
        return None if given is None or given == "" else str(given)

    def header(self, name: str) -> str:
        """Return a column's header as written in the file; its canonical name if it has none."""
        return self.form.headers.get(name, name)


class RowReader:
    """Reads rows in blocks: columns, decimal mark and zone are settled.

    headers: by place, None for columns passed over. fixed: values that every row has, for
    columns the file does not have. required: columns whose empty cells are faults; None for rows
    without a header that was checked, where a missing column is one as well. decimal:
    the mark, or None where it could not be told (numbers with a mark are then passed over).
    """

    def __init__(
        self,
        file: str,
        headers: Sequence[Header | None],
        decimal: str | None,
        zone: str,
        *,
        delimiter: str = ",",
        fixed: Mapping[str, Any] | None = None,
        required: Sequence[str] | None = None,
        guarded: bool = True,
    ) -> None:
        self.file = file
        self._fixed = dict(fixed or {})
        self._required = tuple(REQUIRED) if required is None else required
        self._rows_alone = required is None
        self._headers = {h.name: h for h in headers if h is not None}
        self._columns = [
            (place, header, column_for(header, decimal, zone, guarded=guarded))
            for place, header in enumerate(headers)
            if header is not None
        ]
        places = {h.name: place for place, h in enumerate(headers) if h is not None}
        self._form = Form(places, {n: h.written for n, h in self._headers.items()}, delimiter)
        self._per_area = tuple(
            q for q in QUANTITIES if q in self._headers and self._headers[q].scale.per_area
        )
        self.wrong_marks = 0

    def read(self, block: Block) -> tuple[list[FlatRow], list[Fault]]:
        """Return the rows of a block and every fault in them, by line."""
        reading = _Reading(self.file, block, self._form.places)
        found: dict[str, list[Any]] = {}
        for place, header, column in self._columns:
            cells = [row[2][place] for row in block]
            found[header.name] = column.convert(cells, reading.reporter(header))
        for name, value in self._fixed.items():
            found[name] = [value] * len(block)
        self._join_errors(found, reading)
        self._whole_rows(found, reading)
        rows = self._rows(found, block)
        for place, name in reading.faulty:
            rows[place].faulty |= {name}
        return rows, self._once_wrong(reading.in_order())

    def _once_wrong(self, faults: Sequence[tuple[Fault, bool]]) -> list[Fault]:
        """Return faults, of the wrong decimal marks only the first in the file."""
        kept = []
        for fault, wrong_mark in faults:
            self.wrong_marks += wrong_mark
            if not wrong_mark or self.wrong_marks == 1:
                kept.append(fault)
        return kept

    def _join_errors(self, found: dict[str, list[Any]], reading: _Reading) -> None:
        """Make each quantity's column, and that of its standard error, one of values."""
        for quantity in QUANTITIES:
            errors = found.pop(f"{quantity}_se", None)
            if errors is not None and not any(errors):
                errors = None
            if errors is None and quantity not in found:
                continue
            values = found.get(quantity) or [None] * reading.count
            found[quantity] = (
                [_as_value(value) for value in values]
                if errors is None
                else self._values(values, errors, self._headers[f"{quantity}_se"], reading)
            )

    def _values(
        self, values: list[Any], errors: list[Any], header: Header, reading: _Reading
    ) -> list[Value | None]:
        relative = header.scale.relative
        if not relative and set(map(type, values)) == set(map(type, errors)) == {float}:
            return list(map(_pair, zip(values, errors, strict=True)))
        return [
            _as_value(value)
            if error is None
            else self._joined(place, value, error, header, reading)
            for place, (value, error) in enumerate(zip(values, errors, strict=True))
        ]

    def _joined(
        self, place: int, value: Any, error: float, header: Header, reading: _Reading
    ) -> Value | None:
        if type(value) is float:
            return _pair((value, error * value if header.scale.relative else error))
        quantity = header.name.removesuffix("_se")
        if value is None:
            if (place, quantity) not in reading.faulty:
                message = f"{header.name} is filled but {quantity} is empty"
                reading.add(place, header.name, header.written, message,
                            f"a value in {quantity}, or {header.name} empty")  # fmt: skip
            return None
        known: Value = value
        if known.value is None:
            message = f"{header.name} is filled but {quantity} is absent"
            reading.add(place, header.name, header.written, message, f"{header.name} empty")
        else:
            message = (
                f"{quantity} carries an uncertainty itself and {header.name} is filled as well; "
                "keep one of the two"
            )
            reading.add(place, header.name, header.written, message, "one standard uncertainty")
        return known

    def _whole_rows(self, found: Mapping[str, list[Any]], reading: _Reading) -> None:
        for name in self._required:
            column = found.get(name, [None] * reading.count)
            written = self._headers[name].written if name in self._headers else name
            for place, value in enumerate(column):
                if value is None and (place, name) not in reading.faulty:
                    reading.add(place, name, written, f"{name} is empty; every row needs it",
                                REQUIRED[name])  # fmt: skip
        self._some_value(found, reading)
        self._frequencies(found, reading)

    def _some_value(self, found: Mapping[str, list[Any]], reading: _Reading) -> None:
        columns = [found[q] for q in QUANTITIES if q in found]
        if not columns and not self._rows_alone:
            return  # said once of the header
        filled = zip(*columns, strict=True) if columns else [()] * reading.count
        written = self._headers["R_ct"].written if "R_ct" in self._headers else "R_ct"
        for place, values in enumerate(filled):
            if any(value is not None for value in values):
                continue
            if not any((place, q) in reading.faulty for q in (*QUANTITIES, *ERRORS)):
                reading.add(
                    place, "R_ct", written,
                    "no fitted value is filled; every row needs one at least",
                    "a value in one of " + ", ".join(QUANTITIES),
                )  # fmt: skip

    def _frequencies(self, found: Mapping[str, list[Any]], reading: _Reading) -> None:
        if "f_min_Hz" not in found or "f_max_Hz" not in found:
            return
        pairs = zip(found["f_min_Hz"], found["f_max_Hz"], strict=True)
        for place, (low, high) in enumerate(pairs):
            if low is not None and high is not None and low >= high:
                written = self._headers["f_min_Hz"].written if "f_min_Hz" in self._headers else None
                reading.add(
                    place, "f_min_Hz", written or "f_min_Hz",
                    f"f_min_Hz ({low:g} Hz) is not below f_max_Hz ({high:g} Hz)",
                    "the lower frequency",
                )  # fmt: skip

    def _rows(self, found: Mapping[str, list[Any]], block: Block) -> list[FlatRow]:
        names = [STORED_AS.get(name, name) for name in found]
        filled = zip(*found.values(), strict=True) if found else [()] * len(block)
        rows = []
        for (line, written, _), cells in zip(block, filled, strict=True):
            values = {n: v for n, v in zip(names, cells, strict=True) if v is not None}
            per_area = tuple(q for q in self._per_area if q in values) if self._per_area else ()
            rows.append(FlatRow(self.file, line, values, written, per_area, self._form))
        return rows


class _Reading:
    """The faults of one block while it is read."""

    def __init__(self, file: str, block: Block, places: Mapping[str, int]) -> None:
        self.file = file
        self.places = places
        self.block = block
        self.count = len(block)
        self.faulty: set[tuple[int, str]] = set()
        self._faults: list[tuple[int, int, Fault, bool]] = []

    def reporter(self, header: Header) -> Any:
        """Return what a column calls for a cell it cannot read."""

        def report(place: int, cell: Any, fault: ValueFault | None) -> None:
            self.faulty.add((place, header.name))
            if fault is not None:
                self.add(
                    place, header.name, header.written, str(fault), fault.expected,
                    wrong_mark=isinstance(fault, WrongMark),
                )  # fmt: skip

        return report

    def add(
        self,
        place: int,
        name: str,
        column: str,
        message: str,
        expected: str,
        *,
        wrong_mark: bool = False,
    ) -> None:
        """Note a fault of one row, with what stands in the column's cell."""
        self.faulty.add((place, name))
        line, _, cells = self.block[place]
        at = self.places.get(name)
        value = None if at is None or cells[at] in (None, "") else shown(cells[at], 200)
        fault = Fault(message, self.file, line, column, value, expected)
        self._faults.append((place, len(cells) if at is None else at, fault, wrong_mark))

    def in_order(self) -> list[tuple[Fault, bool]]:
        """Return the faults by line, within a line by column, and which are wrong marks."""
        self._faults.sort(key=lambda item: item[:2])
        return [(fault, wrong_mark) for _, _, fault, wrong_mark in self._faults]


# A Value of a pair, without the detour over a Python function.
_pair: Callable[[tuple[Any, Any]], Value] = partial(tuple.__new__, Value)


def _as_value(value: Any) -> Value | None:
    return _pair((value, None)) if type(value) is float else value


def settle_area(row: FlatRow, area_cm2: float) -> None:
    """Turn values per geometric area into values as fitted, with the cell's area [cm2]."""
    for quantity in row.per_area:
        value: Value = row.values[quantity]
        if value.value is None:
            continue
        factor = area_cm2 if quantity.startswith("Q_") else 1 / area_cm2
        error = None if value.se is None else value.se * factor
        row.values[quantity] = Value(value.value * factor, error)
    row.per_area = ()

