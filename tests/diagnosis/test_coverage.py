"""Coverage: counts over pairs of axes, contrast as the trends see it, and what lacks in words."""

import importlib.util
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from campaign.diagnosis.coverage import coverage
from campaign.ledger.criteria import Criteria
from campaign.present.coverage import coverage_lines

_spec = importlib.util.spec_from_file_location(
    "next_campaign", Path(__file__).parent / "next_campaign.py"
)
made = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(made)


def one(rows, **options):
    (found,) = coverage(made.snapshot(rows), Criteria(), **options)
    return found


def matrix(found, a, b):
    return next(m for m in found.matrices if (m.row_axis, m.column_axis) == (a, b))


def test_specimens_and_measurements_are_counted():
    rows = [
        *made.rows(solvents=("PC",), cells=2),
        *made.rows(solvents=("DMC",), concentrations=(1.0,), temperatures=(298.15,)),
    ]
    for i, row in enumerate(rows[18:]):
        row["cell"] = f"extra {i}"
    found = one(rows)
    assert (found.n_specimens, found.n_measurements) == (7, 19)
    m = matrix(found, "concentration", "solvents")
    assert m.rows == ("0.1 mol/L", "0.5 mol/L", "1 mol/L") and m.columns == ("DMC", "PC")
    assert m.specimens == ((0, 2), (0, 2), (1, 2))
    assert m.measurements == ((0, 6), (0, 6), (1, 6))


def test_contrast_is_marked_where_all_else_is_equal():
    rows = [
        *made.rows(solvents=("PC",)),
        *made.rows(solvents=("DMC",), concentrations=(1.0,), temperatures=(298.15,)),
        *made.rows(solvents=("G2",), concentrations=(1.0,), temperatures=(340.0,)),
    ]
    for i, row in enumerate(rows):
        row["cell"] = f"{row['solvents']} {row['concentration']}"
        row["measured_at"] = i * 3600.0
    m = matrix(one(rows), "concentration", "solvents")
    assert m.columns == ("DMC", "G2", "PC")
    # concentrations are compared in PC alone; solvents at 1 mol/L and 25 degC; G2 was hotter
    assert [row[2] for row in m.row_contrast] == [True, True, True]
    assert m.row_contrast[2][:2] == (False, False)
    assert m.column_contrast[2] == (True, False, True)
    assert m.column_contrast[0] == (False, False, False)


def test_the_state_of_the_electrode_counts_not_the_potential_as_recorded():
    # potentials differ with the half-filling potential: E - E_half is equal, so they compare
    rows = made.rows(concentrations=(0.1, 1.0), reference="SCE")
    for row in rows:
        shift = 0.05 * np.log10(row["concentration"])
        row |= {"potential_V": 0.4 + shift, "E_half_V": 0.35 + shift}
    m = matrix(one(rows), "concentration", "solvents")
    assert m.row_contrast == ((True,), (True,))
    for row in rows:
        row["E_half_V"] = float("nan")
    assert matrix(one(rows), "concentration", "solvents").row_contrast == ((False,), (False,))


def test_temperature_and_potential_are_compared_within_cells():
    rows = made.rows(concentrations=(1.0,), potentials=(3.0, 3.1))
    m = matrix(one(rows), "potential", "temperature")
    assert m.rows == ("3 V", "3.1 V") and m.columns == ("5 °C", "25 °C", "45 °C")
    assert all(all(row) for row in m.row_contrast)
    assert all(all(row) for row in m.column_contrast)
    apart = [row for row in rows if (row["potential_V"] == 3.0) == (row["temperature_K"] < 290)]
    assert not any(any(row) for row in matrix(one(apart), "potential", "temperature").row_contrast)


def test_what_lacks_is_said_for_each_predicted_diagnostic():
    found = one(made.rows(order=0.3, between=0.12))
    lacks = {lack.axis: lack for lack in found.lacks}
    assert set(lacks) == {"concentration", "solvent", "additive", "potential", "barrier"}
    assert lacks["concentration"].decision == "open"
    assert lacks["concentration"].text.startswith("more cells (order ")
    assert "cells in two or more solvents" in lacks["solvent"].text
    assert "not tested" in lacks["potential"].text


def test_what_is_decided_lacks_nothing():
    found = one(made.rows(order=0.8, between=0.03, cells=3))
    lacks = {lack.axis: lack for lack in found.lacks}
    assert lacks["concentration"].decision == "responds" and lacks["concentration"].text == ""


def test_a_decision_too_loose_to_eliminate_is_said():
    for seed in range(60):
        found = one(made.rows(seed, order=0.45, between=0.1, cells=2, concentrations=(0.3, 1.0)))
        text = next(lack.text for lack in found.lacks if lack.axis == "concentration")
        if "eliminated at 97.5 % only" in text or "eliminated at 97.5% only" in text:
            return
    pytest.fail("no campaign of sixty was decided at 95 % and not at 97.5 %")


def test_lines_fit_a_hundred_columns_with_many_levels():
    solvents = tuple(f"EC:DMC ({i}:1 v/v)" for i in range(1, 14))
    rows = made.rows(solvents=solvents, potentials=(3.0, 3.05, 3.1, 3.15))
    found = one(rows, every_pair=True)
    lines = coverage_lines(found.as_dict())
    assert max(map(len, lines)) <= 100
    text = "\n".join(lines)
    assert all(solvent in text for solvent in solvents)


def test_every_pair_of_axes_can_be_asked_for():
    rows = made.rows(solvents=("PC", "DMC"), potentials=(3.0, 3.1))
    pairs = {(m.row_axis, m.column_axis) for m in one(rows, every_pair=True).matrices}
    assert ("concentration", "potential") in pairs and ("salt", "temperature") in pairs


def test_rows_of_several_electrodes_stay_apart():
    rows = [*made.rows(), *made.rows(electrode="other")]
    found = coverage(made.snapshot(rows), Criteria())
    assert [each.electrode for each in found] == ["film", "other"]
    only = coverage(made.snapshot(rows), Criteria(), electrodes=["other"])
    assert [each.electrode for each in only] == ["other"]


def test_nothing_measured_gives_no_rows():
    rows = made.rows()
    empty = made.snapshot(rows)
    none = replace(empty, readings=empty.readings.take(np.zeros(len(rows), bool)))
    assert coverage(none, Criteria()) == []


def test_times_and_potentials_not_recorded_are_a_level_of_their_own():
    rows = made.rows(concentrations=(0.1, 1.0), configuration="symmetric")
    for row in rows:
        row |= {"potential_V": float("nan"), "reference": "", "measured_at": float("nan"),
                "assembled_at": float("nan")}  # fmt: skip
    found = one(rows)
    assert dict(found.levels["potential"]) == {"not recorded": 2}
    assert dict(found.levels["age"]) == {"not recorded": 2}
