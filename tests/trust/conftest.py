"""A campaign with data in it, real processes, and folders that other users can reach."""

import importlib.util
import json
import os
import shutil
import subprocess
import sys
import tempfile
from dataclasses import dataclass
from pathlib import Path

import pytest

from campaign.ledger.database import open_database
from campaign.ledger.files import read_files
from campaign.ledger.importing import import_tables
from campaign.ledger.starting import start

ROOT = Path(__file__).resolve().parents[2]
HEAD = "electrode,ion,cell,area_cm2,reference,electrolyte,measured_at,potential_V,temperature_C,"
TABLE = HEAD + """R_sl,R_ct,R_ct_se
film,Na,C1,1.1,Na/Na+,1 M NaPF6 in PC,2026-03-01T10:00Z,3.4,25,absent,41.2,0.8
film,Na,C1,1.1,Na/Na+,1 M NaPF6 in PC,2026-03-01T11:00Z,3.5,25,7.1,38.0,0.8
film,Na,C2,1.1,Na/Na+,1 M NaPF6 in EC:DMC (1:1 v/v),2026-03-02T10:00Z,3.4,25,6.9,55.1,0.9
"""
MORE = TABLE.replace("2026-03-0", "2026-04-0")


@dataclass(frozen=True)
class Run:
    """What a finished process said."""

    code: int
    out: str
    err: str

    @property
    def json(self):
        return json.loads(self.out)

    @property
    def sentence(self):
        """The one line of a refusal, on standard error."""
        assert self.code == 1, (self.code, self.out, self.err)
        assert "Traceback" not in self.err
        lines = self.err.splitlines()
        assert len(lines) == 1 and lines[0].startswith("campaign: "), self.err
        return lines[0]


@pytest.fixture
def campaign():
    """Run the program as a process of its own."""

    def run(*arguments, folder=None, given=b"", **surroundings):
        kept = {k: v for k, v in os.environ.items() if not k.startswith("CAMPAIGN_")}
        done = subprocess.run(
            [sys.executable, "-m", "campaign.cli.main", *map(str, arguments)],
            cwd=folder, input=given, capture_output=True, check=False, timeout=120,
            env={**kept, "PYTHONPATH": str(ROOT), "CAMPAIGN_USER": "tester", **surroundings},
        )  # fmt: skip
        return Run(done.returncode, done.stdout.decode(), done.stderr.decode())

    return run


def fill(where, folder, text=TABLE, name="table.csv"):
    table = Path(folder) / name
    table.write_text(text, encoding="utf-8")
    database = open_database(str(where))
    return import_tables(database, read_files(database, [str(table)]), who="tester")


@pytest.fixture
def stored(tmp_path):
    """The path of a campaign with three measurements, all of it in the one file."""
    path = tmp_path / "campaign.sqlite"
    start(str(path), "UTC", "tester")
    fill(path, tmp_path)
    (tmp_path / "more.csv").write_text(MORE, encoding="utf-8")
    return path


@pytest.fixture
def filled():
    """Fill a campaign anywhere with a table."""
    return fill


@pytest.fixture
def open_folder():
    """A folder that any user of the machine can enter."""
    folder = Path(tempfile.mkdtemp(prefix="campaign-trust-"))
    folder.chmod(0o755)
    yield folder
    folder.chmod(0o755)
    shutil.rmtree(folder)


@pytest.fixture
def script():
    """Import a script of tests/benchmarks."""

    def load(name):
        path = ROOT / "tests" / "benchmarks" / f"{name}.py"
        spec = importlib.util.spec_from_file_location(f"benchmark_{name}", path)
        module = importlib.util.module_from_spec(spec)
        sys.modules[spec.name] = module
        spec.loader.exec_module(module)
        return module

    return load
