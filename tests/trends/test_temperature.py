"""Barriers in both Arrhenius forms and their differences."""

from __future__ import annotations

import math

import numpy as np
import pytest
from simulated_campaign import FARADAY, GAS, START, simulate, snapshot, with_facts

from campaign.kinetics.porous import apparent_resistance
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrolyteFacts
from campaign.trends import temperature


def barriers(rows, facts=None, **options):
    return temperature.estimate(snapshot(rows, facts), Criteria(), **options)


def test_a_known_barrier_comes_back_in_both_forms(rng):
    e = barriers(simulate(rng, barrier=52.0, barrier_sd=2.0)).estimates[0]
    assert e.Ea_ci[0] < 52.0 < e.Ea_ci[1]
    assert 1.0 < e.sigma_between < 4.0
    # ln(R/T) lies RT higher; near 298 K that is 2.48 kJ/mol
    assert e.Ea_lnRT_kJ_mol - e.Ea_kJ_mol == pytest.approx(GAS * 298.15 / 1000, abs=0.05)
    assert {"Ea_kJ_mol", "Ea_ci", "Ea_lnRT_kJ_mol", "Ea_lnRT_ci"} <= e.as_dict().keys()


def test_acetaldehyde_of_the_textbook_is_one_specimen_without_interval():
    """Atkins, Physical Chemistry (from memory; recomputed 188.3 kJ/mol): R stands for 1/k."""
    T = (700, 730, 760, 790, 810, 840, 910, 1000)
    k = (0.011, 0.035, 0.105, 0.343, 0.789, 2.17, 20.0, 145)
    rows = [{"temperature_K": float(t), "R_ct": 1 / value} for t, value in zip(T, k, strict=True)]
    e = barriers(rows).estimates[0]
    assert e.Ea_kJ_mol == pytest.approx(188.3, abs=0.05)
    assert e.Ea_ci is None and any("one specimen" in text for text in e.warnings)


PUBLISHED = {
    # Yamada, Iriyama, Abe, Ogumi, Langmuir 25 (2009) 12766: graphite, LiClO4
    "EC:DMC (1:1 v/v)": 58.0, "DMC": 40.0,
    # Nakayama et al., J. Power Sources 174 (2007) 695: LiMn2O4 film
    "PC": 50.0, "water": 24.0,
}  # fmt: skip


def test_published_barriers_keep_their_order(rng):
    """Generated at the published values: this tests the analysis, not nature."""
    rows = simulate(
        rng, barrier=PUBLISHED, solvents=dict.fromkeys(PUBLISHED, 1.0), concentrations=(1.0,),
        cells=4, barrier_sd=1.0,
    )  # fmt: skip
    result = barriers(rows)
    found = {e.solvents: e.Ea_kJ_mol for e in result.estimates}
    assert sorted(found, key=found.get) == sorted(PUBLISHED, key=PUBLISHED.get)
    for d in result.differences:
        truth = PUBLISHED[d.a] - PUBLISHED[d.b]
        assert d.difference_ci[0] < truth < d.difference_ci[1]
    decisions = {frozenset((d.a, d.b)): d.decision for d in result.differences}
    assert decisions[frozenset(("EC:DMC (1:1 v/v)", "DMC"))] == "responds"


def test_equal_barriers_are_shown_to_be_equal(rng):
    rows = simulate(rng, solvents={"PC": 1.0, "DMC": 3.0}, barrier_sd=1.0)
    assert [d.decision for d in barriers(rows).differences] == ["unresponsive"]


def test_additives_are_compared_with_the_free_blend(rng):
    rows = simulate(rng, additives={"none": 1.0, "FEC 2 wt%": 1.2, "VC 1 wt%": 1.0})
    found = barriers(rows).differences
    assert {(d.compared, d.b) for d in found} == {("additives", "none")} and len(found) == 2


def test_more_readings_of_two_specimens_do_not_narrow_the_interval():
    widths = []
    for repeats in (2, 40):
        rng = np.random.default_rng(11)
        rows = simulate(rng, cells=2, concentrations=(1.0,), barrier_sd=3.0, repeats=repeats)
        e = barriers(rows).estimates[0]
        assert e.df == 1.0
        assert e.Ea_ci[1] - e.Ea_ci[0] > 2 * 12.7 * 0.5 * e.sigma_between / math.sqrt(2)
        widths.append(e.Ea_ci[1] - e.Ea_ci[0])
    assert all(width > 5.0 for width in widths)


