"""Turning the cells of one row into typed values, collecting every fault."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from campaign.errors import Fault
from campaign.ledger.flat.headers import COLUMNS, Header
from campaign.ledger.flat.units import Scale
from campaign.ledger.flat.values import (
    WORDS,
    Value,
    ValueFault,
    as_point,
    in_bounds,
    instant_reader,
    is_absent,
    with_uncertainty,
)
from campaign.ledger.quantities import QUANTITIES, WITH_ERROR

Reader = Callable[[str, Any], Any]

NUMBERS = ("number", "integer", "value", "error")
# The flat table is in degrees Celsius; what is kept is kelvin.
STORED_AS = {"temperature_C": "temperature_K"}
REQUIRED = {
    "cell": "the label of a cell",
    "measured_at": "a date and time such as 2026-03-14T09:30+01:00",
    "temperature_C": "a temperature in degrees Celsius",
}


@dataclass(slots=True)
class FlatRow:
    """One row: where it stands, its values by canonical header, and its cells as written.

    values holds only what is filled; `temperature_K` [K] stands for temperature_C, fitted
    quantities are `Value`s in canonical units as fitted. per_area: quantities that are still
    per geometric area.
    """

    file: str
    line: int
    values: dict[str, Any]
    written: Mapping[str, Any] = field(default_factory=dict)
    per_area: tuple[str, ...] = ()

    def raw(self, name: str) -> str | None:
        """Return the cell of a column as it was written, or None."""
        given = self.written.get(name)
        return None if given is None else str(given)


class RowReader:
    """Reads the rows of one file: columns, decimal mark and zone are settled."""

    def __init__(
        self, file: str, headers: Sequence[Header | None], decimal: str, zone: str
    ) -> None:
        self.file = file
        self.decimal = decimal
        self._instant = instant_reader(zone)
        self._columns = [
            (index, header.name, COLUMNS[header.name][0], header.scale, self._reader(header))
            for index, header in enumerate(headers)
            if header is not None
        ]
        self._relative = {h.name for h in headers if h is not None and h.scale.relative}
        self._per_area = {h.name for h in headers if h is not None and h.scale.per_area}
        self._seen: dict[tuple[str, Any], Any] = {}

    def _reader(self, header: Header) -> Reader:
        kind = COLUMNS[header.name][0]
        if kind == "instant":
            return self._instant
        if kind in WORDS:
            return WORDS[kind]
        scale = header.scale
        if kind == "value":
            return self._value_reader(scale)
        return self._number_reader(scale, whole=kind == "integer")

    def read(self, line: int, cells: Sequence[Any]) -> tuple[FlatRow, list[Fault]]:
        """Return the row and every fault in it."""
        values: dict[str, Any] = {}
        written: dict[str, Any] = {}
        faults: list[Fault] = []
        for index, name, kind, _, reader in self._columns:
            given = cells[index] if index < len(cells) else None
            if given is None or given == "" or (type(given) is str and not given.strip()):
                continue
            written[name] = given
            try:
                values[STORED_AS.get(name, name)] = self._once(kind, name, given, reader)
            except ValueFault as fault:
                faults.append(
                    Fault(str(fault), self.file, line, name, str(given)[:200], fault.expected)
                )
        row = FlatRow(self.file, line, values, written)
        faults += self._join_errors(row)
        faults += _whole_row_faults(row, {fault.column for fault in faults})
        row.per_area = tuple(q for q in QUANTITIES if q in self._per_area and q in values)
        return row, faults

    def _once(self, kind: str, name: str, given: Any, reader: Reader) -> Any:
        """Read a repeated word once: labels and recipes recur in every row."""
        if kind in NUMBERS or kind == "instant":
            return reader(name, given)
        key = (name, given)
        if key not in self._seen:
            self._seen[key] = reader(name, given)
        return self._seen[key]

    def _number_reader(self, scale: Scale, *, whole: bool) -> Reader:
        factor, offset = scale.factor, scale.offset

        def read(name: str, given: Any) -> Any:
            number = self._number(name, given, uncertain=False)[0] * factor + offset
            in_bounds(name, number, given)
            if not whole:
                return number
            if number != int(number):
                raise ValueFault(f"{name} is {given}, which is not whole", "a whole number")
            return int(number)

        return read

    def _value_reader(self, scale: Scale) -> Reader:
        factor = scale.factor

        def read(name: str, given: Any) -> Value:
            if is_absent(name, given):
                return Value(None)
            number, error = self._number(name, given, uncertain=name in WITH_ERROR)
            value = in_bounds(name, number * factor, given)
            if error is not None:
                error = in_bounds(f"{name}_se", error * factor, given)
            return Value(value, error)

        return read

    def _number(self, name: str, given: Any, *, uncertain: bool) -> tuple[float, float | None]:
        if isinstance(given, (int, float)) and not isinstance(given, bool):
            return self._as_float(name, given), None
        try:
            number, error = with_uncertainty(as_point(str(given), self.decimal))
        except (ValueError, OverflowError):
            raise ValueFault(self._not_a_number(name, given), self._expected(name)) from None
        if error is not None and not uncertain:
            raise ValueFault(
                f"{name} is '{str(given)[:60]}', but an uncertainty belongs to "
                f"{', '.join(WITH_ERROR)} only",
                "a plain number",
            )
        return number, error

    def _as_float(self, name: str, given: float) -> float:
        try:
            return float(given)
        except OverflowError:
            raise ValueFault(
                f"{name} is {str(given)[:20]}..., which is out of range", self._expected(name)
            ) from None

    def _not_a_number(self, name: str, given: Any) -> str:
        other = "," if self.decimal == "." else "."
        why = "which is not a number"
        if other in str(given):
            why = f"but the decimal mark of this file is '{self.decimal}'"
        return f"{name} is '{str(given)[:60]}', {why}"

    def _expected(self, name: str) -> str:
        mark = self.decimal
        if COLUMNS[name][0] == "value":
            return f"a number such as 41{mark}2, 41{mark}2±0{mark}8 or 41{mark}2(8)"
        return f"a number such as 41{mark}2"

    def _join_errors(self, row: FlatRow) -> list[Fault]:
        """Move each standard error column into its value."""
        faults = []
        for quantity in WITH_ERROR:
            name = f"{quantity}_se"
            error = row.values.pop(name, None)
            if error is None:
                continue
            value: Value | None = row.values.get(quantity)
            if value is None or value.value is None:
                state = "absent" if value is not None else "empty"
                if quantity in row.written and value is None:
                    continue  # the value itself was not read, which is reported
                faults.append(
                    self._fault(row, name, f"{name} is filled but {quantity} is {state}",
                                f"a value in {quantity}, or {name} empty")  # fmt: skip
                )
            elif value.se is not None:
                faults.append(
                    self._fault(row, name,
                                f"{quantity} carries an uncertainty itself and {name} is filled "
                                "as well; keep one of the two", "one standard uncertainty")
                )  # fmt: skip
            else:
                if name in self._relative:
                    error *= value.value
                row.values[quantity] = Value(value.value, error)
        return faults

    def _fault(self, row: FlatRow, column: str, message: str, expected: str) -> Fault:
        return Fault(message, self.file, row.line, column, row.raw(column), expected)


def _whole_row_faults(row: FlatRow, faulty: set[str | None]) -> list[Fault]:
    """Return what is wrong with a row as a whole (columns already faulty left alone)."""
    faults = []
    for name, expected in REQUIRED.items():
        if STORED_AS.get(name, name) not in row.values and name not in faulty:
            faults.append(
                Fault(f"{name} is empty; every row needs it", row.file, row.line, name, None, expected)
            )
    if not any(q in row.values or q in faulty for q in QUANTITIES):
        faults.append(
            Fault(
                "no fitted value is filled; every row needs one at least",
                row.file, row.line, "R_ct", None, "a value in one of " + ", ".join(QUANTITIES),
            )
        )  # fmt: skip
    low, high = row.values.get("f_min_Hz"), row.values.get("f_max_Hz")
    if low is not None and high is not None and low >= high:
        faults.append(
            Fault(
                f"f_min_Hz ({row.raw('f_min_Hz')}) is not below f_max_Hz ({row.raw('f_max_Hz')})",
                row.file, row.line, "f_min_Hz", row.raw("f_min_Hz"), "the lower frequency",
            )
        )  # fmt: skip
    return faults


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
