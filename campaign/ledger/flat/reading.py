"""Reading a flat table: header, decimal mark, rows; every fault at once."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from campaign.errors import Fault, Refused
from campaign.ledger.flat.decimals import MarkFinder
from campaign.ledger.flat.headers import COLUMNS, Header, HeaderError, read_header
from campaign.ledger.flat.mapping import TableMapping
from campaign.ledger.flat.rows import NUMBERS, FlatRow, RowReader, settle_area
from campaign.ledger.flat.sources import open_source

__all__ = ["FlatRow", "FlatTable", "read_table", "row_from_mapping"]

MOST_FAULTS = 1000


@dataclass
class FlatTable:
    """A file as rows with typed values, the faults found in it, and what was assumed."""

    file: str
    sha256: str
    rows: list[FlatRow] = field(default_factory=list)
    faults: list[Fault] = field(default_factory=list)
    warnings: list[str] = field(default_factory=list)


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
    table = FlatTable(path.name, "0" * 64)
    try:
        source = open_source(path, sheet or mapping.sheet)
        table.sha256 = source.sha256
        rows = list(source.rows)
    except Refused as error:
        table.faults += error.faults
        return table
    if len(rows) < 2:
        table.faults.append(
            Fault("the file has a header and no rows", table.file, expected="a row a measurement")
        )
        return table
    (line, written), body = rows[0], rows[1:]
    headers = _headers(table, line, written, mapping)
    constants = _constants(table, mapping, headers)
    if table.faults:
        return table
    columns: list[Header | None] = [*headers, *(header for header, _ in constants)]
    values = [value for _, value in constants]
    mark = _mark(table, columns, body, decimal or mapping.decimal)
    reader = RowReader(table.file, columns, mark, zone)
    _read_body(table, reader, body, len(headers), values)
    _settle_areas(table)
    _note_assumptions(table)
    return table


def _headers(
    table: FlatTable, line: int, written: Sequence[Any], mapping: TableMapping
) -> list[Header | None]:
    found: list[Header | None] = []
    taken: dict[str, str] = {}
    for place, cell in enumerate(written, 1):
        text = "" if cell is None else str(cell).strip().lstrip("\ufeff")
        if not text or text in mapping.ignore:
            found.append(None)
            continue
        try:
            header = read_header(mapping.columns.get(text, text))
        except HeaderError as error:
            table.faults.append(
                Fault(str(error), table.file, line, text[:80], text[:80], error.expected)
            )
            found.append(None)
            continue
        if header.name in taken:
            table.faults.append(
                Fault(
                    f"the columns '{taken[header.name]}' and '{text}' both mean {header.name}; "
                    "keep one, or ignore one in a mapping file",
                    table.file, line, text, text, f"one column {header.name}",
                )
            )  # fmt: skip
        taken[header.name] = text
        found.append(header)
    for text in mapping.columns:
        if text not in {str(cell).strip() for cell in written if cell is not None}:
            table.faults.append(
                Fault(
                    f"the mapping file renames a column '{text}' that this file does not have",
                    table.file, line, text, text, "a column of the file",
                )
            )  # fmt: skip
    return found


def _constants(
    table: FlatTable, mapping: TableMapping, headers: Sequence[Header | None]
) -> list[tuple[Header, Any]]:
    present = {header.name for header in headers if header is not None}
    found = []
    for name, value in mapping.constants.items():
        header = read_header(name)
        if header.name in present:
            table.faults.append(
                Fault(
                    f"the mapping file gives {header.name} as a constant, and the file has a "
                    "column for it",
                    table.file, None, header.name, str(value), "one of the two",
                )
            )  # fmt: skip
        found.append((header, value))
    return found


def _mark(
    table: FlatTable,
    columns: Sequence[Header | None],
    body: Sequence[tuple[int, list[Any]]],
    stated: str | None,
) -> str:
    if stated is not None:
        return stated
    finder = MarkFinder(table.file)
    numeric = [
        (index, header)
        for index, header in enumerate(columns)
        if header is not None and COLUMNS[header.name][0] in NUMBERS
    ]
    for line, cells in body:
        for index, header in numeric:
            cell = cells[index] if index < len(cells) else None
            if type(cell) is str and ("." in cell or "," in cell):
                scale = header.scale
                finder.see(line, header.name, scale.factor, scale.offset, cell.strip())
    mark, faults = finder.decide()
    table.faults += faults
    return mark


def _read_body(
    table: FlatTable,
    reader: RowReader,
    body: Sequence[tuple[int, list[Any]]],
    width: int,
    constants: Sequence[Any],
) -> None:
    broken_marks = bool(table.faults)  # one fault about the mark says it all
    for line, cells in body:
        extra = [cell for cell in cells[width:] if cell is not None and str(cell).strip()]
        if extra or (len(cells) < width and len(cells) == 1):
            table.faults.append(
                Fault(
                    f"it has {len(cells)} cells and the header has {width}; check "
                    "delimiters and quotation marks",
                    table.file, line, None, str(cells[-1])[:80], f"{width} cells",
                )
            )  # fmt: skip
            continue
        padded = [*cells[:width], *([None] * (width - len(cells))), *constants]
        row, faults = reader.read(line, padded)
        table.rows.append(row)
        if not broken_marks:
            table.faults += faults
        if len(table.faults) > MOST_FAULTS:
            table.faults.append(
                Fault(
                    f"more than {MOST_FAULTS} faults; the rest of the file was not read",
                    table.file,
                    line,
                )
            )
            return


def _settle_areas(table: FlatTable) -> None:
    """Convert values per area where the file itself says the area of the cell."""
    areas: dict[str, float] = {}
    for row in table.rows:
        if "cell" in row.values and "area_cm2" in row.values:
            areas.setdefault(row.values["cell"], row.values["area_cm2"])
    for row in table.rows:
        if row.per_area and row.values.get("cell") in areas:
            settle_area(row, areas[row.values["cell"]])


def _note_assumptions(table: FlatTable) -> None:
    assumed = sum(
        1
        for row in table.rows
        if "measured_at" in row.values and row.values["measured_at"].zone_assumed
    )
    if assumed:
        table.warnings.append(
            f"{table.file}: {assumed} times without offset were read in the campaign's zone"
        )
    kelvin = [row.values["temperature_K"] for row in table.rows if "temperature_K" in row.values]
    if kelvin and min(kelvin) > 273.15 + 200:
        table.warnings.append(
            f"{table.file}: every temperature is above 200 degC; if they are in kelvin, write T/K"
        )


def row_from_mapping(
    stated: Mapping[str, object], zone: str, *, line: int = 1, file: str = "standard input"
) -> tuple[FlatRow, list[Fault]]:
    """Return the row a mapping of headers to values states, and every fault in it.

    Values may be JSON numbers, texts or None; the decimal mark is a point.
    """
    faults: list[Fault] = []
    headers: list[Header | None] = []
    cells: list[Any] = []
    names: set[str] = set()
    for key, value in stated.items():
        try:
            header = read_header(str(key))
        except HeaderError as error:
            faults.append(Fault(str(error), file, line, str(key)[:80], None, error.expected))
            continue
        if header.name in names:
            faults.append(
                Fault(f"{header.name} is stated twice", file, line, str(key), None, "once")
            )
        if isinstance(value, (bool, dict, list)):
            faults.append(
                Fault(
                    f"{key} is a JSON {type(value).__name__}", file, line, str(key),
                    str(value)[:80], "a number or a text",
                )
            )  # fmt: skip
            continue
        names.add(header.name)
        headers.append(header)
        cells.append(value)
    row, more = RowReader(file, headers, ".", zone).read(line, cells)
    if row.per_area and "area_cm2" in row.values:
        settle_area(row, row.values["area_cm2"])
    return row, [*faults, *more]
