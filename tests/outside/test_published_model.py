"""The published model's table through the commands: known orders and barriers come back.

The table, its sources and what is true of it: published_model.py. Barriers: Ea_kJ_mol is the
ln R form, Ea_lnRT_kJ_mol the ln(R/T) form.
"""

from __future__ import annotations

import importlib.util
import json
import os
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest

ROOT = Path(__file__).resolve().parents[2]


def load_model() -> ModuleType:
    path = Path(__file__).with_name("published_model.py")
    spec = importlib.util.spec_from_file_location("published_model", path)
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules["published_model"] = module
    spec.loader.exec_module(module)
    return module


MODEL = load_model()
TRUTHS = MODEL.known()
NAMES = [f"{truth.electrode}, {truth.solvents}" for truth in TRUTHS]


class Campaign:
    """The commands, run as a person runs them, in a folder of their own."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.environment = dict(os.environ, PYTHONPATH=str(ROOT), PYTHONIOENCODING="utf-8")
        self.environment["CAMPAIGN_DB"] = str(folder / "campaign.sqlite")

    def run(self, *arguments: str) -> str:
        done = subprocess.run(
            [sys.executable, "-m", "campaign.cli.main", *arguments],
            cwd=self.folder, env=self.environment, capture_output=True, encoding="utf-8",
            check=False,
        )  # fmt: skip
        assert done.returncode == 0, done.stderr + done.stdout
        return done.stdout

    def json(self, *arguments: str) -> Any:
        return json.loads(self.run(*arguments, "--json"))


@pytest.fixture(scope="module")
def campaign(tmp_path_factory: pytest.TempPathFactory) -> Campaign:
    folder = tmp_path_factory.mktemp("published")
    (folder / "published.csv").write_text(MODEL.table(), encoding="utf-8")
    commands = Campaign(folder)
    commands.run("init")
    return commands


@pytest.fixture(scope="module")
def imported(campaign: Campaign) -> Any:
    return campaign.json("import", "published.csv")


@pytest.fixture(scope="module")
def orders(campaign: Campaign, imported: Any) -> Any:
    return campaign.json("trend", "concentration")


@pytest.fixture(scope="module")
def barriers(campaign: Campaign, imported: Any) -> Any:
    return campaign.json("trend", "temperature")


@pytest.fixture(scope="module")
def summary(campaign: Campaign, imported: Any) -> dict[str, Any]:
    rows = campaign.json("summary")["rows"]
    return {row["electrode"]: row for row in rows}


def estimate_of(estimates: list[dict[str, Any]], truth: Any) -> dict[str, Any]:
    """The one estimate of an electrode, salt and solvent blend."""
    found = [
        e
        for e in estimates
        if (e["electrode"], e["salt"], e["solvents"])
        == (truth.electrode, truth.salt, truth.solvents)
    ]
    assert len(found) == 1, [(e["electrode"], e["salt"], e["solvents"]) for e in estimates]
    return found[0]


def inside(value: float, interval: list[float] | None) -> bool:
    return interval is not None and interval[0] < value < interval[1]


def intervals(node: Any, key: str) -> Iterator[list[float]]:
    """Every interval under `key`, however deep."""
    if isinstance(node, dict):
        for name, child in node.items():
            if name == key and child is not None:
                yield child
            else:
                yield from intervals(child, key)
    elif isinstance(node, list):
        for child in node:
            yield from intervals(child, key)


def test_everything_is_added_and_again_nothing(campaign: Campaign, imported: Any) -> None:
    recipes = {(e.salt, s.blend, c) for e in MODEL.ELECTRODES for s in e.solvents
               for c in e.concentrations}  # fmt: skip
    n = len(MODEL.rows())
    assert imported["added"] == {
        "electrodes": 3, "electrolytes": len(recipes), "cells": 36, "measurements": n,
    }  # fmt: skip
    assert imported["unchanged"] == 0
    again = campaign.json("import", "published.csv")
    assert again["unchanged"] == n
    assert set(again["added"].values()) == {0}


@pytest.mark.parametrize("truth", TRUTHS, ids=NAMES)
def test_order(orders: Any, truth: Any) -> None:
    assert (orders["axis"], orders["unit"]) == ("concentration", "ohm cm2")
    estimate = estimate_of(orders["estimates"], truth)
    low, high = estimate["order_ci"]
    assert low < truth.order < high
    assert low < estimate["order"] < high
    assert high - low < 0.8  # 15 % between six or more specimens over a decade of c


@pytest.mark.parametrize("truth", TRUTHS, ids=NAMES)
def test_barrier_in_both_forms(barriers: Any, truth: Any) -> None:
    estimate = estimate_of(barriers["estimates"], truth)
    assert inside(truth.Ea_kJ_mol, estimate["Ea_ci"])
    assert inside(truth.Ea_lnRT_kJ_mol, estimate["Ea_lnRT_ci"])
    apart = estimate["Ea_lnRT_kJ_mol"] - estimate["Ea_kJ_mol"]
    assert apart == pytest.approx(MODEL.form_difference(), abs=0.1)


def test_summary_names_the_term_and_holds_orders_and_barriers(summary: dict[str, Any]) -> None:
    assert set(summary) == {e.label for e in MODEL.ELECTRODES}
    for truth in TRUTHS:
        row = summary[truth.electrode]
        assert (row["dominant"], row["n_specimens"], row["n_measurements"]) == ("R_ct", 12, 84)
        diagnostics = row["diagnostics"]
        assert any(inside(truth.order, i) for i in intervals(diagnostics, "order_ci"))
        assert any(inside(truth.Ea_kJ_mol, i) for i in intervals(diagnostics, "Ea_ci"))


def test_summary_decides_as_the_model_was_made(summary: dict[str, Any]) -> None:
    """Orders well above 0.15; solvents 18 kJ/mol apart [2, 3]: transport of the ion."""
    for label in ("graphite G", "titanate L"):
        row = summary[label]
        assert row["diagnostics"]["concentration"]["decision"] == "responds"
        assert row["diagnostics"]["barrier"]["decision"] == "responds"
        assert row["verdict"] == "ion transport"
