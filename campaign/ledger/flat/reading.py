"""Reading a flat table: header, decimal mark, rows; every fault at once."""

from __future__ import annotations

import gc
import itertools
from collections.abc import Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from campaign.errors import Fault, Refused
from campaign.ledger.flat.columns import NUMBERS
from campaign.ledger.flat.decimals import MarkFinder
from campaign.ledger.flat.headers import Header, shown
from campaign.ledger.flat.heading import Heading, read_heading, read_keys
from campaign.ledger.flat.mapping import TableMapping
from campaign.ledger.flat.rows import FlatRow, RowReader, settle_area
from campaign.ledger.flat.sources import Row, Source, open_source

__all__ = ["FlatRow", "FlatTable", "read_table", "row_from_mapping"]

MOST_FAULTS = 1000
BLOCK = 2000  # rows converted at once


@dataclass
class FlatTable:
    """A file as rows with typed values, the faults found in it, and what was assumed.

    sha256: of the file's bytes. headers: canonical name -> header as written. misread: there
    are faults in the header, so that columns are missing from the rows.
    """

    file: str
    sha256: str
    rows: list[FlatRow] = field(default_factory=list)
    faults: list[Fault] = field(default_factory=list)
    warnings: list[str] = field(default_factory=list)
    headers: dict[str, str] = field(default_factory=dict)
    misread: bool = False


def read_table(
    path: Path,
    *,
    zone: str,
    mapping: TableMapping | None = None,
    decimal: str | None = None,
    sheet: str | None = None,
) -> FlatTable:
    """Return a file's rows; faults are in the table, none is raised.

    zone: of times without offset. decimal: the mark, where the file does not show it.
    """
    mapping = mapping or TableMapping()
    table = FlatTable(shown(path.name, 255), "0" * 64)
    try:
        source = open_source(path, sheet or mapping.sheet)
        table.sha256 = source.sha256
        _read(table, source, mapping, decimal or mapping.decimal, zone)
    except Refused as error:
        table.faults += error.faults
    table.faults.sort(key=lambda fault: fault.line or 0)
    _settle_areas(table)
    _note_assumptions(table)
    return table


def _read(
    table: FlatTable, source: Source, mapping: TableMapping, decimal: str | None, zone: str
) -> None:
    first = next(source.rows, None)
    if first is None:
        raise Refused([Fault("the file has no header line", table.file, expected="a header line")])
    line, _, written = first
    heading = read_heading(table.file, line, written, mapping, zone)
    table.faults += heading.faults
    table.misread = bool(heading.faults)
    table.warnings += [f"{table.file}: {warning}" for warning in heading.warnings]
    table.headers = {h.name: h.written for h in heading.headers if h is not None}
    body = _even(table, source, heading, line)
    finder, seen = _find_mark(table.file, heading.headers, body, decimal)
    mark, faults = (decimal, []) if decimal is not None else finder.decide()
    table.faults += faults
    reader = RowReader(
        table.file, heading.headers, mark, zone,
        delimiter=source.delimiter, fixed=heading.fixed, required=heading.required,
    )  # fmt: skip
    with _no_collection():
        _read_body(table, reader, itertools.chain(seen, body))
    if reader.wrong_marks and finder.first:
        _name_both_marks(table, reader.wrong_marks, finder)
    if not table.rows and not table.faults:
        table.faults.append(
            Fault("the file has a header and no rows", table.file, expected="a row a measurement")
        )


def _even(table: FlatTable, source: Source, heading: Heading, line: int) -> Iterator[Row]:
    """Yield rows as wide as the header; others are faults and passed over."""
    width = len(heading.headers)
    unnamed = [place for place, name in enumerate(heading.written) if not name]
    for row in source.rows:
        number, _, cells = row
        found = len(cells)
        if found < width and source.typed:
            cells = [*cells, *([None] * (width - found))]
            row = (number, cells, cells)
        elif found != width and (found < width or any(_filled(c) for c in cells[width:])):
            table.faults.append(
                Fault(
                    f"the row has {found} cells and the header has {width}; check delimiters and "
                    "quotation marks",
                    table.file, number, None, shown(cells[-1], 80) or None, f"{width} cells",
                )
            )  # fmt: skip
            if len(table.faults) > MOST_FAULTS:
                return
            continue
        if unnamed and any(_filled(cells[place]) for place in unnamed):
            place = next(place for place in unnamed if _filled(cells[place]))
            table.faults.append(
                Fault(
                    f"column {place + 1} has no header but holds '{shown(cells[place], 60)}'",
                    table.file, number, f"column {place + 1}", shown(cells[place], 80),
                    "a header above every filled column",
                )
            )  # fmt: skip
            unnamed.remove(place)
        yield row


