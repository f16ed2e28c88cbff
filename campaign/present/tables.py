"""Tables for people: framed at a terminal, plain columns when piped, CSV or JSON on request."""

from __future__ import annotations

import csv
import io
import json
import math
import os
import shutil
import sys
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from campaign.present.numbers import number
from campaign.present.terminal import coloured, harmless

WIDEST = 100
GAP = 2
"""Spaces between the columns of a framed table."""

NARROWEST = 8
"""Width below which a column is not narrowed."""


@dataclass(frozen=True)
class Column:
    """A column of a table: the key of its value, its heading, how it is shown."""

    key: str
    heading: str
    show: Callable[[Any], str] = number
    right: bool = False


def at_terminal() -> bool:
    """Return whether standard output is a terminal that a person reads."""
    return sys.stdout.isatty() and os.environ.get("TERM") != "dumb"


def show_table(
    rows: Sequence[Mapping[str, Any]], columns: Sequence[Column], title: str = ""
) -> None:
    """Print rows as a table; columns that are empty throughout are left out."""
    kept = [c for c in columns if any(c.show(row.get(c.key)) for row in rows)]
    cells = [[harmless(c.show(row.get(c.key))) for c in kept] for row in rows]
    if at_terminal():
        _framed(cells, kept, title)
    else:
        sys.stdout.write(plain(cells, kept, title))


def fits(rows: Sequence[Mapping[str, Any]], columns: Sequence[Column]) -> bool:
    """Return whether a table fits the terminal without a number being cut off."""
    kept = [c for c in columns if any(c.show(row.get(c.key)) for row in rows)]
    cells = [[harmless(c.show(row.get(c.key))) for c in kept] for row in rows]
    gaps = GAP * (len(kept) - 1)
    width = min(shutil.get_terminal_size((WIDEST, 40)).columns, 160)
    return sum(_widths(cells, kept, width - gaps)) + gaps <= width


def plain(cells: Sequence[Sequence[str]], columns: Sequence[Column], title: str = "") -> str:
    """Return aligned columns without frame or colour, two spaces apart."""
    headings = [column.heading for column in columns]
    widths = [
        max([len(headings[i]), *(len(row[i]) for row in cells)]) for i in range(len(columns))
    ]
    lines = [title] if title else []
    for line in [headings, *cells]:
        padded = [
            text.rjust(width) if column.right else text.ljust(width)
            for text, width, column in zip(line, widths, columns, strict=True)
        ]
        lines.append("  ".join(padded).rstrip())
    return "\n".join(lines) + "\n"


def _framed(cells: Sequence[Sequence[str]], columns: Sequence[Column], title: str) -> None:
    width = min(shutil.get_terminal_size((WIDEST, 40)).columns, 160)
    widths = _widths(cells, columns, width - GAP * (len(columns) - 1))
    if sum(widths) + GAP * (len(columns) - 1) > width:
        # Too narrow: a frame would cut numbers off; plain lines only run on.
        sys.stdout.write(plain(cells, columns, title))
        return
    from rich import box
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    table = Table(
        title=Text(harmless(title)) if title else None,
        title_justify="left",
        box=box.HORIZONTALS,
        pad_edge=False,
        padding=(0, 1, 0, 0),
        show_edge=False,
        header_style="" if os.environ.get("NO_COLOR") else "bold",
    )
    for column, wide in zip(columns, widths, strict=True):
        table.add_column(
            Text(column.heading),
            justify="right" if column.right else "left",
            no_wrap=column.right,
            overflow="fold",
            width=wide,
        )
    for row in cells:
        table.add_row(*(Text(text) for text in row))
    Console(file=coloured(), width=width, highlight=False).print(table)


def _widths(
    cells: Sequence[Sequence[str]], columns: Sequence[Column], available: int
) -> list[int]:
    """Return the width of each column: as wide as its texts, narrowed where all do not fit.

    The widest column gives way first, none below its longest word; then words are torn.
    """
    texts = [[c.heading, *(row[i] for row in cells)] for i, c in enumerate(columns)]
    widths = [max(len(text) for text in column) for column in texts]
    words = [max((len(w) for text in column for w in text.split()), default=1) for column in texts]
    for floors in (words, [min(word, NARROWEST) for word in words]):
        least = [
            width if column.right else floor
            for width, column, floor in zip(widths, columns, floors, strict=True)
        ]
        while sum(widths) > available:
            loose = [i for i in range(len(widths)) if widths[i] > least[i]]
            if not loose:
                break
            widths[max(loose, key=lambda i: widths[i])] -= 1
    return widths


def clean(value: Any) -> Any:
    """Return plain JSON data: no NaN, no infinity, no NumPy types."""
    if isinstance(value, Mapping):
        return {str(key): clean(item) for key, item in value.items()}
    if isinstance(value, (list, tuple, set, frozenset)):
        return [clean(item) for item in value]
    if hasattr(value, "tolist"):
        return clean(value.tolist())
    if isinstance(value, float) and not math.isfinite(value):
        return None
    if isinstance(value, str) and not value.isascii():
        return printable(value)
    return value


def printable(text: str) -> str:
    """Return text without what UTF-8 cannot hold (parts of a surrogate pair)."""
    return text.encode(errors="backslashreplace").decode()


def show_json(content: object) -> None:
    """Print content as JSON on standard output."""
    sys.stdout.write(json.dumps(clean(content), ensure_ascii=False, indent=1) + "\n")


# A spreadsheet would run a text that begins like this as a formula.
_FORMULA = ("=", "+", "-", "@", "\t", "\r")


def csv_text(rows: Sequence[Mapping[str, Any]]) -> str:
    """Return rows as CSV with a header; text that a spreadsheet would run is quoted with '."""
    names = list(dict.fromkeys(key for row in rows for key in row))
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    if names:
        writer.writerow(names)
    for row in rows:
        writer.writerow([_csv_cell(row.get(name)) for name in names])
    return stream.getvalue()


def _csv_cell(value: Any) -> Any:
    value = clean(value)
    if value is None:
        return ""
    if isinstance(value, (dict, list)):
        return json.dumps(value, ensure_ascii=False)
    if isinstance(value, str) and value.startswith(_FORMULA):
        return "'" + value
    return value


def show_csv(rows: Sequence[Mapping[str, Any]]) -> None:
    """Print rows as CSV on standard output."""
    sys.stdout.write(csv_text(rows))
