"""The published model's table holds what it claims, by an analysis that uses no program code."""

from __future__ import annotations

import csv
import importlib.util
import io
import math
import sys
from collections import defaultdict
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest
from scipy import stats


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


def records() -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(MODEL.table())))


def matching(truth: object) -> dict[str, list[dict[str, str]]]:
    """Rows of one electrode and solvent blend at the half-filling potential, by cell."""
    cells = defaultdict(list)
    half = next(e.E_half_V for e in MODEL.ELECTRODES if e.label == truth.electrode)  # type: ignore[attr-defined]
    for row in records():
        blend = row["electrolyte"].split(" in ")[1]
        same = (row["electrode"], blend) == (truth.electrode, truth.solvents)  # type: ignore[attr-defined]
        if same and float(row["E/mV"]) == pytest.approx(half * 1000, abs=0.5):
            cells[row["cell"]].append(row)
    return cells


def ln_area_resistance(row: dict[str, str]) -> float:
    return math.log(float(row["R_ct/kΩ"].split("±")[0]) * 1000 * float(row["A/mm2"]) / 100)


def interval(value: float, se: float, df: float) -> tuple[float, float]:
    half = float(stats.t.ppf(0.975, df)) * se
    return value - half, value + half


def test_there_are_three_electrodes_of_twelve_cells() -> None:
    rows = records()
    cells = {(row["electrode"], row["cell"]) for row in rows}
    count = defaultdict(int)
    for electrode, _ in cells:
        count[electrode] += 1
    assert sorted(count.values()) == [12, 12, 12]
    assert len({(row["cell"], row["measured_at"]) for row in rows}) == len(rows) == 36 * 7
    assert "form" not in rows[0] and "assembled_at" not in rows[0]


def test_the_table_is_the_same_each_time() -> None:
    assert MODEL.table() == MODEL.table()
    assert MODEL.table(MODEL.SEED + 1) != MODEL.table()


@pytest.mark.parametrize("truth", TRUTHS, ids=NAMES)
def test_order_from_one_mean_a_specimen(truth: object) -> None:
    x, y = [], []
    for rows in matching(truth).values():
        room = [r for r in rows if r["T/K"] == "298.15"]
        x.append(-math.log(float(room[0]["electrolyte"].split()[0])))
        y.append(float(np.mean([ln_area_resistance(r) for r in room])))
    line = stats.linregress(x, y)
    low, high = interval(line.slope, line.stderr, len(x) - 2)
    assert low < truth.order < high  # type: ignore[attr-defined]


@pytest.mark.parametrize("truth", TRUTHS, ids=NAMES)
def test_barriers_from_one_slope_a_specimen(truth: object) -> None:
    for with_T, known in ((0, truth.Ea_kJ_mol), (1, truth.Ea_lnRT_kJ_mol)):  # type: ignore[attr-defined]
        slopes = []
        for rows in matching(truth).values():
            T = np.array([float(r["T/K"]) for r in rows])
            y = np.array([ln_area_resistance(r) for r in rows]) - with_T * np.log(T)
            slopes.append(float(np.polyfit(1000 / (MODEL.GAS * T), y, 1)[0]))
        n = len(slopes)
        low, high = interval(float(np.mean(slopes)), float(np.std(slopes, ddof=1)) / n**0.5, n - 1)
        assert low < known < high


def test_without_scatter_the_model_gives_the_stated_numbers() -> None:
    """Orders and both forms of the barrier by differences of the model itself."""
    for truth in TRUTHS:
        electrode = next(e for e in MODEL.ELECTRODES if e.label == truth.electrode)
        solvent = next(s for s in electrode.solvents if s.blend == truth.solvents)
        E = electrode.E_half_V
        at = [MODEL.charge_transfer(electrode, solvent, c, 298.15, E) for c in (1.0, 0.1)]
        assert at[0] == pytest.approx(solvent.R_ct, rel=1e-12)
        assert math.log10(at[1] / at[0]) == pytest.approx(truth.order, abs=1e-12)
        T = np.array(MODEL.TEMPERATURES_K)
        R = np.array([MODEL.charge_transfer(electrode, solvent, 1.0, t, E) for t in T])
        x = 1000 / (MODEL.GAS * T)
        assert np.polyfit(x, np.log(R), 1)[0] == pytest.approx(truth.Ea_kJ_mol, abs=1e-9)
        assert np.polyfit(x, np.log(R / T), 1)[0] == pytest.approx(truth.Ea_lnRT_kJ_mol, abs=1e-9)
