"""A small campaign on disk, and ways to write to it, to look at it and to break it."""

import csv
import io
import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from campaign.errors import Refused
from campaign.ledger.amending import amend
from campaign.ledger.checking import check
from campaign.ledger.database import Database, open_database
from campaign.ledger.files import read_files
from campaign.ledger.filters import Filter
from campaign.ledger.history import head, history
from campaign.ledger.importing import Choices, Outcome, import_tables, log_row
from campaign.ledger.logging import read_row
from campaign.ledger.selecting import list_cells, list_fits, list_measurements
from campaign.ledger.starting import start
from campaign.ledger.withdrawing import withdraw, withdraw_import

CELL = {
    "electrode": "E", "ion": "Na", "cell": "A", "area_cm2": 1.13, "reference": "Na/Na+",
    "electrolyte": "1 M NaPF6 in PC",
}  # fmt: skip
VALUES = {"potential_V": 3.4, "temperature_C": 25, "R_el": 4.1, "R_ct": 41.2, "R_ct_se": 0.8}


def row(day: int = 1, **changes: object) -> dict[str, object]:
    """A row of the flat table: cell A on a day of March, with changes."""
    instant = {"measured_at": f"2026-03-{day:02d}T10:00+01:00"}
    return {k: v for k, v in {**CELL, **instant, **VALUES, **changes}.items() if v is not None}


@dataclass
class Bench:
    """A campaign's database and the few things a person does with it."""

    store: Any
    folder: Path

    @property
    def where(self) -> str:
        return self.store.where

    @property
    def path(self) -> Path:
        assert self.store.kind == "sqlite"
        return Path(self.where)

    @property
    def database(self) -> Database:
        return open_database(self.where)

    def write(self, rows, name="table.csv") -> str:
        stream = io.StringIO()
        names = list(dict.fromkeys(key for item in rows for key in item))
        writer = csv.DictWriter(stream, names)
        writer.writeheader()
        writer.writerows(rows)
        (self.folder / name).write_text(stream.getvalue(), encoding="utf-8")
        return str(self.folder / name)

    def enter(self, *rows, name="table.csv", **choices) -> Outcome:
        return self.enter_files(self.write(rows, name), **choices)

    def enter_files(self, *names, **choices) -> Outcome:
        return import_tables(
            self.database, read_files(self.database, names), Choices(**choices), who="tester"
        )

    def faults(self, *rows, **choices):
        """Import rows that must be refused; nothing may be written. Return the faults."""
        before = self.digest()
        with pytest.raises(Refused) as caught:
            self.enter(*rows, **choices)
        assert self.digest() == before
        return caught.value.faults

    def log(self, given, **choices) -> Outcome:
        text = io.BytesIO(json.dumps(given).encode())
        read = read_row(self.database, "-", {}, text)
        return log_row(self.database, read, Choices(**choices), "tester")

    def amend(self, kind, name, reason="a slip", **changes):
        return amend(self.database, kind, str(name), changes, reason, "tester")

    def withdraw(self, kind, name, reason="a slip"):
        return withdraw(self.database, kind, str(name), reason, "tester")

    def withdraw_import(self, number):
        return withdraw_import(self.database, number, "a slip", "tester")

    def measurements(self, as_of=None):
        with self.database.reading() as connection:
            return list_measurements(connection, Filter(as_of=as_of))

    def fits(self):
        with self.database.reading() as connection:
            return list_fits(connection, Filter())

    def cells(self, as_of=None):
        with self.database.reading() as connection:
            return list_cells(connection, Filter(as_of=as_of))

    def values(self, quantity="R_ct", as_of=None):
        return [item.get(quantity) for item in self.measurements(as_of)]

    def history(self, kind=None, record=None):
        with self.database.reading() as connection:
            return history(connection, kind, record)

    def head(self):
        with self.database.reading() as connection:
            return head(connection)

    def problems(self, head=None):
        with self.database.reading() as connection:
            return [p for p in check(connection, head, self.folder) if p.grave]

    def remarks(self):
        with self.database.reading() as connection:
            return [p for p in check(connection, None, self.folder) if not p.grave]

    def ask(self, statement):
        return self.store.ask(statement)

    def digest(self) -> str:
        return self.store.digest()

    def tamper(self, *statements) -> None:
        self.store.tamper(*statements)


@pytest.fixture
def bench(empty_store, tmp_path, monkeypatch):
    """A new campaign in each kind of store; relative paths start in its folder."""
    monkeypatch.chdir(tmp_path)
    start(empty_store.where, "UTC", "tester")
    return Bench(empty_store, tmp_path)


@pytest.fixture
def bench_file(tmp_path, store_of):
    """A new campaign in a SQLite file."""
    start(str(tmp_path / "campaign.sqlite"), "UTC", "tester")
    return Bench(store_of(tmp_path / "campaign.sqlite"), tmp_path)


@pytest.fixture
def make_row():
    return row
