"""Drift with age, and the square-root law of a growing film."""

from __future__ import annotations

import math

import numpy as np
import pytest
from simulated_campaign import START, simulate, snapshot

from campaign.ledger.criteria import Criteria
from campaign.trends import age


def weekly(rng, count, k):
    return 86400.0 * (1 + 7 * k + 0.05 * count)


def drifts(rows, response="R_ct"):
    return age.estimate(snapshot(rows), Criteria(), response)


def test_a_known_drift_comes_back(rng):
    e = drifts(simulate(rng, drift_per_day=0.03, ages=weekly, repeats=4)).estimates[0]
    assert e.rate_ci[0] < 0.03 < e.rate_ci[1] and e.decision == "responds"
    assert e.drift == pytest.approx(math.exp(0.03 * e.age_span_d), rel=0.1)


def test_no_drift_is_shown(rng):
    assert drifts(simulate(rng, ages=weekly, repeats=4)).estimates[0].decision == "unresponsive"


def test_a_film_has_both_laws(rng):
    rows = simulate(rng, ages=weekly, repeats=5, quantity="R_sl", base=10.0)
    for row in rows:
        row["R_sl"] *= math.exp(0.2 * math.sqrt((row["measured_at"] - START) / 86400))
    found = {e.law: e for e in drifts(rows, "R_sl").estimates}
    assert set(found) == {"log-linear", "square-root"}
    low, high = found["square-root"].rate_ci
    assert low < 0.2 < high
    assert found["square-root"].sigma_within < found["log-linear"].sigma_within


def test_without_assembly_the_age_counts_from_the_first_measurement_and_is_warned(rng):
    rows = simulate(rng, drift_per_day=0.03, ages=weekly, repeats=4)
    for row in rows:
        row["assembled_at"] = np.nan
    e = drifts(rows).estimates[0]
    assert e.rate_ci[0] < 0.03 < e.rate_ci[1]
    assert any("no time of assembly" in text for text in e.warnings)


def test_hours_say_nothing_about_ageing(rng):
    assert drifts(simulate(rng)).estimates[0].decision == "open: ages span less than a day"


def test_nothing_repeated_is_a_reason(rng):
    result = drifts(simulate(rng, repeats=1))
    assert result.estimates == ()
    assert result.left_out[0].reason == "no cell was measured twice under equal conditions"


def test_only_cells_that_were_read_again_count(rng):
    rows = simulate(rng, ages=weekly, repeats=3, concentrations=(1.0,), cells=4)
    last = [row for row in rows if row["cell"] == "cell 4"]
    rows = [row for row in rows if row["cell"] != "cell 4"] + last[::3]
    e = drifts(rows).estimates[0]
    assert e.n_specimens == 3
    assert [(gone.reason, gone.count) for gone in e.left_out] == [
        ("not measured again under equal conditions", 5)
    ]
