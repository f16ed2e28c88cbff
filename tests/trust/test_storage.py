"""Disks, folders and files that fail: one clear sentence each, exit 1, nothing changed."""

import contextlib
import os
import resource
import shutil
import sqlite3
import subprocess
import sys
from contextlib import closing
from datetime import UTC, datetime, timedelta

import pytest

from campaign.errors import Refused
from campaign.ledger.amending import amend
from campaign.ledger.checking import check
from campaign.ledger.database import open_database
from campaign.ledger.files import read_files
from campaign.ledger.filters import Filter
from campaign.ledger.importing import import_tables
from campaign.ledger.selecting import list_measurements

NOBODY = 65534


def content(path):
    with closing(sqlite3.connect(path)) as connection:
        return list(connection.iterdump())


def measured(path):
    with open_database(str(path)).reading() as connection:
        assert not [p for p in check(connection) if p.grave]
        return len(list_measurements(connection, Filter()))


def refusal(action, *arguments, **options):
    with pytest.raises(Refused) as caught:
        action(*arguments, **options)
    (fault,) = caught.value.faults
    return fault.message


# A full disk ----------------------------------------------------------------------------------


@contextlib.contextmanager
def small_disk(folder, megabytes=1):
    """A file system of its own where this user may mount one, else a limit on file sizes."""
    folder.mkdir()
    mount = ["mount", "-t", "tmpfs", "-o", f"size={megabytes}m", "tmpfs", str(folder)]
    mounted = os.geteuid() == 0 and shutil.which("mount") is not None
    mounted = mounted and subprocess.run(mount, capture_output=True, check=False).returncode == 0
    try:
        yield {} if mounted else {"preexec_fn": limited(megabytes << 20)}
    finally:
        if mounted:
            subprocess.run(["umount", str(folder)], check=True)


def limited(size):
    return lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (size, size))


def many_rows(count):
    head = "electrode,ion,cell,area_cm2,electrolyte,reference,measured_at,potential_V,"
    lines = [head + "temperature_C,R_ct,note"]
    for n in range(count):
        instant = (datetime(2026, 5, 1, tzinfo=UTC) + timedelta(minutes=n)).isoformat()
        lines.append(
            f"film,Na,C1,1.1,1 M NaPF6 in PC,Na/Na+,{instant},3.4,25,41.2,{'long note ' * 20}"
        )
    return "\n".join(lines) + "\n"


def program(*arguments, **options):
    return subprocess.run(
        [sys.executable, "-m", "campaign.cli.main", *map(str, arguments)],
        capture_output=True, text=True, check=False, timeout=120, **options,
    )  # fmt: skip


def test_a_full_disk(tmp_path, filled):
    from campaign.ledger.starting import start

    table = tmp_path / "many.csv"
    table.write_text(many_rows(4000), encoding="utf-8")
    with small_disk(tmp_path / "disk") as options:
        path = tmp_path / "disk" / "campaign.sqlite"
        start(str(path), "UTC", "tester")
        filled(path, tmp_path)
        before = content(path)
        done = program("import", "--db", path, table, **options)
        assert done.returncode == 1, done.stdout
        assert "full" in done.stderr and "nothing was written" in done.stderr
        assert len(done.stderr.splitlines()) == 1
        assert content(path) == before
        assert measured(path) == 3


def test_a_file_that_may_grow_no_further(stored, tmp_path):
    table = tmp_path / "many.csv"
    table.write_text(many_rows(3000), encoding="utf-8")
    before = content(stored)
    done = program("import", "--db", stored, table, preexec_fn=limited(400_000))
    assert done.returncode == 1
    assert "nothing was written" in done.stderr
    assert len(done.stderr.splitlines()) == 1
    assert content(stored) == before
    assert measured(stored) == 3


def test_a_backup_and_a_copy_without_room_leave_no_file(stored, tmp_path):
    for act in (("backup", tmp_path / "b.sqlite"), ("copy", "--to", tmp_path / "b.sqlite")):
        before = sorted(p.name for p in tmp_path.iterdir())
        done = program(act[0], "--db", stored, *act[1:], preexec_fn=limited(100_000))
        assert done.returncode == 1, done.stdout
        assert len(done.stderr.splitlines()) == 1
        assert sorted(p.name for p in tmp_path.iterdir()) == before


# Read-only ------------------------------------------------------------------------------------


def as_nobody(action):
    """Run an action in a forked process without the rights of a superuser; return its word.

    What the action imports must have been imported: another user may be unable to read it.
    """
    read, write = os.pipe()
    child = os.fork()
    if child == 0:
        try:
            if os.geteuid() == 0:
                os.setgroups([])
                os.setgid(NOBODY)
                os.setuid(NOBODY)
            try:
                said = f"done {action()}"
            except Refused as error:
                said = f"refused {error}"
            except BaseException as error:
                said = f"broken {error!r}"
            os.write(write, said.encode())
        finally:
            os._exit(0)
    os.close(write)
    with os.fdopen(read) as stream:
        said = stream.read()
    os.waitpid(child, 0)
    return said


@pytest.fixture
def locked_away(stored, open_folder):
    """A campaign in a folder, its entries all in the one file, for nobody to write."""
    path = open_folder / "campaign.sqlite"
    shutil.copy(stored, path)
    # What the forked process will need is imported here, by doing it once.
    assert measured(path) == 3
    change(path)
    shutil.copy(stored, path)
    path.chmod(0o444)
    return path


