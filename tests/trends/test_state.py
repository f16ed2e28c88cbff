"""The comparability rule: what holds the state of the electrode, and in which order."""

from __future__ import annotations

import numpy as np
from simulated_campaign import snapshot

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrodeFacts, Plateau
from campaign.trends.conditions import condition
from campaign.trends.sample import comparable, draw, source
from campaign.trends.state import state


def coded(rows, facts=None, scale=None):
    return condition(
        snapshot([{"R_ct": 10.0, **row} for row in rows], facts), Criteria(), "film", scale=scale
    )


def same(codes) -> bool:
    return len(set(codes.tolist())) == 1


def test_recorded_ion_content_comes_first():
    rows = [
        {"ion_content": x, "potential_V": E, "E_half_V": 0.0} for x, E in ((0.5, 3.0), (0.51, 3.4))
    ]
    held = state(coded(rows))
    assert same(held.code) and held.comparable


def test_then_the_distance_from_half_filling_whatever_the_reference():
    rows = [
        {"reference": "Ag/AgCl", "potential_V": 0.30, "E_half_V": 0.25},
        {"reference": "Ag/AgCl", "potential_V": 0.36, "E_half_V": 0.31},
    ]
    held = state(coded(rows))
    assert same(held.code) and held.comparable


def test_then_the_same_ions_electrode_but_not_another_metal():
    own = [
        {"reference": "Na/Na+", "potential_V": 3.0},
        {"reference": "Na/Na+", "potential_V": 3.002},
    ]
    assert same(state(coded(own)).code) and state(coded(own)).comparable
    other = [{**row, "reference": "Li/Li+"} for row in own]
    assert not state(coded(other)).held.any()


def test_a_fixed_reference_does_not_hold_the_state():
    held = state(coded([{"reference": "Ag/AgCl", "potential_V": 0.3}] * 2))
    assert same(held.code) and not held.held.any()


def test_symmetric_cells_without_potential_are_comparable():
    held = state(
        coded([{"configuration": "symmetric", "potential_V": np.nan, "reference": ""}] * 3)
    )
    assert same(held.code) and held.comparable


def test_different_references_never_share_a_stratum_without_a_scale():
    rows = [
        {"reference": "Ag/AgCl", "potential_V": 0.30},
        {"reference": "SCE", "potential_V": 0.30},
        {"reference": "SCE", "potential_V": 0.2558},
    ]
    alone = coded(rows)
    assert len(set(alone.fixed.tolist())) == 3
    # 0.30 V against Ag/AgCl (0.197 V) is 0.2558 V against SCE (0.2412 V)
    placed = coded(rows, scale="SHE")
    assert placed.fixed[0] == placed.fixed[2] != placed.fixed[1]
    assert not state(placed).held.any()


def test_a_reference_without_offset_stays_on_its_own_scale_and_is_said():
    placed = coded([{"reference": "Ag/Ag+"}, {"reference": "SCE"}], scale="SHE")
    assert len(set(placed.fixed.tolist())) == 2
    assert any("left on their own scale" in text for text in placed.warnings)


def test_readings_that_are_not_held_are_left_out_when_others_are():
    rows = [{"reference": "Na/Na+"}] * 3 + [{"reference": "Ag/AgCl", "potential_V": 0.3}]
    campaign = snapshot([{"R_ct": 10.0, **row} for row in rows])
    s = comparable(draw(campaign, source(campaign, Criteria(), "film"), "R_ct"))
    assert len(s) == 3 and s.open_because is None
    assert [(gone.reason, gone.count) for gone in s.left_out] == [("potential not comparable", 1)]


def test_in_a_plateau_only_the_ion_content_holds_the_state():
    facts = ElectrodeFacts("film", "NaMO2", "Na", 1, plateaus=(Plateau(2.9, 3.1, "Na/Na+"),))
    rows = [{"potential_V": 3.0}, {"potential_V": 3.3}]
    assert state(coded(rows, facts)).lost.tolist() == [True, False]
    known = [{**row, "ion_content": 0.5} for row in rows]
    assert not state(coded(known, facts)).lost.any()
    elsewhere = coded([{"potential_V": 0.3, "reference": "SCE"}], facts)
    assert any("could not be checked" in text for text in elsewhere.warnings)
