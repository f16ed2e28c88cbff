"""Writing a flat table that reads back as the same measurements."""

from __future__ import annotations

import csv
from collections.abc import Iterable, Mapping
from typing import IO, Any

from campaign.ledger.flat.headers import CANONICAL, COLUMNS

# A spreadsheet runs a text that begins like this as a formula. Such a text is written with a
# leading apostrophe, which reading takes off again.
_FORMULA = ("=", "+", "-", "@")


def write_rows(rows: Iterable[Mapping[str, Any]], stream: IO[str]) -> None:
    """Write rows (canonical header -> value, None for empty) as a comma-separated flat table."""
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(CANONICAL)
    for row in rows:
        writer.writerow([_cell(name, row.get(name)) for name in CANONICAL])


def _cell(name: str, value: Any) -> str:
    if value is None:
        return ""
    if isinstance(value, float):
        return repr(value)
    text = str(value)
    if COLUMNS[name][0] == "text" and text.startswith(_FORMULA):
        return "'" + text
    return text
