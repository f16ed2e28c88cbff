"""The committed demo files are what the seeded script makes, and hold what they claim."""

from __future__ import annotations

import csv
import json
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

DEMO = Path(__file__).resolve().parents[2] / "demo_campaign"
MADE = ("tables/*.csv", "refits/*.csv", "corrections.toml", "truth.json")


def files(folder: Path) -> dict[str, bytes]:
    return {
        path.relative_to(folder).as_posix(): path.read_bytes()
        for pattern in MADE
        for path in folder.glob(pattern)
    }


def records(path: Path) -> list[dict[str, str]]:
    text = path.read_text(encoding="utf-8")
    separator = ";" if ";" in text.splitlines()[0] else ","
    return list(csv.DictReader(text.splitlines(), delimiter=separator))


@pytest.fixture(scope="module")
def stored() -> dict[tuple[str, str], dict[str, str]]:
    rows = [row for path in sorted(DEMO.glob("tables/*.csv")) for row in records(path)]
    by_key = {(row["cell"], row["measured_at"]): row for row in rows}
    assert len(by_key) == len(rows)
    return by_key


def test_the_script_makes_the_same_bytes(tmp_path: Path) -> None:
    script = [sys.executable, "-B", str(DEMO / "make_demo.py"), str(tmp_path)]
    subprocess.run(script, check=True, capture_output=True)
    assert files(tmp_path) == files(DEMO)


def test_truth_counts_what_the_tables_hold(
    stored: dict[tuple[str, str], dict[str, str]],
) -> None:
    truth = json.loads((DEMO / "truth.json").read_text(encoding="utf-8"))
    assert truth["n_measurements"] == len(stored) >= 400
    for label, electrode in truth["electrodes"].items():
        rows = [row for row in stored.values() if row["electrode"] == label]
        assert len(rows) == electrode["n_measurements"]
        assert len({row["cell"] for row in rows}) == electrode["n_cells"]


def test_corrections_name_what_is_there(stored: dict[tuple[str, str], dict[str, str]]) -> None:
    steps = tomllib.loads((DEMO / "corrections.toml").read_text("utf-8"))["corrections"]
    assert {step["action"] for step in steps} == {"refit", "withdraw"}
    for step in steps:
        if step["action"] == "withdraw":
            assert (step["cell"], step["measured_at"]) in stored
            assert step["kind"] in ("measurement", "fit") and step["reason"]
            continue
        for row in records(DEMO / step["file"]):
            assert (row["cell"], row["measured_at"]) in stored
