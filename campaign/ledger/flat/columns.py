"""Columns of a table: the cells of many rows become typed values at once.

A column of plain numbers is converted as a whole; only where that fails does each cell get its
own look and its own fault.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Sequence
from typing import Any

from campaign.ledger.flat.headers import Header, shown
from campaign.ledger.flat.values import (
    BOUNDS,
    WORDS,
    OtherMark,
    Uncalculated,
    Value,
    ValueFault,
    as_point,
    in_bounds,
    instant_reader,
    is_absent,
    looks_numeric,
    with_uncertainty,
)
from campaign.ledger.quantities import WITH_ERROR

Report = Callable[[int, Any, ValueFault | None], None]

NUMBERS = ("number", "integer", "value", "error")
_ONLY_NUMBERS = {
    ".": re.compile(r"[0-9.eE+-]*", re.ASCII),
    ",": re.compile(r"[0-9,eE+-]*", re.ASCII),
}
_MOST_KEPT = 20_000  # texts whose reading is remembered


class WrongMark(ValueFault):
    """A number has the other decimal mark than the rest of its file."""


class WordColumn:
    """Texts, choices and instants: each spelling is read once."""

    def __init__(self, header: Header, reader: Callable[[str, Any], Any], *, guarded: bool) -> None:
        self.header = header
        self._reader = reader
        self._guarded = guarded
        self._known: dict[Any, Any] = {}

    def convert(self, cells: Sequence[Any], report: Report) -> list[Any]:
        """Return the values of cells, None where empty or faulty; faults are reported."""
        known = self._known
        if len(known) > _MOST_KEPT:
            known.clear()
        found: list[Any] = []
        for place, cell in enumerate(cells):
            if cell is None or cell == "":
                found.append(None)
                continue
            key = cell if type(cell) is str else (type(cell), cell)
            value = known.get(key)
            if value is None and key not in known:
                value = known[key] = self._read(cell)
            if type(value) is ValueFault:
                report(place, cell, value)
                value = None
            found.append(value)
        return found

    def _read(self, cell: Any) -> Any:
        if type(cell) is str and not cell.strip():
            return None
        if self._guarded and type(cell) is str:
            cell = unguarded(cell)
        try:
            if isinstance(cell, Uncalculated):
                raise _uncalculated(self.header.name, cell)
            return self._reader(self.header.name, cell)
        except ValueFault as fault:
            return fault


class NumberColumn:
    """Plain numbers in a header's unit.

    decimal: the file's mark; None where it could not be told, when numbers with a mark are
    passed over without a fault of their own.
    """

    def __init__(self, header: Header, decimal: str | None) -> None:
        self.header = header
        self.decimal = decimal
        self.whole = header.kind == "integer"
        self.bounds = BOUNDS[header.name]

    def convert(self, cells: Sequence[Any], report: Report) -> list[Any]:
        """Return the numbers of cells, None where empty or faulty; faults are reported."""
        quick = self._quickly(cells)
        if quick is not None:
            return quick
        found: list[Any] = []
        for place, cell in enumerate(cells):
            if cell is None or cell == "" or (type(cell) is str and not cell.strip()):
                found.append(None)
                continue
            try:
                found.append(self._read(cell))
            except OtherMark:
                found.append(None)
                report(place, cell, None)
            except ValueFault as fault:
                found.append(None)
                report(place, cell, fault)
        return found

    def _quickly(self, cells: Sequence[Any]) -> list[float | None] | None:
        """Return the numbers where every cell is plain and in range, else None."""
        if self.decimal is None or self.whole:
            return None
        try:
            if not _ONLY_NUMBERS[self.decimal].fullmatch("".join(cells)):
                return None
            if self.decimal == ",":
                cells = "\n".join(cells).replace(",", ".").split("\n")
            factor, offset = self.header.scale.factor, self.header.scale.offset
            if factor == 1.0 and offset == 0.0:
                found = [float(cell) if cell else None for cell in cells]
            else:
                found = [float(cell) * factor + offset if cell else None for cell in cells]
        except (TypeError, ValueError):
            return None
        filled = [number for number in found if number is not None]
        if filled:
            low, high = min(filled), max(filled)
            bounds = self.bounds
            too_low = low <= bounds.low if bounds.above else low < bounds.low
            if too_low or high > bounds.high or not (math.isfinite(low) and math.isfinite(high)):
                return None
        return found

    def _read(self, cell: Any) -> Any:
        number = self._scaled(self._number(cell)[0])
        in_bounds(self.header.name, number, cell)
        if not self.whole:
            return number
        if number != int(number):
            raise ValueFault(
                f"{self.header.name} is {shown(cell, 60)}, which is not whole", "a whole number"
            )
        return int(number)

    def _scaled(self, number: float) -> float:
        return number * self.header.scale.factor + self.header.scale.offset

    def _number(self, cell: Any) -> tuple[float, float | None]:
        """Return the number of a cell and its uncertainty, in the header's unit."""
        name = self.header.name
        if isinstance(cell, (int, float)) and not isinstance(cell, bool):
            return self._as_float(cell), None
        if isinstance(cell, Uncalculated):
            raise _uncalculated(name, cell)
        text = str(cell)
        if self.decimal is None and ("." in text or "," in text) and looks_numeric(text):
            raise OtherMark
        try:
            number, error = with_uncertainty(as_point(text, self.decimal or "."))
        except OtherMark:
            raise WrongMark(
                f"{name} is '{shown(text, 60)}', but the decimal mark of this file is "
                f"'{self.decimal}'",
                self._expected(),
            ) from None
        except (ValueError, OverflowError):
            raise ValueFault(
                f"{name} is '{shown(text, 60)}', which is not a number", self._expected()
            ) from None
        if error is not None and name not in WITH_ERROR:
            raise ValueFault(
                f"{name} is '{shown(text, 60)}', but an uncertainty belongs to "
                f"{', '.join(WITH_ERROR)} only",
                "a plain number",
            )
        return number, error

    def _as_float(self, given: float) -> float:
        try:
            return float(given)
        except OverflowError:
            raise ValueFault(
                f"{self.header.name} is a number of {given.__sizeof__()} bytes, which is out of "
                "range",
                self._expected(),
            ) from None

    def _expected(self) -> str:
        if self.whole:
            return "a whole number"
        mark = self.decimal or "."
        if self.header.name in WITH_ERROR:
            return f"a number such as 41{mark}2, 41{mark}2±0{mark}8 or 41{mark}2(8)"
        return f"a number such as 41{mark}2"


