"""The rows of a file, CSV text or an XLSX sheet, with limits against hostile files.

Text is UTF-8, or UTF-16 with its byte-order mark; anything else is refused and named, since a
micro sign read with the wrong table would be another unit.
"""

from __future__ import annotations

import csv
import hashlib
import io
import re
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from campaign.errors import Refused, refused
from campaign.ledger.flat.headers import shown

LARGEST = 1 << 28  # bytes of a file
LONGEST_LINE = 1 << 20  # characters of a line
MOST_ROWS = 2_000_000
MOST_COLUMNS = 500

Row = tuple[int, Any, list[Any]]  # line, row as written, its cells


@dataclass(frozen=True)
class Source:
    """A file's digest and its rows: (line, as written, cells), the first being the header.

    typed: cells are a spreadsheet's numbers, dates and texts, and rows may be shorter than
    the header.
    """

    file: str
    sha256: str
    rows: Iterator[Row]
    delimiter: str = ","
    typed: bool = False


def open_source(path: Path, sheet: str | None) -> Source:
    """Return the rows of a CSV or XLSX file; raises Refused where it is neither.

    Faults further down in the file are raised, as Refused, by the iterator of its rows.
    """
    name = shown(path.name, 255)
    content = _content(path)
    digest = hashlib.sha256(content).hexdigest()
    if content.startswith(b"PK\x03\x04"):
        from campaign.ledger.flat.workbooks import sheet_rows

        return Source(name, digest, sheet_rows(name, content, sheet), typed=True)
    if content.startswith(b"\xd0\xcf\x11\xe0"):
        raise refused(
            f"{name} is an old or a protected workbook; save it as XLSX without password, or as "
            "CSV UTF-8",
            file=name,
            expected="an XLSX or CSV file",
        )
    if sheet is not None:
        raise refused(
            f"a sheet is named but {name} is not an XLSX file", file=name, expected="an XLSX file"
        )
    text = _Text(name, content)
    delimiter = text.find_delimiter()
    return Source(name, digest, text.rows(delimiter), delimiter)


def _content(path: Path) -> bytes:
    try:
        with path.open("rb") as stream:
            content = stream.read(LARGEST + 1)
    except OSError as error:
        raise refused(
            f"the file cannot be read: {error.strerror or error}",
            file=shown(path, 500),
            expected="a readable file",
        ) from None
    if len(content) > LARGEST:
        raise refused(
            f"the file is larger than the {LARGEST >> 20} MB that are read; split it",
            file=shown(path, 500),
            expected="a smaller file",
        )
    if not content.strip():
        raise refused("the file is empty", file=shown(path.name, 255), expected="a header and rows")
    return content


_BLANK = " ,;\t\r\n"
_SEPARATOR_LINE = re.compile(r'"?sep=([,;\t])"?\s*')  # common practice of spreadsheets


class _Text:
    """A text file, read line by line; the lines of the row being read are held."""

    def __init__(self, name: str, content: bytes) -> None:
        self.name = name
        self._bytes = content
        wide = content.startswith((b"\xff\xfe", b"\xfe\xff"))
        self._encoding = "utf-16" if wide else "utf-8-sig"
        self._stream = io.TextIOWrapper(io.BytesIO(content), self._encoding, newline="")
        self._number = 0
        self._held: list[str] = []

    def __iter__(self) -> Iterator[str]:
        return self

    def __next__(self) -> str:
        try:
            line = self._stream.readline(LONGEST_LINE + 1)
        except UnicodeDecodeError:
            raise self._not_text() from None
        if not line:
            raise StopIteration
        self._number += 1
        if len(line) > LONGEST_LINE:
            raise refused(
                f"the line has more than {LONGEST_LINE} characters, which no table needs",
                file=self.name,
                line=self._number,
                expected=f"lines of at most {LONGEST_LINE} characters",
            )
        if "\x00" in line:
            raise refused(
                "the file holds a NUL character; it is not a text table",
                file=self.name,
                line=self._number,
                expected="UTF-8 text",
            )
        self._held.append(line)
        return line

    def _not_text(self) -> Refused:
        """Return the refusal of bytes that are no text, with the line of the first of them."""
        line, found = self._number + 1, None
        try:
            self._bytes.decode(self._encoding)
        except UnicodeDecodeError as error:
            before = self._bytes[: error.start].decode(self._encoding, "replace")
            line, found = before.count("\n") + 1, f"{self._bytes[error.start]:#04x}"
        encoding = self._encoding.upper().removesuffix("-SIG")
        return refused(
            f"the file is not {encoding} text: byte {found}; save it as UTF-8 (in a spreadsheet: "
            "CSV UTF-8)",
            file=self.name,
            line=line,
            value=found,
            expected="UTF-8 text",
        )

    def find_delimiter(self) -> str:
        """Skip what stands before the header and return the delimiter; the header is held."""
        for line in self:
            stated = _SEPARATOR_LINE.fullmatch(line)
            if stated is not None:
                self._held.clear()
                return stated[1]
            if line.strip(_BLANK) and not line.lstrip('"').startswith("#"):
                return self._delimiter(line)
            self._held.clear()
        raise refused("the file has no header line", file=self.name, expected="a header line")

    def _delimiter(self, header: str) -> str:
        """Return the delimiter that splits a header line into most columns."""
        counts = {mark: header.count(mark) for mark in ",;\t"}
        if '"' in header:
            try:
                counts = {
                    mark: len(next(csv.reader([header], delimiter=mark), [])) - 1 for mark in counts
                }
            except csv.Error as error:
                raise self._bad_row(self._number, error) from None
        best = max(counts, key=lambda mark: counts[mark])
        if counts[best] < 1:
            raise refused(
                f"the header '{shown(header, 60)}' has one column only; separate columns with "
                "comma, semicolon or tab",
                file=self.name,
                line=self._number,
                value=shown(header, 60),
                expected="a header line with several columns",
            )
        return best

    def rows(self, delimiter: str) -> Iterator[Row]:
        """Yield the rows, the header first; blank ones are passed over."""
        csv.field_size_limit(LONGEST_LINE)
        line = self._number if self._held else self._number + 1
        lines = _Again(self._held.copy(), self)
        reader = csv.reader(lines, delimiter=delimiter, strict=True)
        count = 0
        try:
            for cells in reader:
                held = self._held
                written = held[0] if len(held) == 1 else "".join(held)
                held.clear()
                if written.strip(_BLANK):
                    count += 1
                    self._refuse_many(count, len(cells), line)
                    yield line, written, cells
                line = self._number + 1
        except csv.Error as error:
            raise self._bad_row(self._number, error) from None

    def _refuse_many(self, rows: int, columns: int, line: int) -> None:
        if rows > MOST_ROWS or columns > MOST_COLUMNS:
            what = f"{MOST_ROWS} rows" if rows > MOST_ROWS else f"{MOST_COLUMNS} columns"
            raise refused(
                f"the file has more than {what}; split it", file=self.name, line=line,
                expected=f"at most {what}",
            )  # fmt: skip

    def _bad_row(self, line: int, error: csv.Error) -> Refused:
        return refused(
            f"it is not a table row: {error}; check its quotation marks",
            file=self.name,
            line=line,
            expected="cells separated by one delimiter",
        )


class _Again:
    """Lines already taken from a text, then the rest of it."""

    def __init__(self, first: list[str], rest: _Text) -> None:
        self._first = first
        self._rest = rest

    def __iter__(self) -> Iterator[str]:
        return self

    def __next__(self) -> str:
        if self._first:
            return self._first.pop(0)
        return next(self._rest)
