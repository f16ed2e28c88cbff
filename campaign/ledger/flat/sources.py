"""The cells of a file: CSV text or an XLSX sheet, with limits against hostile files."""

from __future__ import annotations

import csv
import hashlib
import io
import zipfile
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from campaign.errors import Refused, refused

LARGEST = 1 << 28  # bytes of a file
LONGEST_LINE = 1 << 20  # bytes of a line
MOST_ROWS = 2_000_000
LARGEST_SHEET = 1 << 30  # bytes of an XLSX once unpacked
MOST_SHRUNK = 200  # times an XLSX may grow when unpacked


@dataclass(frozen=True)
class Source:
    """A file's digest and its rows: (line, cells), the first being the header."""

    file: str
    sha256: str
    rows: Iterator[tuple[int, list[Any]]]


def open_source(path: Path, sheet: str | None) -> Source:
    """Return the rows of a CSV or XLSX file; raises Refused where it is neither."""
    try:
        size = path.stat().st_size
        if size > LARGEST:
            raise refused(
                f"the file has {size / 1e6:.0f} MB, more than the {LARGEST / 1e6:.0f} MB that are "
                "read; split it",
                file=str(path),
                expected="a smaller file",
            )
        content = path.read_bytes()
    except OSError as error:
        raise refused(
            f"the file cannot be read: {error.strerror or error}",
            file=str(path),
            expected="a readable file",
        ) from None
    name = path.name
    digest = hashlib.sha256(content).hexdigest()
    if content.startswith(b"PK\x03\x04"):
        return Source(name, digest, _sheet_rows(name, content, sheet))
    if sheet is not None:
        raise refused(
            f"a sheet is named but {name} is not an XLSX file", file=name, expected="an XLSX file"
        )
    return Source(name, digest, _text_rows(name, _text(name, content)))


def _text(name: str, content: bytes) -> str:
    if not content.strip():
        raise refused("the file is empty", file=name, expected="a header and rows")
    encoding = "utf-8-sig"
    if content.startswith((b"\xff\xfe", b"\xfe\xff")):
        encoding = "utf-16"
    try:
        text = content.decode(encoding)
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        raise refused(
            f"the file is not UTF-8: byte {content[error.start]:#04x} in line {line}; save it as "
            "UTF-8 (in a spreadsheet: CSV UTF-8)",
            file=name,
            line=line,
            value=f"{content[error.start]:#04x}",
            expected="UTF-8 text",
        ) from None
    if "\x00" in text:
        line = text.count("\n", 0, text.index("\x00")) + 1
        raise refused(
            f"the file holds a NUL character in line {line}; it is not a text table",
            file=name,
            line=line,
            expected="UTF-8 text",
        )
    return text


def _refuse_long_lines(name: str, text: str) -> None:
    for number, line in enumerate(io.StringIO(text), 1):
        if len(line) > LONGEST_LINE:
            raise refused(
                f"it has {len(line)} characters, which no table needs",
                file=name,
                line=number,
                expected=f"lines of at most {LONGEST_LINE} characters",
            )


def _delimiter(name: str, header: str) -> str:
    """Return the delimiter of a header line: the one that splits it into most columns."""
    counts = {mark: len(next(csv.reader([header], delimiter=mark), [])) for mark in ",;\t"}
    best = max(counts, key=lambda mark: counts[mark])
    if counts[best] < 2:
        raise refused(
            f"the header '{header.strip()[:60]}' has one column only; separate columns with "
            "comma, semicolon or tab",
            file=name,
            line=1,
            value=header.strip()[:60],
            expected="a header line with several columns",
        )
    return best


def _text_rows(name: str, text: str) -> Iterator[tuple[int, list[Any]]]:
    _refuse_long_lines(name, text)
    csv.field_size_limit(LONGEST_LINE)
    lines = io.StringIO(text, newline="")
    skipped = 0
    header = lines.readline()
    while header and (not header.strip(" ,;\t\r\n") or header.startswith("#")):
        skipped += 1
        header = lines.readline()
    if not header:
        raise refused("the file has no header line", file=name, expected="a header line")
    try:
        delimiter = _delimiter(name, header)
    except csv.Error as error:
        raise _csv_fault(name, skipped + 1, error) from None
    rest = io.StringIO(header + lines.read(), newline="")
    reader = csv.reader(rest, delimiter=delimiter, strict=True)
    line = skipped + 1
    try:
        for count, cells in enumerate(reader):
            if count > MOST_ROWS:
                raise refused(
                    f"the file has more than {MOST_ROWS} rows; split it", file=name, line=line,
                    expected="fewer rows",
                )  # fmt: skip
            if any(cell.strip() for cell in cells):
                yield line, cells
            line = skipped + reader.line_num + 1
    except csv.Error as error:
        raise _csv_fault(name, skipped + reader.line_num, error) from None


def _csv_fault(name: str, line: int, error: csv.Error) -> Refused:
    return refused(
        f"it is not a table row: {error}; check its quotation marks",
        file=name,
        line=line,
        expected="cells separated by one delimiter",
    )


def _sheet_rows(name: str, content: bytes, sheet: str | None) -> Iterator[tuple[int, list[Any]]]:
    _refuse_bomb(name, content)
    import openpyxl

    try:
        book = openpyxl.load_workbook(io.BytesIO(content), read_only=True, data_only=True)
    except Exception as error:  # openpyxl raises whatever its parsers raise
        raise _not_a_sheet(name, error) from None
    if sheet is not None and sheet not in book.sheetnames:
        raise refused(
            f"there is no sheet '{sheet}' in {name}; it has {', '.join(book.sheetnames[:8])}",
            file=name,
            value=sheet,
            expected="one of its sheets",
        )
    if sheet is None and len(book.sheetnames) > 1:
        raise refused(
            f"{name} has several sheets ({', '.join(book.sheetnames[:8])}); name one with --sheet "
            "or in a mapping file",
            file=name,
            expected="the name of a sheet",
        )
    chosen = book[sheet] if sheet is not None else book.worksheets[0]
    try:
        for line, cells in enumerate(chosen.iter_rows(values_only=True), 1):
            if line > MOST_ROWS:
                raise refused(f"the sheet has more than {MOST_ROWS} rows", file=name)
            if any(cell is not None and str(cell).strip() for cell in cells):
                yield line, list(cells)
    except Refused:
        raise
    except Exception as error:
        raise _not_a_sheet(name, error) from None


def _refuse_bomb(name: str, content: bytes) -> None:
    try:
        with zipfile.ZipFile(io.BytesIO(content)) as archive:
            unpacked = sum(item.file_size for item in archive.infolist())
    except (zipfile.BadZipFile, ValueError, OSError) as error:
        raise _not_a_sheet(name, error) from None
    if unpacked > LARGEST_SHEET or unpacked > MOST_SHRUNK * max(len(content), 10_000):
        raise refused(
            f"{name} would unpack to {unpacked / 1e6:.0f} MB, which no table needs",
            file=name,
            expected="an XLSX file of ordinary size",
        )


def _not_a_sheet(name: str, error: Exception) -> Refused:
    return refused(
        f"{name} looks like an XLSX file but cannot be read ({type(error).__name__}); save it "
        "again or export it as CSV",
        file=name,
        expected="an XLSX or CSV file",
    )
