"""The demo's verdicts against the truth it was made from (demo_campaign/truth.json).

The truth was fixed before the verdicts were computed: these are the parameters of the seeded
script, not results of this program.
"""

import json
from pathlib import Path

import pytest

from campaign.diagnosis.reading import followed, summarise
from campaign.ledger.demonstration import build

TRUTH = json.loads(
    (Path(__file__).resolve().parents[2] / "demo_campaign" / "truth.json").read_text("utf-8")
)
LABELS = list(TRUTH["electrodes"])
TOLERANCE_kJ_mol = 3.0


@pytest.fixture(scope="module")
def database(tmp_path_factory):
    return str(build(tmp_path_factory.mktemp("demo") / "sodium").database)


@pytest.fixture(scope="module")
def rows(database):
    return {row["electrode"]: row for row in summarise(database)["rows"]}


def test_every_electrode_has_a_row(rows):
    assert set(rows) == set(LABELS)


@pytest.mark.parametrize("label", LABELS)
def test_the_verdict_is_the_truth(rows, label):
    row, expected = rows[label], TRUTH["electrodes"][label]["expected"]
    assert row["verdict"] == expected["verdict"]
    assert row["strength"] in expected["strength"]
    if expected["dominant"] is not None:
        assert row["dominant"] == expected["dominant"]
        standing = [one["step"] for one in row["candidates"] if one["status"] == "stands"]
        assert standing == [expected["slow_step"]]
    for axis, decision in expected["decisions"].items():
        assert row["diagnostics"][axis]["decision"] == decision


@pytest.mark.parametrize("label", LABELS)
def test_orders_lie_inside_their_intervals(rows, label):
    row, truth = rows[label], TRUTH["electrodes"][label]
    order = row["diagnostics"]["concentration"]
    low, high = order["order_ci"]
    assert low <= truth["order"][row["dominant"]] <= high


def barriers_put_in(truth, dominant):
    """By (solvents, additives), in the form ln R [kJ/mol]; the film's is one for all."""
    if dominant == "R_sl":
        film = truth["barrier_R_sl_kJ_mol"]  # the script's film follows the form ln R
        return {(one["solvents"], one["additives"]): film for one in truth["factors_R_sl"]}
    return {
        (one["solvents"], one["additives"]): one["Ea_kJ_mol"] for one in truth["barriers_R_ct"]
    }


@pytest.mark.parametrize("label", LABELS)
def test_barriers_lie_near_theirs(rows, label):
    known = barriers_put_in(TRUTH["electrodes"][label], rows[label]["dominant"])
    series = rows[label]["diagnostics"]["barrier"]["series"]
    assert series
    for one in series:
        blend = {"G2": "diglyme"}.get(one["solvents"], one["solvents"])
        wanted = known[blend, one["additives"]]
        assert one["Ea_kJ_mol"] == pytest.approx(wanted, abs=TOLERANCE_kJ_mol)


@pytest.mark.parametrize("label", ["NFM film A", "NiHCF film B", "hard carbon C"])
def test_the_law_over_the_potential_is_the_one_put_in(rows, label):
    potential, truth = rows[label]["diagnostics"]["potential"], TRUTH["electrodes"][label]
    dominant = truth["expected"]["dominant"]
    law = truth["potential_law_R_ct"] if dominant == "R_ct" else "flat"
    assert potential["law"] == law
    if law == "valley":
        assert potential["E0_V"] == pytest.approx(truth["E0_V"], abs=0.005)
        assert potential["g"] == pytest.approx(truth["g"], abs=0.3)


def test_too_few_cells_leave_the_law_open_with_the_reason(rows):
    potential = rows["Prussian white D"]["diagnostics"]["potential"]
    assert potential["law"] == "open"
    assert "too few" in potential["law_because"]


def test_no_question_was_ever_settled_the_wrong_way(database):
    found = followed(database, every="quarter")
    assert found["clock"] == "measured"
    for row in found["rows"]:
        expected = TRUTH["electrodes"][row["electrode"]]["expected"]
        if row["strength"] in ("moderate", "strong"):
            assert row["verdict"] == expected["verdict"]
        assert not row["flipped"]
    settled = {one["electrode"]: one["settled_in"] for one in found["conclusions"]}
    assert settled["Prussian white D"] is None
    assert all(settled[label] for label in LABELS if label != "Prussian white D")
