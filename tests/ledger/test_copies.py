"""Backups, copies and upgrades: equal to the original, or nothing at all."""

import json
import shutil
import sqlite3

import pytest

from campaign.errors import Refused
from campaign.ledger import database as database_module
from campaign.ledger import migrating, upgrading
from campaign.ledger.backing import backup
from campaign.ledger.checking import check
from campaign.ledger.copying import copy_campaign
from campaign.ledger.database import open_database
from campaign.ledger.files import read_files
from campaign.ledger.importing import Choices, import_tables
from campaign.ledger.starting import start
from campaign.ledger.withdrawing import withdraw

HEADER = (
    "electrode,ion,cell,area_cm2,reference,electrolyte,measured_at,potential_V,temperature_C,"
    "R_sl,R_ct\n"
)
TABLE = HEADER + """film,Na,C1,1.1,Na/Na+,1 M NaPF6 in PC,2026-03-01T10:00Z,3.4,25,absent,41.2
film,Na,C1,1.1,Na/Na+,1 M NaPF6 in PC,2026-03-01T11:00Z,3.5,25,7.1,{R}
film,Na,C2,1.1,Na/Na+,1 M NaPF6 in EC:DMC (1:1 v/v),2026-03-02T10:00Z,3.4,25,6.9,55.1
"""


@pytest.fixture
def path(tmp_path):
    """A campaign with an import, a refit and a withdrawal."""
    file = tmp_path / "campaign.sqlite"
    start(str(file))
    database = open_database(str(file))
    for number, (value, refit) in enumerate((("38.0", False), ("37.5", True))):
        table = tmp_path / f"{number}.csv"
        table.write_text(TABLE.replace("{R}", value), encoding="utf-8")
        import_tables(database, read_files(database, [str(table)]), Choices(refit=refit))
    withdraw(database, "cell", "C2", "leaked")
    return file


def content(path):
    """Every row of every table but SQLite's own, as one comparable value."""
    with sqlite3.connect(path) as connection:
        names = [
            row[0]
            for row in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")
        ]
        return {
            name: sorted(map(repr, connection.execute(f'SELECT * FROM "{name}"'))) for name in names
        }


@pytest.mark.parametrize("how", ["backup", "copy"])
def test_a_copy_holds_the_same_rows_and_passes_its_own_check(path, tmp_path, how):
    target = tmp_path / "copy.sqlite"
    database = open_database(str(path))
    made = (
        backup(database, str(target)) if how == "backup" else copy_campaign(database, str(target))
    )
    assert content(target) == content(path)
    with open_database(str(target)).reading() as connection:
        assert check(connection) == []
    assert made.entries == 4
    assert made.head == json.loads(json.dumps(made.head))
    assert len(content(path)["fitted_value"]) + len(content(path)["measurement"]) < made.rows


def test_a_copy_keeps_the_rules(path, tmp_path):
    target = tmp_path / "copy.sqlite"
    copy_campaign(open_database(str(path)), str(target))
    with sqlite3.connect(target) as connection, pytest.raises(sqlite3.Error, match="never deleted"):
        connection.execute("DELETE FROM fitted_value")


@pytest.mark.parametrize("act", [backup, copy_campaign])
def test_nothing_is_written_over(path, tmp_path, act):
    target = tmp_path / "there"
    target.write_text("precious")
    with pytest.raises(Refused, match="left as it is"):
        act(open_database(str(path)), str(target))
    assert target.read_text() == "precious"


@pytest.mark.parametrize("act", [backup, copy_campaign])
def test_a_tampered_campaign_is_neither_backed_up_nor_copied(path, tmp_path, act):
    with sqlite3.connect(path) as connection:
        connection.execute("DROP TRIGGER fitted_value_kept")
        connection.execute("UPDATE fitted_value SET value = 40.0 WHERE value = 41.2")
    target = tmp_path / "copy.sqlite"
    with pytest.raises(Refused, match="check"):
        act(open_database(str(path)), str(target))
    assert not target.exists()


def test_a_backup_into_a_missing_folder_is_refused(path, tmp_path):
    with pytest.raises(Refused, match="does not exist"):
        backup(open_database(str(path)), str(tmp_path / "no" / "b.sqlite"))


NEXT = '''
import sqlalchemy as sa
from alembic import op

revision = "0002"
down_revision = "0001"


def upgrade():
    op.add_column("cell", sa.Column("separator", sa.Text))
    {then}
'''


@pytest.fixture
def newer(tmp_path, monkeypatch):
    """A program one revision ahead, whose migration may be told to fail."""

    def make(then="pass"):
        folder = tmp_path / "migrations"
        shutil.copytree(migrating.migrations_folder(), folder)
        (folder / "versions" / "0002_separator.py").write_text(NEXT.format(then=then))
        monkeypatch.setattr(migrating, "migrations_folder", lambda: folder)
        monkeypatch.setattr(database_module, "REVISION", "0002")
        monkeypatch.setattr(upgrading, "REVISION", "0002")

    return make


def test_an_older_campaign_says_how_to_upgrade(path, newer):
    newer()
    with pytest.raises(Refused, match="campaign upgrade"):
        open_database(str(path))


def test_an_upgrade_backs_up_migrates_and_is_journalled(path, newer):
    before = content(path)
    newer()
    made = upgrading.upgrade(str(path))
    assert (made.before, made.after) == ("0001", "0002")
    assert content(made.backup) == before
    with open_database(str(path)).reading() as connection:
        assert check(connection) == []
        rows = connection.exec_driver_sql("SELECT separator FROM cell").fetchall()
        last = connection.exec_driver_sql("SELECT action FROM journal ORDER BY id DESC").scalar()
    assert rows == [(None,)] * 2
    assert last == "upgrade"
    assert upgrading.upgrade(str(path)).backup is None


@pytest.mark.parametrize(
    "then",
    ["raise RuntimeError('disk on fire')", "op.execute('UPDATE cell SET area_cm2 = 2')"],
)
def test_a_failed_upgrade_changes_nothing(path, newer, then):
    before = content(path)
    newer(then)
    with pytest.raises(Refused, match=r"failed|taken back|refuses"):
        upgrading.upgrade(str(path))
    assert content(path) == before


def test_a_newer_campaign_asks_for_the_newer_program(path):
    with sqlite3.connect(path) as connection:
        connection.execute("UPDATE schema_revision SET version_num = '9999'")
    for act in (open_database, upgrading.upgrade):
        with pytest.raises(Refused, match="newer version"):
            act(str(path))
