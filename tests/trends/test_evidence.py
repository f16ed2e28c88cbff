"""The electrode's findings, and input at the edges: sentences, not exceptions."""

from __future__ import annotations

import math

import numpy as np
import pytest
from simulated_campaign import readings, simulate, snapshot

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends import (
    additive,
    age,
    concentration,
    evidence,
    potential,
    solvent,
    temperature,
)
from campaign.trends.heterogeneity import opposed
from campaign.trends.response import RESPONSES
from campaign.trends.sample import source

MODULES = (concentration, solvent, additive, temperature, potential, age)


def found(rows, response="R_ct", facts=None):
    return evidence.findings(snapshot(rows, facts), Criteria(), "film", response)


def decisions(findings):
    return {axis: finding.decision() for axis, finding in findings.items()}


def test_desolvation_reads_as_it_was_made(rng):
    rows = simulate(
        rng, order=0.6, solvents={"PC": 1.0, "DMC": 2.5}, barrier={"PC": 55.0, "DMC": 38.0},
        additives={"none": 1.0, "FEC 2 wt%": 1.0}, potentials=(2.9, 3.1), repeats=1,
    )  # fmt: skip
    findings = found(rows)
    assert tuple(findings) == evidence.AXES
    assert decisions(findings) == {
        "concentration": "responds", "solvent": "responds", "additive": "unresponsive",
        "potential": "unresponsive", "barrier": "responds", "age": "open",
    }  # fmt: skip
    assert findings["concentration"].slope.value == pytest.approx(0.6, abs=0.1)
    assert findings["concentration"].n_specimens == 48
    assert not findings["age"].tested and findings["barrier"].tested


def test_electron_transfer_reads_as_it_was_made(rng):
    rows = simulate(
        rng, order=0.0, solvents={"PC": 1.0, "DMC": 1.0}, potentials=(2.8, 2.9, 3.0, 3.1, 3.2),
        potential_law=lambda E: 4 * (E - 3.0), repeats=1, between=0.12,
    )  # fmt: skip
    assert decisions(found(rows)) == {
        "concentration": "unresponsive", "solvent": "unresponsive", "additive": "open",
        "potential": "responds", "barrier": "unresponsive", "age": "open",
    }  # fmt: skip


def test_series_on_different_sides_of_the_margin_leave_the_electrode_open_and_are_named(rng):
    rows = simulate(rng, order=0.0, solvents={"PC": 1.0}, between=0.08)
    rows += [
        {**row, "cell": "d" + row["cell"]}
        for row in simulate(rng, order=0.6, solvents={"DMC": 1.0}, between=0.08)
    ]
    finding = found(rows)["concentration"]
    assert finding.decision() == "open"
    assert "DMC" in finding.open_because and "PC" in finding.open_because


def test_an_order_that_changes_with_temperature_is_named(rng):
    rows = simulate(rng, order=0.0, between=0.08)
    for row in rows:
        tilt = 0.02 * (row["temperature_K"] - 278.15)
        row["R_ct"] *= math.exp(-tilt * math.log(row["concentration"]))
    finding = found(rows)["concentration"]
    assert finding.decision() == "open" and "278.1 K" in finding.open_because


def test_barriers_that_differ_between_specimens_are_no_heterogeneity():
    """Specimens of one kind with scattering barriers: the order is the same everywhere."""
    open_ = 0
    for seed in range(12):
        rows = simulate(np.random.default_rng(seed), order=0.6, barrier_sd=4.0, cells=2)
        open_ += found(rows)["concentration"].open_because is not None
    assert open_ <= 1


def test_readings_against_a_fixed_reference_do_not_spoil_the_comparable_ones(rng):
    rows = simulate(rng, order=0.5)
    rows += [
        {**row, "cell": "w" + row["cell"], "solvents": "water", "reference": "Ag/AgCl"}
        for row in simulate(rng, order=0.0)
    ]
    finding = found(rows)["concentration"]
    assert finding.decision() == "responds" and finding.n_specimens == 12


def test_shared_coding_gives_the_same_findings(rng):
    campaign = snapshot(simulate(rng))
    coded = source(campaign, Criteria(), "film")
    alone = evidence.findings(campaign, Criteria(), "film", "R_ct")
    assert evidence.findings(campaign, Criteria(), "film", "R_ct", origin=coded) == alone
    several = evidence.of_electrode(campaign, Criteria(), "film", ("R_ct", "R_el"))
    assert several["R_ct"] == alone
    assert not any(finding.tested for finding in several["R_el"].values())