def _filled(cell: Any) -> bool:
    return cell is not None and str(cell).strip() != ""


def _find_mark(
    file: str, headers: Sequence[Header | None], body: Iterator[Row], stated: str | None
) -> tuple[MarkFinder, list[Row]]:
    """Look at rows until a decimal mark is beyond doubt; return what was looked at."""
    finder = MarkFinder(file)
    seen: list[Row] = []
    if stated is not None:
        return finder, seen
    numeric = [(i, h) for i, h in enumerate(headers) if h is not None and h.kind in NUMBERS]
    for row in body:
        seen.append(row)
        line, _, cells = row
        for index, header in numeric:
            cell = cells[index]
            if type(cell) is str and ("." in cell or "," in cell):
                finder.see(line, header, cell.strip())
        if finder.settled:
            break
    return finder, seen


@contextmanager
def _no_collection() -> Iterator[None]:
    """Hold the cyclic garbage collector: a million new values and not one cycle."""
    was = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was:
            gc.enable()


def _read_body(table: FlatTable, reader: RowReader, rows: Iterable[Row]) -> None:
    rows = iter(rows)
    while block := list(itertools.islice(rows, BLOCK)):
        found, faults = reader.read(block)
        table.rows += found
        table.faults += faults
        if len(table.faults) > MOST_FAULTS:
            table.faults.sort(key=lambda fault: fault.line or 0)
            left = sum(1 for _ in rows)
            _cut(table, block[-1][0], left)
            return


def _cut(table: FlatTable, line: int, left: int) -> None:
    more = len(table.faults) - MOST_FAULTS
    del table.faults[MOST_FAULTS:]
    table.faults.append(
        Fault(
            f"{more} more faults were found up to line {line}, and {left} rows after it were not "
            "looked at; mend these first",
            table.file,
            line,
        )
    )


def _name_both_marks(table: FlatTable, count: int, finder: MarkFinder) -> None:
    """Say in the fault about a wrong decimal mark where the right one was seen."""
    mark, (line, column, text) = next(iter(finder.first.items()))
    end = f"but the decimal mark of this file is '{mark}'"
    for place, fault in enumerate(table.faults):
        if fault.message.endswith(end):
            more = f"; {count - 1} more numbers are written so" if count > 1 else ""
            message = (
                f"{fault.message} ('{text}' in line {line}, column {column}){more}; write every "
                "number with one mark and without thousands separators, or say which with --decimal"
            )
            table.faults[place] = replace(fault, message=message)
            return


def _settle_areas(table: FlatTable) -> None:
    """Convert values per area where the file itself says the area of the cell."""
    if not any(row.per_area for row in table.rows):
        return
    areas: dict[str, float] = {}
    for row in table.rows:
        if "cell" in row.values and "area_cm2" in row.values:
            areas.setdefault(row.values["cell"], row.values["area_cm2"])
    for row in table.rows:
        if row.per_area and row.values.get("cell") in areas:
            settle_area(row, areas[row.values["cell"]])


def _note_assumptions(table: FlatTable) -> None:
    instants = [row.values["measured_at"] for row in table.rows if "measured_at" in row.values]
    assumed = sum(1 for instant in instants if instant.zone_assumed)
    if assumed:
        table.warnings.append(
            f"{table.file}: {_count(assumed, 'time')} without offset read in the campaign's zone"
        )
    dates = sum(1 for instant in instants if instant.date_only)
    if dates:
        table.warnings.append(
            f"{table.file}: {_count(dates, 'measurement')} with a date and no time of day; 00:00 "
            "was taken"
        )
    kelvin = [row.values["temperature_K"] for row in table.rows if "temperature_K" in row.values]
    if kelvin and min(kelvin) > 273.15 + 200:
        table.warnings.append(
            f"{table.file}: every temperature is above 200 degC; if they are in kelvin, write T/K"
        )


def _count(number: int, noun: str) -> str:
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def row_from_mapping(
    stated: Mapping[str, object], zone: str, *, line: int = 1, file: str = "standard input"
) -> tuple[FlatRow, list[Fault]]:
    """Return the row a mapping of headers to values states, and every fault in it.

    Values may be JSON numbers, texts or None; the decimal mark is a point.
    """
    headers, cells, fixed, faults = read_keys(file, line, stated)
    reader = RowReader(file, headers, ".", zone, fixed=fixed, guarded=False)
    rows, more = reader.read([(line, cells, cells)])
    row = rows[0]
    if row.per_area and "area_cm2" in row.values:
        settle_area(row, row.values["area_cm2"])
    return row, [*faults, *more]
