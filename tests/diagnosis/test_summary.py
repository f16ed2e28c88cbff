"""From a snapshot to rows: dominant term, verdict, robustness and JSON, with stated evidence."""

import dataclasses
import json

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from campaign.diagnosis.explain import explain, to_dict
from campaign.diagnosis.robustness import criteria_tried, robustness, strata
from campaign.diagnosis.signatures import AXES, RESPONSES
from campaign.diagnosis.summary import diagnose, to_row
from campaign.diagnosis.verdict import WORDS
from campaign.errors import Refused
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.statistics.estimate import Estimate
from campaign.trends.findings import Contrast

CRITERIA = Criteria()
KEYS = {
    "electrode", "n_specimens", "n_measurements", "dominant", "share", "budget", "diagnostics",
    "candidates", "verdict", "strength", "missing", "warnings",
}  # fmt: skip


def cells(n=4, **values):
    values = {"R_sl": 5.0, "R_ct": 50.0} | values
    return [
        {"specimen": f"c{i}", **{k: v * (1 + 0.02 * i) if k.startswith("R_") else v
                                 for k, v in values.items()}}
        for i in range(n)
    ]  # fmt: skip


@pytest.fixture
def source(says):
    """Evidence stated per response; also by what the snapshot holds."""

    def build(**by_response):
        def findings(snapshot: Snapshot, criteria, electrode, response):
            stated = by_response.get(response, {})
            stated = stated(snapshot, criteria) if callable(stated) else stated
            return {axis: says(w) if isinstance(w, str) else w for axis, w in stated.items()}

        return findings

    return build


TRANSFER = {"concentration": "unresponsive", "solvent": "unresponsive", "potential": "responds"}
DESOLVATION = {"concentration": "responds", "solvent": "responds", "barrier": "responds"}


def test_the_row_has_the_keys_of_the_interface(snapshot_of, source):
    (found,) = diagnose(snapshot_of(cells()), CRITERIA, evidence=source(R_ct=TRANSFER))
    row = to_row(found)
    assert set(row) >= KEYS
    assert json.loads(json.dumps(row, allow_nan=False)) == row
    assert (row["dominant"], row["verdict"], row["strength"]) == (
        "R_ct", "electron transfer", "strong",
    )  # fmt: skip
    assert row["share"] == pytest.approx(10 / 11)
    assert row["budget"]["R_ct"] == row["share"]
    assert (row["n_specimens"], row["n_measurements"]) == (4, 4)
    assert set(row["diagnostics"]) == {
        "concentration", "solvent", "additive", "potential", "barrier", "age",
    }  # fmt: skip
    assert row["diagnostics"]["concentration"]["decision"] == "unresponsive"
    assert row["diagnostics"]["age"]["decision"] == "open"
    assert [one["status"] for one in row["candidates"]] == ["eliminated", "eliminated", "stands"]
    assert all(set(one) == {"step", "control", "status", "for", "against"}
               for one in row["candidates"])  # fmt: skip
    assert row["candidates"][2]["for"]
    assert row["candidates"][0]["against"]
    assert row["missing"] == []


def test_electrodes_come_in_order_and_can_be_chosen(snapshot_of, source):
    rows = [one | {"electrode": label} for label in "BA" for one in cells()]
    for row, label in zip(rows, "BBBBAAAA", strict=True):
        row["specimen"] += label
    snapshot = snapshot_of(rows)
    found = diagnose(snapshot, CRITERIA, evidence=source(R_ct=TRANSFER))
    assert [one.electrode for one in found] == ["A", "B"]
    assert {one.n_measurements for one in found} == {4}
    only = diagnose(snapshot, CRITERIA, electrodes=["B"], evidence=source())
    assert [one.electrode for one in only] == ["B"]
    assert diagnose(snapshot, CRITERIA, electrodes=["C"], evidence=source()) == []


def test_findings_are_asked_for_the_dominant_response_only(snapshot_of):
    asked = []

    def findings(snapshot, criteria, electrode, response):
        asked.append(response)
        return {}

    diagnose(snapshot_of(cells(R_sl=float("nan"), sigma_w=400.0)), CRITERIA, evidence=findings)
    assert asked == ["sigma_w"]


