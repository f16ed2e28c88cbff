"""Databases that earlier programs left on people's disks: one of every revision, with data."""

import re
import shutil
import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from campaign.errors import Refused
from campaign.ledger import database as database_module
from campaign.ledger import migrating, upgrading
from campaign.ledger.checking import check
from campaign.ledger.copying import copy_campaign
from campaign.ledger.database import REVISION, Database, Place, open_database
from campaign.ledger.filters import Filter
from campaign.ledger.selecting import list_measurements

HERE = Path(__file__).resolve().parent
STORED = sorted((HERE.parent / "stored").glob("*.sql"))


@pytest.fixture(params=STORED, ids=[file.stem for file in STORED])
def old(request, tmp_path):
    """A stored database, written out again as the file it was."""
    path = tmp_path / "campaign.sqlite"
    with closing(sqlite3.connect(path)) as connection:
        connection.executescript(request.param.read_text(encoding="utf-8"))
        connection.execute("PRAGMA journal_mode = WAL")
    return path


def grave(path):
    with Database(Place(path=path)).reading() as connection:
        return [p for p in check(connection) if p.grave]


def test_there_is_one_of_every_revision():
    versions = (HERE.parents[1] / "migrations" / "versions").glob("*.py")
    numbers = {re.match(r"\d+", file.name)[0] for file in versions}
    assert {file.stem for file in STORED} == numbers


def test_it_is_upgraded_and_holds_what_it_held(old):
    made = upgrading.upgrade(str(old))
    assert made.after == REVISION
    assert (made.backup is not None) == (made.before != REVISION)
    assert grave(old) == []
    with open_database(str(old)).reading() as connection:
        now = list_measurements(connection, Filter())
        then = list_measurements(connection, Filter(as_of=2))
    assert [row["record"] for row in now] == [1, 3]
    assert [row["R_ct"] for row in now] == [41.0, 43.0]
    assert [row["R_ct"] for row in then] == [41.0, 42.0, 43.0, 42.0, 44.0, 46.0]
    assert then[0]["R_sl"] == "absent"


NEXT = '''
import sqlalchemy as sa
from alembic import op

revision = "9000"
down_revision = "{last}"


def upgrade():
    op.add_column("cell", sa.Column("separator", sa.Text))
    op.create_index("cell_by_separator", "cell", ["separator"])
    {then}
'''


@pytest.fixture
def ahead(tmp_path, monkeypatch):
    """A program one revision ahead of this one."""

    def make(then="pass"):
        folder = tmp_path / "migrations"
        shutil.copytree(migrating.migrations_folder(), folder)
        text = NEXT.format(last=REVISION, then=then)
        (folder / "versions" / "9000_next.py").write_text(text)
        monkeypatch.setattr(migrating, "migrations_folder", lambda: folder)
        monkeypatch.setattr(database_module, "REVISION", "9000")
        monkeypatch.setattr(upgrading, "REVISION", "9000")

    return make


def test_every_revision_reaches_a_later_one_with_a_backup_of_what_was(old, ahead):
    with closing(sqlite3.connect(old)) as connection:
        before = list(connection.iterdump())
    ahead()
    made = upgrading.upgrade(str(old))
    with closing(sqlite3.connect(made.backup)) as connection:
        assert list(connection.iterdump()) == before
    assert grave(old) == []


@pytest.mark.parametrize(
    "then",
    [
        "raise RuntimeError('disk on fire')",
        "op.execute('DROP TRIGGER cell_kept'); op.execute('UPDATE cell SET area_cm2 = 2')",
        "op.execute('DROP TABLE fitted_value')",
    ],
)
def test_a_failed_upgrade_leaves_every_byte_of_content(old, ahead, then):
    with closing(sqlite3.connect(old)) as connection:
        before = list(connection.iterdump())
    ahead(then)
    with pytest.raises(Refused, match=r"failed|taken back|refuses"):
        upgrading.upgrade(str(old))
    with closing(sqlite3.connect(old)) as connection:
        assert list(connection.iterdump()) == before


def test_it_is_copied_to_another_store_and_back(old, other_store, tmp_path):
    upgrading.upgrade(str(old))
    there = copy_campaign(open_database(str(old)), other_store.where)
    back = tmp_path / "back.sqlite"
    again = copy_campaign(open_database(other_store.where), str(back))
    assert (there.head, there.rows) == (again.head, again.rows)
    tables = "SELECT name FROM sqlite_master WHERE type = 'table' ORDER BY name"
    with closing(sqlite3.connect(old)) as left, closing(sqlite3.connect(back)) as right:
        names = [row[0] for row in left.execute(tables)]
        assert names == [row[0] for row in right.execute(tables)]
        for name in names:
            rows = [sorted(map(repr, c.execute(f"SELECT * FROM {name}"))) for c in (left, right)]
            assert rows[0] == rows[1], name
