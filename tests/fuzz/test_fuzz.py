"""A short seeded run of the fuzzing of recipes, numbers and tables; RECORD.md has the long ones."""

import subprocess
import sys
from pathlib import Path

import pytest

SCRIPT = Path(__file__).resolve().parent / "fuzz.py"


@pytest.mark.parametrize(("target", "runs"), [("recipe", 2000), ("number", 5000), ("table", 400)])
def test_mutated_inputs_are_read_or_refused(target, runs):
    done = subprocess.run(
        [sys.executable, str(SCRIPT), target, "--plain", "--runs", str(runs), "--seed", "11"],
        capture_output=True, text=True, check=False, timeout=120,
    )  # fmt: skip
    assert done.returncode == 0, done.stderr[-3000:]
    assert f"| {runs} |" in done.stdout