def test_an_electrode_without_a_fitted_term_is_undetermined(snapshot_of, source):
    snapshot = snapshot_of([{"R_el": 4.0}])
    row = to_row(diagnose(snapshot, CRITERIA, evidence=source())[0])
    assert (row["dominant"], row["share"], row["verdict"], row["strength"]) == (
        None, None, "undetermined", None,
    )  # fmt: skip
    assert row["missing"]


def test_unsettled_dominance_is_undetermined_unless_the_control_is_one(snapshot_of, source):
    rows = [{"specimen": f"c{i}", "R_sl": x, "R_ct": 100 - x} for i, x in enumerate((30, 45, 60))]
    differ = source(R_ct=TRANSFER, R_sl={"solvent": "responds"})
    found = diagnose(snapshot_of(rows), CRITERIA, evidence=differ)[0]
    assert (found.dominant, found.verdict.word) == ("R_ct", "undetermined")
    assert any("not shown to be larger than R_sl" in text for text in found.warnings)
    agreeing = source(R_ct=DESOLVATION, R_sl={"solvent": "responds"})
    found = diagnose(snapshot_of(rows), CRITERIA, evidence=agreeing)[0]
    assert (found.verdict.word, found.verdict.strength) == ("ion transport", "moderate")


def test_cell_limited_says_so(snapshot_of, source):
    evidence = source(R_el={"concentration": "responds", "potential": "unresponsive"})
    row = to_row(diagnose(snapshot_of(cells(R_el=300.0)), CRITERIA, evidence=evidence)[0])
    assert (row["dominant"], row["verdict"], row["cell_limited"]) == ("R_el", "ion transport", True)
    assert any("cell-limited" in text for text in row["missing"])


def test_two_electrode_cells_lean_at_most(snapshot_of, source):
    rows = [one | {"configuration": "two-electrode"} for one in cells()]
    found = diagnose(snapshot_of(rows), CRITERIA, evidence=source(R_ct=TRANSFER))[0]
    assert found.verdict.strength == "weak"
    assert any("counter electrode" in text for text in found.warnings)


def test_a_failed_check_lowers_the_strength_and_names_measurements(snapshot_of, source):
    swapped = cells(Q_sl=1e-2, n_sl=1.0, Q_ct=1e-5, n_ct=1.0)
    found = diagnose(snapshot_of(swapped), CRITERIA, evidence=source(R_ct=TRANSFER))[0]
    assert found.verdict.strength == "moderate"
    assert any("order of time constants" in t and "1, 2, 3, 4" in t for t in found.warnings)


def test_confounding_is_not_strong(snapshot_of, source, says):
    evidence = source(R_ct=TRANSFER | {"solvent": says("unresponsive", confounded=True)})
    found = diagnose(snapshot_of(cells()), CRITERIA, evidence=evidence)[0]
    assert found.verdict.strength == "moderate"
    assert any("confounded" in text for text in found.warnings)


def hanging_on(name):
    """Concentration is decided only while the specimen `name` is among the readings."""

    def stated(snapshot, criteria):
        there = name in snapshot.readings.specimen.tolist()
        return TRANSFER | ({} if there else {"concentration": "open", "solvent": "open"})

    return stated


def test_a_verdict_that_hangs_on_one_specimen_is_not_strong(snapshot_of, source):
    evidence = source(R_ct=hanging_on("c2"))
    found = diagnose(snapshot_of(cells()), CRITERIA, evidence=evidence)[0]
    assert found.verdict.strength == "moderate"
    assert any("without specimen c2" in text for text in found.warnings)
    kept = diagnose(snapshot_of(cells()), CRITERIA, evidence=evidence, leave_one_out=False)[0]
    assert kept.verdict.strength == "strong"


def test_leave_one_out_is_only_done_where_all_else_says_strong(snapshot_of):
    sizes = []

    def findings(snapshot, criteria, electrode, response):
        sizes.append(len(snapshot.readings))
        return {}

    diagnose(snapshot_of(cells(R_sl=float("nan"))), CRITERIA, evidence=findings)
    assert sizes == [4]