class ValueColumn(NumberColumn):
    """Fitted values: numbers, numbers with their uncertainty, or `absent`.

    Plain numbers stay numbers; a cell with an uncertainty, or absent, becomes a `Value`.
    """

    def _read(self, cell: Any) -> Any:
        name = self.header.name
        if is_absent(name, cell):
            return Value(None)
        number, error = self._number(cell)
        number = in_bounds(name, self._scaled(number), cell)
        if error is None:
            return number
        error *= self.header.scale.factor
        return Value(number, in_bounds(f"{name}_se", error, cell))


def column_for(
    header: Header, decimal: str | None, zone: str, *, guarded: bool
) -> WordColumn | NumberColumn:
    """Return the column that reads a header's cells.

    guarded: texts may carry the apostrophe that keeps spreadsheets from running them.
    """
    kind = header.kind
    if kind == "instant":
        return WordColumn(header, instant_reader(zone), guarded=False)
    if kind == "value":
        return ValueColumn(header, decimal)
    if kind in NUMBERS:
        return NumberColumn(header, decimal)
    return WordColumn(header, WORDS[kind], guarded=guarded)


_GUARDED = re.compile(r"'+[=+\-@]")


def unguarded(text: str) -> str:
    """Return a text without the apostrophe that `writing.guarded` put before it."""
    return text[1:] if _GUARDED.match(text) else text


def _uncalculated(name: str, cell: Uncalculated) -> ValueFault:
    return ValueFault(
        f"{name} is the formula '{shown(cell, 60)}', whose result the file does not hold; open and "
        "save it in a spreadsheet program, or paste values",
        "a value",
    )
