"""Writing a flat table that reads back as the same measurements."""

from __future__ import annotations

import csv
import re
from collections.abc import Iterable, Mapping
from typing import IO, Any

from campaign.ledger.flat.canonical import CANONICAL, COLUMNS
from campaign.ledger.flat.columns import NUMBERS

# A spreadsheet runs a text that begins like this as a formula. Such a text is written with an
# apostrophe before it, which reading takes off again; so is one that begins with apostrophes and
# then so, which keeps the two apart.
_FORMULA = re.compile(r"'*[=+\-@]")


def write_rows(rows: Iterable[Mapping[str, Any]], stream: IO[str]) -> None:
    """Write rows (canonical header -> value, None for empty) as a comma-separated flat table.

    Numbers are written so that they read back as the same; fitted values as numbers, or
    'absent', with their standard errors under `_se`.
    """
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(CANONICAL)
    for row in rows:
        writer.writerow([_cell(name, row.get(name)) for name in CANONICAL])


def guarded(text: str) -> str:
    """Return a text that no spreadsheet runs as a formula."""
    return "'" + text if _FORMULA.match(text) else text


def _cell(name: str, value: Any) -> str:
    if value is None:
        return ""
    if isinstance(value, float):
        return repr(value)
    kind = COLUMNS[name][0]
    return str(value) if kind in NUMBERS or kind == "instant" else guarded(str(value))