def test_absent_surface_layer_is_a_fact(snapshot_of, source):
    rows = [one | {"R_sl": float("nan"), "absent": ("R_sl",)} for one in cells()]
    explained = explain(
        snapshot_of(rows), CRITERIA, "A", evidence=source(R_ct=TRANSFER), robust=False
    )
    assert explained.diagnosis.budget.shares["R_sl"].share == 0
    status = {one.step.name: one.status for one in explained.terms["R_sl"].assessments}
    assert status["migration through the surface layer"] == "eliminated"


@pytest.mark.parametrize("by", ["salt", "solvents", "temperature"])
def test_one_level_down_gives_a_row_each(snapshot_of, source, by):
    rows = cells()
    for i, row in enumerate(rows):
        row |= {"salt": f"salt {i % 2}", "solvents": f"blend {i % 2}"}
        row["temperature_K"] = 298.15 + 20 * (i % 2)
    found = diagnose(snapshot_of(rows), CRITERIA, evidence=source(), by=by)
    assert [one.n_measurements for one in found] == [2, 2]
    names = [to_row(one)[by] for one in found]
    expected = {
        "salt": ["salt 0", "salt 1"], "solvents": ["blend 0", "blend 1"],
        "temperature": ["25.0 °C", "45.0 °C"],
    }  # fmt: skip
    assert names == expected[by]


def test_an_unknown_grouping_is_refused(snapshot_of, source):
    with pytest.raises(Refused, match="no grouping 'colour'"):
        diagnose(snapshot_of(cells()), CRITERIA, evidence=source(), by="colour")


def test_robustness_finds_the_specimen_the_stratum_and_the_criterion(snapshot_of, source, says):
    rows = cells(6)
    for row in rows[3:]:
        row |= {"solvents": "EC", "electrolyte": "1 M NaX in EC"}

    def stated(snapshot, criteria):
        held = set(snapshot.readings.specimen.tolist()) >= {"c0"}
        both = set(snapshot.readings.solvents.tolist()) == {"PC", "EC"}
        margin = criteria.ratio_margin > 1.4
        flat = "unresponsive" if held and both and margin else "open"
        order = Estimate(0.02 if held else 0.12, 0.05, 8)
        return TRANSFER | {"concentration": says(flat, slope=order)}

    snapshot = snapshot_of(rows)
    found = robustness(snapshot, CRITERIA, "A", source(R_ct=stated))
    assert found.verdict == "electron transfer"
    changing = [(one.kind, one.what) for one in found.changing]
    assert ("specimen", "c0") in changing
    assert ("specimen", "c1") not in changing
    assert {what for kind, what in changing if kind == "stratum"} == {"NaX in PC", "NaX in EC"}
    criteria = [what for kind, what in changing if kind == "criterion"]
    assert len(criteria) == 1
    assert criteria[0].startswith("ratio_margin a quarter lower (1.36)")
    top = found.influences[0]
    assert (top.specimen, top.axis, top.measurements) == ("c0", "concentration", (1,))
    assert top.shift == pytest.approx(2.0)


def test_strata_are_blends_temperatures_and_potentials(snapshot_of):
    rows = cells(3)
    rows[0] |= {"temperature_K": 318.15, "additives": "2 wt% FEC"}
    rows[1] |= {"potential_V": 3.2}
    names = [name for name, _ in strata(snapshot_of(rows).readings, CRITERIA)]
    assert names == [
        "NaX in PC + 2 wt% FEC", "NaX in PC", "25.0 °C", "45.0 °C", "3.000 V vs Na/Na+",
        "3.200 V vs Na/Na+",
    ]  # fmt: skip


def test_each_criterion_is_moved_a_quarter_both_ways():
    tried = dict(criteria_tried(CRITERIA))
    assert len(tried) == 2 * len(dataclasses.fields(Criteria))
    orders = sorted(one.order_margin for one in tried.values())
    assert (orders[0], orders[-1]) == pytest.approx((0.1125, 0.1875))
    ratios = sorted(one.ratio_margin for one in tried.values())
    assert (ratios[0], ratios[-1]) == pytest.approx((1.5**0.75, 1.5**1.25))