def change(path):
    return amend(open_database(str(path)), "cell", "C1", {"area_cm2": "1.2"}, "a slip", "tester")


def test_a_read_only_folder_is_read_and_refuses_writing(locked_away):
    locked_away.parent.chmod(0o555)
    before = locked_away.read_bytes()
    assert as_nobody(lambda: measured(locked_away)) == "done 3"
    said = as_nobody(lambda: change(locked_away))
    assert said.startswith("refused") and "read-only here" in said
    assert locked_away.read_bytes() == before
    assert [p.name for p in locked_away.parent.iterdir()] == ["campaign.sqlite"]


def test_a_read_only_file_in_an_open_folder(locked_away):
    locked_away.parent.chmod(0o777)
    before = locked_away.read_bytes()
    assert as_nobody(lambda: measured(locked_away)) == "done 3"
    said = as_nobody(lambda: change(locked_away))
    assert said.startswith("refused") and "read-only here" in said
    assert locked_away.read_bytes() == before


def test_a_read_only_folder_with_entries_still_in_the_log(locked_away):
    """Immutable reading would miss the latest entries, so it is refused instead."""
    locked_away.chmod(0o644)
    kept = {}
    with closing(sqlite3.connect(locked_away)) as reader:
        reader.execute("SELECT count(*) FROM journal").fetchone()
        change(locked_away)
        log = locked_away.with_name("campaign.sqlite-wal")
        for name in (locked_away, log):
            kept[name] = name.read_bytes()
    for name, stood in kept.items():
        name.write_bytes(stood)
        name.chmod(0o444)
    locked_away.with_name("campaign.sqlite-shm").unlink(missing_ok=True)
    locked_away.parent.chmod(0o555)
    said = as_nobody(lambda: measured(locked_away))
    assert said.startswith("refused") and "copy both files" in said


# Other files ----------------------------------------------------------------------------------

COMMANDS = (
    ("list", "cells"), ("check",), ("history",), ("summary",), ("upgrade",), ("backup",),
    ("amend", "cell", "C1", "area_cm2=2", "--reason", "x"),
)  # fmt: skip


@pytest.mark.parametrize(
    ("bytes_", "word"),
    [
        (b"a note\n" * 500, "not a campaign database"),
        (b"", "no campaign"),
        (b"SQLite format 3\x00", "not a campaign database"),
        (bytes(8192), "not a campaign database"),
    ],
)
def test_files_that_are_no_database(tmp_path, campaign, bytes_, word):
    path = tmp_path / "file.sqlite"
    path.write_bytes(bytes_)
    for command in COMMANDS[:2] + COMMANDS[4:5]:
        assert word in campaign(*command, "--db", path).sentence
    assert path.read_bytes() == bytes_
    assert [p.name for p in tmp_path.iterdir()] == ["file.sqlite"]


@pytest.mark.parametrize("part", [0.1, 0.5, 0.9, 0.99])
def test_a_truncated_database(stored, tmp_path, campaign, part):
    whole = stored.read_bytes()
    cut = whole[: int(len(whole) * part)]
    stored.write_bytes(cut)
    for command in (COMMANDS[1], COMMANDS[6]):
        done = campaign(*command, "--db", stored)
        assert done.code == 1
        assert "Traceback" not in done.err
        said = done.err + done.out
        assert any(word in said for word in ("damaged", "not a campaign", "FAULT", "no campaign"))
    assert stored.read_bytes() == cut


@pytest.mark.parametrize("revision", ["9999", "0000"])
def test_another_version_is_named_by_every_command(stored, campaign, revision):
    with closing(sqlite3.connect(stored)) as connection:
        connection.execute("UPDATE schema_revision SET version_num = ?", (revision,))
        connection.commit()
    before = content(stored)
    for command in (COMMANDS[0], COMMANDS[6]):
        said = campaign(*command, "--db", stored).sentence
        assert revision in said and ("newer version" in said or "campaign upgrade" in said)
    assert content(stored) == before


# Locks ----------------------------------------------------------------------------------------


@pytest.mark.parametrize("how", ["BEGIN IMMEDIATE", "PRAGMA locking_mode = EXCLUSIVE"])
def test_a_database_locked_for_long(stored, campaign, how):
    with closing(sqlite3.connect(stored, isolation_level=None)) as other:
        other.execute(how)
        if how.startswith("PRAGMA"):
            other.execute("BEGIN EXCLUSIVE")
        said = campaign(*COMMANDS[6], "--db", stored, CAMPAIGN_WAIT_S="0.2").sentence
        assert "locked" in said and "try again" in said
        other.execute("ROLLBACK")
    assert measured(stored) == 3
    assert campaign(*COMMANDS[6], "--db", stored, CAMPAIGN_WAIT_S="0.2").code == 0


@pytest.mark.parametrize("text", ["soon", "-1", "nan", "1e9"])
def test_a_wait_that_is_no_time(stored, campaign, text):
    said = campaign("list", "cells", "--db", stored, CAMPAIGN_WAIT_S=text).sentence
    assert "CAMPAIGN_WAIT_S" in said and text in said


def test_a_failure_while_reading_a_table_writes_nothing(stored, tmp_path):
    folder = tmp_path / "folder.csv"
    folder.mkdir()
    database = open_database(str(stored))
    before = content(stored)
    assert "is a folder" in refusal(read_files, database, [str(folder)])
    with pytest.raises(Refused):
        import_tables(database, read_files(database, [str(tmp_path / "none.csv")]))
    assert content(stored) == before
