"""Simulated campaigns of known truth, through the trends, to the control that was put in."""

import math

import numpy as np
import pytest

from campaign.diagnosis.explain import explain, to_dict
from campaign.diagnosis.summary import diagnose, to_row
from campaign.kinetics.frumkin import isotherm_occupancy, valley_resistance
from campaign.ledger.criteria import Criteria

CRITERIA = Criteria()
BLENDS = ("PC", "EC:DMC (1:1 v/v)", "G2")

# slow term, its order, solvent factors, barriers [kJ/mol], valley in potential, control
TRUTHS = {
    "desolvation": ("R_ct", 0.5, (1, 2, 4), (40, 52, 60), False, "ion transport"),
    "coupled": ("R_ct", 0.5, (1, 1, 1), (50, 50, 50), True, "mixed"),
    "electron transfer": ("R_ct", 0.0, (1, 1, 1), (50, 50, 50), True, "electron transfer"),
    "film": ("R_sl", 0.2, (1, 2.5, 4), (50, 50, 50), False, "ion transport"),
    "incorporation": ("R_lat", 0.0, (1, 1, 1), (50, 50, 50), True, "host"),
    "solid state": ("sigma_w", 0.0, (1, 1, 1), (50, 50, 50), True, "host"),
    "contradiction": ("R_ct", 0.0, (1, 3, 6), (50, 50, 50), True, "conflicting"),
}
OTHERS = {"R_el": 5.0, "R_sl": 8.0, "R_ct": 10.0, "R_lat": 6.0}
ARCS = {"sl": (1e-8, 0.9), "ct": (2e-5, 0.85), "lat": (2e-2, 0.9)}


def simulate(truth, seed, n_cells=3, between=0.15, within=0.04):
    """36 cells in random order; every term 30 kJ/mol, the slow one as the truth says."""
    rng = np.random.default_rng(seed)
    recipes = [(c, i) for c in (0.1, 0.3, 1.0, 3.0) for i in range(3) for _ in range(n_cells)]
    order = rng.permutation(len(recipes))
    conditions = [(298.15, potential) for potential in (2.95, 3.0, 3.1)]
    conditions += [(kelvin, 3.0) for kelvin in (278.15, 288.15, 308.15, 318.15)]
    rows = []
    for k, (c, blend) in enumerate(recipes):
        cell = {q: math.exp(rng.normal(0, between)) for q in (*OTHERS, "sigma_w")}
        for j, (kelvin, potential) in enumerate(conditions):
            row = {
                "specimen": f"s{k}", "electrolyte": f"{c} M NaPF6 in {BLENDS[blend]}",
                "salt": "NaPF6", "solvents": BLENDS[blend], "concentration": c,
                "temperature_K": kelvin, "potential_V": potential,
                "ion_content": float(isotherm_occupancy(potential, 3.0, 1.0, 298.15)),
                "measured_at": 86400.0 * (2 * order[k] + 0.25 * j),
                "assembled_at": 86400.0 * 2 * order[k] - 3600,
            }  # fmt: skip
            for quantity, value in _values(truth, c, blend, kelvin, potential).items():
                row[quantity] = value * cell[quantity] * math.exp(rng.normal(0, within))
            for arc, (q, n) in ARCS.items():
                row |= {f"Q_{arc}": q, f"n_{arc}": n}
            rows.append(row)
    return rows


def _values(truth, c, blend, kelvin, potential):
    term, order, factors, barriers, valley, _ = TRUTHS[truth]

    def activation(barrier):
        return math.exp(barrier * 1000 / 8.314 * (1 / kelvin - 1 / 298.15))

    values = {q: v * activation(30) for q, v in OTHERS.items()}
    slow = (60 if term == "sigma_w" else 100) * c**-order * factors[blend]
    slow *= activation(barriers[blend])
    if valley:
        slow *= float(valley_resistance(potential, 3.0, 1.0, 1.0, 298.15))
    return values | {term: slow}


@pytest.mark.parametrize("truth", TRUTHS)
def test_the_control_put_in_comes_out(truth, snapshot_of):
    snapshot = snapshot_of(simulate(truth, seed=5))
    (found,) = diagnose(snapshot, CRITERIA, leave_one_out=False)
    term, *_, control = TRUTHS[truth]
    assert found.dominant == {"sigma_w": "diffusion"}.get(term, term)
    assert found.verdict.word == control
    assert found.verdict.strength == (
        None if control == "conflicting" else "moderate" if truth == "film" else "strong"
    )


def test_strong_holds_without_any_one_of_36_specimens(snapshot_of):
    (found,) = diagnose(snapshot_of(simulate("electron transfer", seed=5)), CRITERIA)
    assert (found.verdict.word, found.verdict.strength) == ("electron transfer", "strong")


def test_one_cell_a_condition_never_names_a_wrong_control(snapshot_of):
    for seed in range(4):
        for truth in ("electron transfer", "coupled"):
            rows = simulate(truth, seed, n_cells=1)
            (found,) = diagnose(snapshot_of(rows), CRITERIA, leave_one_out=False)
            if found.verdict.strength in ("moderate", "strong"):
                assert found.verdict.word == TRUTHS[truth][-1]


def test_a_handful_of_cells_is_undetermined(snapshot_of):
    rows = [row for row in simulate("desolvation", seed=2) if row["specimen"] in ("s0", "s1")]
    (found,) = diagnose(snapshot_of(rows), CRITERIA)
    row = to_row(found)
    assert (row["verdict"], row["strength"]) == ("undetermined", None)
    assert any("concentration not tested" in text for text in row["missing"])


def test_explain_runs_on_the_trends_themselves(snapshot_of):
    rows = [
        row for row in simulate("desolvation", seed=3)
        if row["concentration"] in (0.1, 3.0) and row["temperature_K"] in (278.15, 298.15, 318.15)
    ]  # fmt: skip
    whole = to_dict(explain(snapshot_of(rows), CRITERIA, "A", robust=True))
    assert whole["verdict"] == "ion transport"
    assert 0.3 < whole["diagnostics"]["concentration"]["estimate"] < 0.7
    assert set(whole["terms"]) == {"R_el", "R_sl", "R_ct", "R_lat"}
    assert len([one for one in whole["robustness"]["tried"] if one["kind"] == "specimen"]) == 18
    assert whole["robustness"]["influences"][0]["measurements"]
