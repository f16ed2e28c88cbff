"""The program as people run it: real processes on real files."""

import hashlib
import json
import os
import shutil
import sqlite3
import subprocess
import sys
from collections.abc import Sequence
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path

import pytest

from campaign.ledger.database import open_database
from campaign.ledger.files import read_files
from campaign.ledger.importing import import_tables
from campaign.ledger.starting import start

ROOT = Path(__file__).resolve().parents[2]

HEADER = (
    "electrode,ion,cell,area_cm2,electrolyte,reference,measured_at,potential_V,temperature_C,"
    "R_el,R_ct,R_ct_se"
)
ROWS = (
    "film E,Na,A,1.13,1 M NaPF6 in PC,Na/Na+,2026-03-01T10:00Z,3.4,25,4.1,41.2,0.8",
    "film E,Na,A,1.13,1 M NaPF6 in PC,Na/Na+,2026-03-02T10:00Z,3.4,25,4.2,42.0,0.8",
    "film E,Na,B,1.13,0.5 M NaPF6 in PC,Na/Na+,2026-03-03T10:00Z,3.4,25,6.0,60.1,0.9",
)
TABLE = "\n".join((HEADER, *ROWS)) + "\n"


@dataclass(frozen=True)
class Run:
    """What a finished process said."""

    code: int
    out: str
    err: str

    @property
    def json(self):
        return json.loads(self.out)


def surroundings(**more: str) -> dict[str, str]:
    kept = {k: v for k, v in os.environ.items() if not k.startswith("CAMPAIGN_")}
    return {**kept, "PYTHONPATH": str(ROOT), "CAMPAIGN_USER": "tester", **more}


def command(*arguments: str) -> list[str]:
    return [sys.executable, "-m", "campaign.cli.main", *arguments]


class Server:
    """The forking server: one process a command, the program imported once."""

    def __init__(self) -> None:
        self.process = subprocess.Popen(
            [sys.executable, str(Path(__file__).with_name("forker.py"))],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            env=surroundings(),
            text=True,
        )

    def run(self, job: dict[str, object]) -> Run:
        assert self.process.stdin is not None and self.process.stdout is not None
        self.process.stdin.write(json.dumps(job) + "\n")
        self.process.stdin.flush()
        return Run(**json.loads(self.process.stdout.readline()))

    def stop(self) -> None:
        assert self.process.stdin is not None and self.process.stdout is not None
        self.process.stdin.close()
        self.process.wait(timeout=30)
        self.process.stdout.close()


@pytest.fixture(scope="session")
def server():
    started = Server()
    yield started
    started.stop()


@dataclass(frozen=True)
class Bench:
    """A folder in which commands are run."""

    folder: Path
    server: Server

    def run(self, *arguments: str, given: str | bytes = "", **environment: str) -> Run:
        """Run a command in a process forked from one that has the program imported."""
        content = given if isinstance(given, bytes) else given.encode()
        return self.server.run(
            {
                "arguments": arguments,
                "folder": str(self.folder),
                "environment": surroundings(**environment),
                "given": content.decode("latin-1"),
            }
        )

    def start(self, *arguments: str, given: str | bytes = "", **environment: str) -> Run:
        """Run a command in an interpreter of its own, as a shell does."""
        content = given if isinstance(given, bytes) else given.encode()
        done = subprocess.run(
            command(*arguments),
            cwd=self.folder,
            input=content,
            capture_output=True,
            env=surroundings(**environment),
            timeout=120,
        )
        return Run(done.returncode, done.stdout.decode(), done.stderr.decode())

    def done(self, *arguments: str, **options) -> Run:
        """Run what must succeed."""
        run = self.run(*arguments, **options)
        assert run.code == 0, run.err
        return run

    def all(self, invocations: Sequence[Sequence[str]]) -> list[Run]:
        """Run several, one after the other."""
        return [self.run(*arguments) for arguments in invocations]

    def write(self, name: str, content: str | bytes) -> str:
        raw = content if isinstance(content, bytes) else content.encode()
        (self.folder / name).write_bytes(raw)
        return name

    def digest(self) -> str:
        """Digest of the whole campaign here."""
        with closing(sqlite3.connect(self.folder / "campaign.sqlite")) as connection:
            return hashlib.sha256("\n".join(connection.iterdump()).encode()).hexdigest()


@pytest.fixture
def empty(tmp_path, server) -> Bench:
    """A folder without campaign."""
    return Bench(tmp_path, server)


@pytest.fixture(scope="session")
def _filled(tmp_path_factory) -> Path:
    folder = tmp_path_factory.mktemp("filled")
    (folder / "table.csv").write_text(TABLE)
    path = str(folder / "campaign.sqlite")
    start(path, "Europe/Paris", "tester")
    database = open_database(path)
    import_tables(database, read_files(database, [str(folder / "table.csv")]), who="tester")
    return folder


@pytest.fixture
def bench(_filled, tmp_path, server) -> Bench:
    """A folder with a small campaign of two cells and three measurements."""
    shutil.copytree(_filled, tmp_path, dirs_exist_ok=True)
    return Bench(tmp_path, server)


@pytest.fixture(scope="module")
def module_bench(_filled, tmp_path_factory, server) -> Bench:
    """The small campaign, shared by the tests of one file."""
    folder = tmp_path_factory.mktemp("shared")
    shutil.copytree(_filled, folder, dirs_exist_ok=True)
    return Bench(folder, server)


@pytest.fixture(scope="session")
def demo(tmp_path_factory, server):
    """The demo campaign, made by its command; (bench in its folder, what the command said)."""
    folder = tmp_path_factory.mktemp("demo")
    run = Bench(folder, server).done("demo", "made")
    return Bench(folder / "made", server), run
