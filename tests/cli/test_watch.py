"""Watching a folder: done and faulty apart, nothing twice, whenever it is stopped."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from typer.testing import CliRunner

from campaign.cli.main import app
from campaign.errors import Refused
from campaign.ledger import selecting, watching
from campaign.ledger.database import open_database
from campaign.ledger.filters import Filter
from campaign.ledger.starting import start

ROOT = Path(__file__).parents[2]
HEAD = "electrode,cell,area_cm2,electrolyte,reference,measured_at,potential_V,temperature_C,R_ct\n"


def table(number, value="41.2"):
    return HEAD + (
        f"film A,A{number:02d},1.13,1 M NaPF6 in PC,Na/Na+,2026-03-0{number % 9 + 1}T09:30Z,"
        f"3.4,25,{value}\n"
    )


@pytest.fixture
def lab(tmp_path):
    """A campaign and a folder to drop tables into."""
    start(str(tmp_path / "lab.sqlite"), "UTC", "test")
    folder = tmp_path / "fits"
    folder.mkdir()
    return open_database(str(tmp_path / "lab.sqlite")), folder


def drop(folder, name, text):
    path = folder / name
    path.write_text(text)
    os.utime(path, (time.time() - 60, time.time() - 60))


def cells(database):
    with database.reading() as connection:
        return [row["cell"] for row in selecting.list_measurements(connection, Filter())]


def swept(database, folder, **how):
    watching.prepare(folder)
    return list(watching.sweep(database, folder, watching.How(who="test", **how)))


def test_done_and_faulty_go_apart_with_a_message(lab):
    database, folder = lab
    drop(folder, "one.csv", table(1))
    drop(folder, "two.csv", table(2, "-5"))
    drop(folder, "notes.md", "not a table")
    drop(folder, ".three.csv", table(3))
    taken = {one.name: one for one in swept(database, folder)}
    assert taken.keys() == {"one.csv", "two.csv"}
    assert (folder / "done" / "one.csv").read_text() == table(1)
    assert (folder / "faulty" / "two.csv").read_text() == table(2, "-5")
    message = (folder / "faulty" / "two.csv.txt").read_text()
    assert "two.csv, line 2, column R_ct" in message
    assert sorted(p.name for p in folder.iterdir() if p.is_file()) == [".three.csv", "notes.md"]
    assert cells(database) == ["A01"]


def test_a_file_still_being_written_is_left_alone(lab):
    database, folder = lab
    (folder / "fresh.csv").write_text(table(1))
    assert swept(database, folder) == []
    assert (folder / "fresh.csv").exists()


def test_names_in_use_are_numbered_and_nothing_is_written_over(lab):
    database, folder = lab
    for number in (1, 2):
        drop(folder, "fit.csv", table(number))
        swept(database, folder)
    assert (folder / "done" / "fit.csv").read_text() == table(1)
    assert (folder / "done" / "fit-2.csv").read_text() == table(2)


def test_stopped_between_import_and_move_it_imports_nothing_twice(lab, monkeypatch):
    database, folder = lab
    drop(folder, "one.csv", table(1))

    def stop(*_):
        raise KeyboardInterrupt

    with monkeypatch.context() as patched:
        patched.setattr(watching, "_move", stop)
        with pytest.raises(KeyboardInterrupt):
            swept(database, folder)
    assert cells(database) == ["A01"] and (folder / "one.csv").exists()
    (again,) = swept(database, folder)
    assert (again.outcome.measurements, again.outcome.unchanged) == (0, 1)
    assert cells(database) == ["A01"] and (folder / "done" / "one.csv").exists()


def test_trouble_with_the_campaign_is_not_the_files_fault(lab, monkeypatch):
    from campaign.errors import refused

    database, folder = lab
    drop(folder, "one.csv", table(1))

    def locked(*_, **__):
        raise refused("another program holds the database locked")

    monkeypatch.setattr(watching, "import_tables", locked)
    with pytest.raises(Refused, match="locked"):
        swept(database, folder)
    assert (folder / "one.csv").exists()


def test_refits_are_faulty_unless_asked_for(lab):
    database, folder = lab
    drop(folder, "one.csv", table(1))
    swept(database, folder)
    drop(folder, "again.csv", table(1, "39.9"))
    (one,) = swept(database, folder)
    assert "--refit" in one.faults[0].message
    drop(folder, "again.csv", table(1, "39.9"))
    (one,) = swept(database, folder, refit=True)
    assert one.outcome.refits == 1


def test_once_says_by_its_exit_whether_a_file_was_faulty(lab, monkeypatch):
    database, folder = lab
    monkeypatch.setenv("CAMPAIGN_DB", str(database.where.path))
    drop(folder, "one.csv", table(1))
    done = CliRunner().invoke(app, ["watch", str(folder), "--once"])
    assert done.exit_code == 0 and "one.csv: 1 added" in done.output
    drop(folder, "two.csv", "nonsense\n")
    assert CliRunner().invoke(app, ["watch", str(folder), "--once"]).exit_code == 1
    missing = CliRunner().invoke(app, ["watch", str(folder / "none"), "--once"])
    assert isinstance(missing.exception, Refused)


def test_killed_at_any_time_every_row_is_there_once(lab):
    database, folder = lab
    for number in range(1, 9):
        drop(folder, f"{number}.csv", table(number))
    arguments = [sys.executable, "-m", "campaign.cli.main", "--db", str(database.where.path),
                 "watch", str(folder), "--every", "0.2"]  # fmt: skip
    process = subprocess.Popen(arguments, cwd=ROOT, stdout=subprocess.PIPE, text=True)
    process.stdout.readline()  # the first file is done; the next is under way
    process.send_signal(signal.SIGKILL)
    process.wait()
    list(watching.sweep(database, folder, watching.How(who="test")))
    assert sorted(cells(database)) == [f"A{number:02d}" for number in range(1, 9)]
    assert len(list((folder / "done").glob("*.csv"))) == 8
    assert not list((folder / "faulty").iterdir())