@pytest.mark.parametrize("module", MODULES)
@pytest.mark.parametrize("response", RESPONSES)
def test_every_axis_answers_an_empty_campaign(module, response):
    empty = Snapshot(readings([]), {}, {})
    result = module.estimate(empty, Criteria(), response)
    assert result.estimates == () and result.as_dict()["estimates"] == []


@pytest.mark.parametrize("module", MODULES)
@pytest.mark.parametrize(
    "rows",
    [
        [{"R_ct": 10.0}],
        [{"absent": ("R_sl",), "R_ct": 5.0, "cell": f"c{i}"} for i in range(4)],
        [{"R_ct": 10.0, "cell": f"c{i}", "concentration": 1.0 + i} for i in range(2)],
        [{"R_ct": 10.0, "temperature_K": 280.0 + i, "potential_V": 3.0 + i} for i in range(3)],
        [{"R_ct": 10.0, "measured_at": np.nan, "temperature_K": np.nan, "potential_V": np.nan}] * 3,
        [{"R_ct": 10.0, "cell": f"c{i % 4}", "concentration": 1.0 + i % 4} for i in range(16)],
        [{"R_ct": 10.0 ** (i * 60 - 300), "cell": f"c{i}", "concentration": 1.0 + i,
          "solvents": "AB"[i % 2], "R_ct_se": 1.0} for i in range(10)],
    ],
)  # fmt: skip
@pytest.mark.parametrize("response", ["R_ct", "R_sl", "R_int"])
def test_sparse_and_odd_campaigns_give_sentences(module, rows, response):
    import json

    result = module.estimate(snapshot(rows), Criteria(), response)
    whole = json.dumps(result.as_dict(), allow_nan=False)
    assert result.estimates or result.left_out, whole
    for gone in result.left_out:
        assert gone.reason and gone.count > 0
    for finding in evidence.findings(snapshot(rows), Criteria(), "film", response).values():
        assert finding.decision() in ("open", "responds", "responds, inverse", "unresponsive")


def test_a_large_campaign_is_answered(rng):
    rows = simulate(
        rng, solvents={"PC": 1.0, "DMC": 1.5}, cells=10, repeats=10, potentials=(2.9, 3.0, 3.1)
    )
    findings = found(rows)
    assert findings["concentration"].n_measurements == 12_000
    assert findings["concentration"].decision() == "responds"


def test_spans_on_both_sides_of_the_margin_leave_the_potential_open_and_name_the_split(rng):
    held = {"potentials": (2.8, 3.0, 3.2), "temperatures": (298.15,)}
    rows = simulate(rng, solvents={"PC": 1.0}, **held)
    rows += [
        {**row, "cell": "d" + row["cell"]}
        for row in simulate(rng, solvents={"DMC": 1.0}, potential_law=lambda E: 4 * E, **held)
    ]
    finding = found(rows)["potential"]
    assert finding.decision() == "open"
    assert "DMC" in finding.open_because and "PC" in finding.open_because


def test_drift_in_one_electrolyte_only_is_named(rng):
    def weekly(rng, count, k):
        return 86400.0 * (1 + 7 * k + 0.05 * count)

    rows = simulate(rng, solvents={"PC": 1.0}, ages=weekly, repeats=4)
    rows += [
        {**row, "cell": "d" + row["cell"]}
        for row in simulate(rng, solvents={"DMC": 1.0}, ages=weekly, repeats=4, drift_per_day=0.05)
    ]
    finding = found(rows)["age"]
    assert finding.decision() == "open" and "DMC" in finding.open_because


def test_a_weaker_pair_crossing_the_margin_does_not_open_what_a_stronger_one_decides(rng):
    """DMC differs by more than the margin at every temperature, DEC only when cold."""
    rows = simulate(
        rng, solvents={"PC": 1.0, "DMC": 0.4, "DEC": 1.3}, cells=4, between=0.06,
        barrier={"PC": 50.0, "DMC": 48.0, "DEC": 58.0},
    )  # fmt: skip
    finding = found(rows)["solvent"]
    assert finding.decision() == "responds"
    assert any("ratios differ between strata" in text for text in finding.warnings)


@pytest.mark.parametrize(
    ("effects", "answer"),
    [
        ([{0: 0.0, 1: 1.0}, {0: 0.0, 1: 0.1}], True),
        ([{0: 0.0, 1: 1.0}, {0: 0.0, 1: -1.0}], True),
        ([{0: 0.0, 1: 1.0, 2: 0.6}, {0: 0.0, 1: 0.9, 2: 0.1}], False),
        ([{0: 0.0, 1: 0.1}, {0: 0.0, 1: -0.1}], False),
    ],
)
def test_strata_are_opposed_when_they_would_decide_differently(effects, answer):
    assert opposed(effects, 0.4) is answer
