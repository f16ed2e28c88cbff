"""The rows of an XLSX sheet: stored results of formulas, dates as dates, limits on size."""

from __future__ import annotations

import io
import warnings
import zipfile
from collections.abc import Iterator, Sequence
from typing import Any

from campaign.errors import Refused, refused
from campaign.ledger.flat.headers import shown
from campaign.ledger.flat.values import Uncalculated

LARGEST = 1 << 29  # bytes of an XLSX once unpacked
MOST_SHRUNK = 200  # times an XLSX may grow when unpacked
SMALL = 1 << 22  # bytes unpacked that are read whatever their packing
MOST_ROWS = 1 << 20  # what the format itself allows
MOST_COLUMNS = 500
MOST_PARTS = 10_000

Row = tuple[int, Any, list[Any]]


def sheet_rows(name: str, content: bytes, sheet: str | None) -> Iterator[Row]:
    """Yield (line, cells, cells) of a sheet, the header first; blank rows are passed over.

    Raises Refused for a file that is no XLSX or would unpack to an unreasonable size, and
    where the sheet is not there or not the only one.
    """
    _refuse_bomb(name, content)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # of features beside the cells
            yield from _rows(name, content, sheet)
    except Refused:
        raise
    except Exception as error:  # openpyxl raises whatever its parsers raise
        raise _not_a_sheet(name, error) from None


def _rows(name: str, content: bytes, sheet: str | None) -> Iterator[Row]:
    lines = (
        _calculated(name, content, sheet)
        if _has_formulas(content)
        else map(list, _sheet(name, content, sheet).iter_rows(values_only=True))
    )
    for line, cells in enumerate(lines, 1):
        while cells and cells[-1] is None:
            cells.pop()
        if line > MOST_ROWS or len(cells) > MOST_COLUMNS:
            most = f"{MOST_ROWS} rows" if line > MOST_ROWS else f"{MOST_COLUMNS} columns"
            raise refused(
                f"the sheet has more than {most}; split it", file=name, line=line,
                expected=f"at most {most}",
            )  # fmt: skip
        if any(cell is not None and str(cell).strip() for cell in cells):
            yield line, cells, cells


def _sheet(name: str, content: bytes, sheet: str | None, *, results: bool = True) -> Any:
    import openpyxl

    book = openpyxl.load_workbook(io.BytesIO(content), read_only=True, data_only=results)
    chosen = book[_sheet_name(name, book.sheetnames, sheet)]
    chosen.reset_dimensions()  # what a file says of its size is not relied on
    return chosen


def _listed(names: Sequence[str]) -> str:
    return shown(", ".join(names[:8]), 300)


def _calculated(name: str, content: bytes, sheet: str | None) -> Iterator[list[Any]]:
    """Yield rows of stored results, with a mark where a formula has none.

    A formula whose result is an empty text has the type of a text and counts as empty.
    """
    results = _sheet(name, content, sheet).iter_rows()
    formulas = _sheet(name, content, sheet, results=False).iter_rows()
    for found, stated in zip(results, formulas, strict=True):
        yield [
            Uncalculated(str(formula.value))
            if cell.value is None and formula.value is not None and cell.data_type != "str"
            else cell.value
            for cell, formula in zip(found, stated, strict=True)
        ]


def _sheet_name(name: str, names: Sequence[str], sheet: str | None) -> str:
    if sheet is not None and sheet not in names:
        raise refused(
            f"there is no sheet '{shown(sheet, 60)}' in {name}; it has {_listed(names)}",
            file=name,
            value=shown(sheet, 60),
            expected="one of its sheets",
        )
    if sheet is None and len(names) > 1:
        raise refused(
            f"{name} has several sheets ({_listed(names)}); name one with --sheet or in a "
            "mapping file",
            file=name,
            expected="the name of a sheet",
        )
    return sheet if sheet is not None else names[0]


def _has_formulas(content: bytes) -> bool:
    """Return whether any sheet of the file may hold a formula."""
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        for part in archive.namelist():
            if part.startswith("xl/worksheets/") and part.endswith(".xml"):
                with archive.open(part) as stream:
                    if _mentions(stream, (b"<f>", b"<f ")):
                        return True
    return False


def _mentions(stream: Any, marks: Sequence[bytes]) -> bool:
    tail = b""
    while piece := stream.read(1 << 20):
        if any(mark in tail + piece for mark in marks):
            return True
        tail = piece[-8:]
    return False


def _refuse_bomb(name: str, content: bytes) -> None:
    try:
        with zipfile.ZipFile(io.BytesIO(content)) as archive:
            parts = archive.infolist()
    except (zipfile.BadZipFile, ValueError, OSError, NotImplementedError) as error:
        raise _not_a_sheet(name, error) from None
    unpacked = sum(part.file_size for part in parts)
    grown = unpacked > SMALL and unpacked > MOST_SHRUNK * len(content)
    if unpacked > LARGEST or grown or len(parts) > MOST_PARTS:
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
