"""Logging and listing wait for no heavy library (common practice: a tool used daily starts fast).

Each command runs in an interpreter of its own, which then tells what it imported.
"""

import json
import subprocess
import sys

import pytest

HEAVY = {"pandas", "scipy", "matplotlib", "alembic", "numpy", "pint", "openpyxl", "rich",
         "uncertainties", "statsmodels"}  # fmt: skip
SCRIPT = """
import atexit, json, sys
sys.argv = ["campaign", *sys.argv[2:]]
report = open({path!r}, "w")
atexit.register(lambda: (json.dump(sorted(sys.modules), report), report.close()))
from campaign.cli.main import main
main()
"""
LOGGED = {"cell": "A", "measured_at": "2026-03-09T10:00Z", "potential_V": 3.4, "temperature_C": 25,
          "R_ct": "41.2(8)"}  # fmt: skip


@pytest.mark.parametrize(
    ("arguments", "given"),
    [
        (("log", "-"), json.dumps(LOGGED)),
        (("log", "--help"), ""),
        (("list", "cells"), ""),
        (("list", "measurements", "--electrode", "film E"), ""),
        (("import", "table.csv"), ""),
        (("--help",), ""),
    ],
    ids=lambda value: " ".join(value) if isinstance(value, tuple) else "",
)
def test_no_heavy_library_is_imported(bench, arguments, given):
    from_conftest = type(bench).start.__globals__["surroundings"]
    path = bench.folder / "modules.json"
    done = subprocess.run(
        [sys.executable, "-c", SCRIPT.format(path=str(path)), "-", *arguments],
        cwd=bench.folder,
        input=given.encode(),
        capture_output=True,
        env=from_conftest(),
        timeout=120,
    )
    assert done.returncode == 0, done.stderr.decode()
    modules = {name.partition(".")[0] for name in json.loads(path.read_text())}
    assert "campaign" in modules
    assert modules & HEAVY == set()