def test_explain_takes_the_verdict_apart(snapshot_of, source, says):
    contrast = Contrast("PC", "EC", Estimate(np.log(1.1), 0.05, 8))
    evidence = source(
        R_ct=TRANSFER | {"solvent": says("unresponsive", slope=None, contrasts=(contrast,))},
        R_sl={"solvent": "responds"},
    )
    rows = cells(Q_ct=1e-4, n_ct=0.9, Q_sl=1e-6, n_sl=0.9, R_el=3.0)
    whole = to_dict(explain(snapshot_of(rows), CRITERIA, "A", evidence=evidence))
    assert json.loads(json.dumps(whole, allow_nan=False)) == whole
    assert [one["time_s"] for one in whole["budget_by_time"]] == [0.1, 1, 10, 100]
    assert set(whole["terms"]) == {"R_el", "R_sl", "R_ct"}
    assert whole["terms"]["R_sl"]["verdict"] == "ion transport"
    solvent = whole["diagnostics"]["solvent"]
    assert solvent["estimate"] == pytest.approx(1.1)
    assert solvent["between"] == ["PC", "EC"]
    assert solvent["interval"][0] < 1.1 < solvent["interval"][1]
    assert whole["robustness"]["changing"] == []
    assert {one["kind"] for one in whole["robustness"]["tried"]} == {"specimen", "criterion"}
    sentences = whole["would_change"]
    assert any(t.startswith("electron transfer would fall if concentration") for t in sentences)
    assert any(t.startswith("desolvation and adsorption would stand again") for t in sentences)
    assert any("R_sl were shown to be the largest" in t for t in sentences)


def test_explaining_an_unknown_electrode_is_refused(snapshot_of, source):
    with pytest.raises(Refused, match="no measurements of electrode 'Z'") as caught:
        explain(snapshot_of(cells()), CRITERIA, "Z", evidence=source())
    assert caught.value.faults[0].expected == "one of A"


def test_an_empty_snapshot_has_no_rows(snapshot_of, source):
    assert diagnose(snapshot_of([]), CRITERIA, evidence=source()) == []


SAID = ("responds", "responds, inverse", "unresponsive", "open")
POSITIVE = st.floats(1e-6, 1e6)
ARC = st.fixed_dictionaries(
    {"R_ct": POSITIVE},
    optional={
        "R_el": POSITIVE, "R_sl": POSITIVE, "R_lat": POSITIVE, "sigma_w": POSITIVE,
        "Q_ct": st.floats(1e-12, 1e2), "n_ct": st.floats(0.05, 1), "Q_lat": POSITIVE,
        "n_lat": st.floats(0.05, 1), "specimen": st.sampled_from("abcd"),
        "electrolyte": st.sampled_from(["e1", "e2"]), "solvents": st.sampled_from(["PC", "EC"]),
        "concentration": st.sampled_from([0.1, 1.0]),
        "temperature_K": st.sampled_from([298.15, 318.15]),
        "potential_V": st.sampled_from([3.0, 3.2, float("nan")]),
        "ion_content": st.sampled_from([0.3, 0.5]), "aqueous": st.booleans(),
        "configuration": st.sampled_from(["symmetric", "two-electrode"]),
        "measured_at": st.floats(0, 1e7),
    },
)  # fmt: skip


@settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(data=st.data())
def test_any_readings_give_a_row_without_nan(snapshot_of, source, data):
    snapshot = snapshot_of(data.draw(st.lists(ARC, min_size=1, max_size=12)))
    said = st.dictionaries(st.sampled_from(AXES), st.sampled_from(SAID))
    stated = source(**{response: data.draw(said) for response in RESPONSES})
    for found in diagnose(snapshot, CRITERIA, evidence=stated):
        row = json.loads(json.dumps(to_row(found), allow_nan=False))
        assert row["verdict"] in WORDS
        assert (row["strength"] is None) == (row["verdict"] in ("undetermined", "conflicting"))
        shares = [row["budget"][term] for term in found.budget.shares] if found.budget else [1]
        assert sum(shares) == pytest.approx(1)
