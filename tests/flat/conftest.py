"""Small flat tables, read from text or bytes."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from campaign.ledger.flat.reading import FlatTable, read_table

BASE = {
    "cell": "A1",
    "measured_at": "2026-03-14T09:30+01:00",
    "potential_V": "3.41",
    "temperature_C": "25.0",
    "R_ct": "41.2",
}

Reader = Callable[..., FlatTable]


@pytest.fixture
def read(tmp_path: Path) -> Reader:
    """Read a text or bytes as a flat table in a zone."""

    def reader(content: str | bytes, *, name: str = "t.csv", **choices: Any) -> FlatTable:
        path = tmp_path / name
        path.write_bytes(content if isinstance(content, bytes) else content.encode())
        return read_table(path, zone=choices.pop("zone", "Europe/Paris"), **choices)

    return reader


@pytest.fixture
def one(read: Reader) -> Callable[..., FlatTable]:
    """Read a table of one row: the base row with other or more columns (None takes one out)."""

    def reader(columns: dict[str, str | None], **choices: Any) -> FlatTable:
        cells = {k: v for k, v in {**BASE, **columns}.items() if v is not None}
        header = "\t".join(cells)
        return read(f"{header}\n" + "\t".join(cells.values()) + "\n", **choices)

    return reader