def test_one_temperature_is_a_reason(rng):
    result = barriers(simulate(rng, temperatures=(298.15,)))
    assert result.estimates == () and result.differences == ()
    assert result.left_out[0].reason == "no specimen was measured at two temperatures in one state"


def test_a_fixed_reference_leaves_the_barrier_open(rng):
    e = barriers(simulate(rng, reference="Ag/AgCl")).estimates[0]
    assert e.decision == "open: potential not comparable"
    assert e.Ea_ci is not None


def test_ageing_during_the_ramp_is_called_confounding(rng):
    def one_ramp(rng, count, k):
        return 86400.0 * (count + 3 * k)

    rows = simulate(rng, drift_per_day=0.02, ages=one_ramp, repeats=2)
    e = barriers(rows).estimates[0]
    assert any(text.startswith("confounded: temperature") for text in e.warnings)
    assert abs(e.Ea_kJ_mol - 50.0) > 1.0
    assert abs(e.adjusted.value - 50.0) < 1.0


def test_pores_are_taken_out_of_the_barrier(rng):
    """R_ion follows 1/conductivity with a barrier of 10 kJ/mol; R_ct has 50 kJ/mol."""
    T = (278.15, 288.15, 298.15, 308.15, 318.15)
    kappa = {t: 0.01 * math.exp(-10e3 / GAS * (1 / t - 1 / 298.15)) for t in T}
    rows = simulate(rng, base=40.0, concentrations=(1.0,), electrolyte="e")
    for row in rows:
        ion = 80.0 * 0.01 / kappa[row["temperature_K"]]
        row["R_ct"] = float(apparent_resistance(row["R_ct"], ion))
        row["R_ct_se"] = 0.01 * row["R_ct"]
    campaign = with_facts(
        snapshot(rows, electrolytes=[ElectrolyteFacts("e", conductivity=tuple(kappa.items()))]),
        pore_resistance_ohm_cm2=80.0, pore_electrolyte="e", pore_temperature_K=298.15,
    )  # fmt: skip
    solved = temperature.estimate(campaign, Criteria()).estimates[0]
    assert solved.Ea_kJ_mol == pytest.approx(50.0, abs=1.5) and solved.decision is None
    apparent = temperature.estimate(campaign, Criteria(), porous=False).estimates[0]
    assert 30.0 < apparent.Ea_kJ_mol < 45.0


def test_missing_assembly_times_do_no_harm(rng):
    rows = simulate(rng, concentrations=(1.0,))
    for row in rows:
        row["assembled_at"] = np.nan
        row["measured_at"] = START
    assert barriers(rows).estimates[0].Ea_ci is not None


def test_a_half_filling_potential_that_moves_shifts_the_barrier_and_the_content_removes_it(rng):
    """One potential is another ion content at every temperature; R_ct(E) is the cosh valley.

    At equal content the valley is the same at all temperatures and the barrier is the truth.
    At one potential against a fixed reference, 0.15 V from half-filling, it adds
    F 0.15 V / 2 = 7.2 kJ/mol on the flank (by differentiating ln cosh(F(E - E0)/2RT)).
    """
    c, E0 = 0.1, 0.20

    def campaign(follow):
        rows = simulate(rng, concentrations=(c,), cells=6, barrier=45.0, reference="Ag/AgCl")
        for row in rows:
            T = row["temperature_K"]
            half = E0 + GAS * T / FARADAY * math.log(c)
            E = half + 0.15 * T / 298.15 if follow else E0 + 0.15
            valley = math.log(math.cosh(FARADAY * (E - half) / (2 * GAS * T)))
            row["potential_V"] = E
            row["R_ct"] *= math.exp(valley)
            if follow:
                row["ion_content"] = 0.1
        return rows

    wrong = barriers(campaign(False)).estimates[0]
    assert wrong.Ea_kJ_mol - 45.0 == pytest.approx(FARADAY * 0.15 / 2000, abs=1.5)
    assert wrong.decision == "open: potential not comparable"
    right = barriers(campaign(True)).estimates[0]
    assert right.Ea_ci[0] < 45.0 < right.Ea_ci[1] and right.decision is None


def test_barriers_that_change_with_concentration_are_warned(rng):
    rows = simulate(rng, concentrations=(0.1, 1.0), cells=5)
    for row in rows:
        if row["concentration"] == 0.1:
            row["R_ct"] *= math.exp(10e3 / GAS * (1 / row["temperature_K"] - 1 / 298.15))
    assert any("barriers differ with" in text for text in barriers(rows).estimates[0].warnings)
