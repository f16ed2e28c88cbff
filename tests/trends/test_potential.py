"""Span, laws and plateaus over the potential."""

from __future__ import annotations

import math

import numpy as np
import pytest
from simulated_campaign import FARADAY, GAS, simulate, snapshot

from campaign.kinetics.frumkin import valley_resistance
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrodeFacts, Plateau
from campaign.trends import potential

POTENTIALS = (2.8, 2.88, 2.96, 3.04, 3.12, 3.2)
ONE_T = (298.15,)


def spans(rows, facts=None, **options):
    return potential.estimate(snapshot(rows, facts), Criteria(), **options)


def campaign(rng, law, **options):
    settings = {"potentials": POTENTIALS, "temperatures": ONE_T, "cells": 3, **options}
    return simulate(rng, potential_law=law, slope_sd=0.05, **settings)


def cosh_valley(E):
    """g = 0: R_min cosh(zF(E - E0)/2RT) (Levi & Aurbach, Electrochim. Acta 45 (1999) 167)."""
    return np.log(np.cosh(FARADAY * (E - 3.02) / (2 * GAS * 298.15)))


def test_a_flat_response_is_shown(rng):
    e = spans(campaign(rng, lambda E: 0 * E)).estimates[0]
    assert e.law == "flat" and e.decision == "unresponsive"
    assert e.span_ci[0] >= 1.0 and e.E0_V is None and e.g is None


def test_an_exponential_is_recognised_with_its_slope(rng):
    e = spans(campaign(rng, lambda E: -3.0 * (E - 3.0))).estimates[0]
    assert e.law == "exponential" and e.decision == "responds"
    assert e.slope_ci[0] < -3.0 < e.slope_ci[1]
    assert e.span_ci[0] < math.exp(1.2) < e.span_ci[1]


def test_the_cosh_valley_is_recognised_with_no_interaction(rng):
    e = spans(campaign(rng, cosh_valley)).estimates[0]
    assert e.law == "valley" and e.decision == "responds"
    assert e.E0_ci[0] < 3.02 < e.E0_ci[1]
    assert e.g_ci[0] < 0.0 < e.g_ci[1]
    assert {"law", "span", "span_ci", "E0_V", "g", "decision"} <= e.as_dict().keys()


@pytest.mark.parametrize("g", [-2.0, 4.0])
def test_interaction_is_recovered(g):
    rng = np.random.default_rng(3)

    def law(E):
        return np.log(valley_resistance(E, 3.0, g, 1.0, 298.15))

    e = spans(campaign(rng, law)).estimates[0]
    assert e.law == "valley"
    assert e.g_ci[0] < g < e.g_ci[1] and e.E0_ci[0] < 3.0 < e.E0_ci[1]


def test_few_specimens_leave_the_law_open_but_not_the_span(rng):
    e = spans(campaign(rng, cosh_valley, cells=3, concentrations=(1.0,))).estimates[0]
    assert e.law == "open" and e.decision == "responds"
    assert any("too few" in text for text in e.warnings)


def test_one_specimen_has_a_span_without_interval(rng):
    e = spans(campaign(rng, cosh_valley, cells=1, concentrations=(1.0,))).estimates[0]
    assert e.span > 10 and e.span_ci is None and e.decision == "open"
    assert any("one specimen" in text for text in e.warnings)


def test_a_narrow_window_cannot_show_no_effect_but_can_show_one(rng):
    narrow = (3.0, 3.02, 3.04)
    flat = spans(campaign(rng, lambda E: 0 * E, potentials=narrow)).estimates[0]
    assert flat.decision == "open: window too narrow"
    steep = spans(campaign(rng, lambda E: 40 * E, potentials=narrow)).estimates[0]
    assert steep.decision == "responds"


def test_repeated_readings_never_narrow_the_span_below_the_specimens():
    """Slopes differ by 3 /V between specimens: 40 readings each change little."""
    widths = []
    for repeats in (2, 40):
        rows = simulate(
            np.random.default_rng(2), potentials=(2.9, 3.1), temperatures=ONE_T, cells=3,
            concentrations=(1.0,), repeats=repeats, slope_sd=3.0,
        )  # fmt: skip
        e = spans(rows).estimates[0]
        assert e.df == 2.0
        widths.append(math.log(e.span_ci[1]))
    assert widths[1] > 2.0 * math.log(1.5)


def test_plateau_points_are_kept_out_and_counted(rng):
    facts = ElectrodeFacts("film", "NaMO2", "Na", 1, plateaus=(Plateau(2.95, 3.05, "Na/Na+"),))
    rows = campaign(rng, lambda E: np.where(abs(E - 3.0) < 0.05, 3.0, 0.0))
    e = spans(rows, facts).estimates[0]
    inside = sum(abs(row["potential_V"] - 3.0) < 0.05 for row in rows)
    assert [(gone.reason, gone.count) for gone in e.left_out] == [
        ("in a declared two-phase plateau", inside)
    ]
    assert e.decision == "unresponsive"


def test_each_reference_scale_is_its_own_series(rng):
    rows = campaign(rng, lambda E: 0 * E)
    for row in rows:
        if int(row["cell"][5:]) % 2:
            row.update(reference="Ag/AgCl", potential_V=row["potential_V"] - 2.9)
    found = spans(rows).estimates
    assert sorted(e.reference for e in found) == ["Ag/AgCl", "Na/Na+"]
    assert {e.decision for e in found} == {"unresponsive"}


def test_no_potential_and_a_single_one_are_reasons(rng):
    rows = simulate(rng, configuration="symmetric", reference="")
    for row in rows:
        row["potential_V"] = np.nan
    assert "no readings" in spans(rows).left_out[0].reason
    assert "two potentials" in spans(simulate(rng)).left_out[0].reason


def test_a_potential_seen_in_one_specimen_only_is_named_and_not_compared(rng):
    rows = campaign(rng, lambda E: 0 * E)
    rows += [{**row, "potential_V": 3.5} for row in rows if row["cell"] == "cell 1"][:3]
    e = spans(rows).estimates[0]
    assert e.decision == "unresponsive" and max(e.levels) == pytest.approx(3.2)
    assert any("one specimen only" in text and "3.5 V" in text for text in e.warnings)


def test_against_a_fixed_reference_potentials_count_from_the_half_filling(rng):
    """Each concentration has its own half-filling potential and its own set potentials."""
    rows = campaign(rng, cosh_valley, cells=2)
    for row in rows:
        half = 0.2 + GAS * 298.15 / FARADAY * math.log(row["concentration"])
        row.update(reference="Ag/AgCl", potential_V=row["potential_V"] - 3.02 + half, E_half_V=half)
    e = spans(rows).estimates[0]
    assert e.decision == "responds" and len(e.levels) == len(POTENTIALS)
    assert e.law == "valley" and any("half-filling" in text for text in e.warnings)
    middle = np.median([row["E_half_V"] for row in rows])
    assert e.E0_ci[0] < middle < e.E0_ci[1]


def test_electrolytes_together_decide_a_law_that_single_ones_leave_open(rng):
    held = {"cells": 1, "concentrations": (0.3, 1.0, 3.0)}
    rows = campaign(rng, cosh_valley, solvents={"PC": 1.0, "DMC": 2.0, "DEC": 1.0}, **held)
    assert {e.law for e in spans(rows).estimates} == {"open"}
    whole = spans(rows, together=True).estimates
    assert [e.law for e in whole] == ["valley"]
    assert whole[0].solvents == "DEC; DMC; PC" and whole[0].n_specimens == 9
