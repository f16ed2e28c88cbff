"""The response: per area, per interface, derived sums, missing errors, pores."""

from __future__ import annotations

import numpy as np
import pytest
from simulated_campaign import readings, snapshot

from campaign.errors import Refused
from campaign.kinetics.porous import apparent_resistance
from campaign.ledger.readings import ElectrodeFacts, ElectrolyteFacts
from campaign.trends.pores import OPEN_BECAUSE, Pores
from campaign.trends.response import respond


def test_area_specific_value_and_relative_error():
    r = respond(readings([{"area_cm2": 0.5, "R_ct": 40.0, "R_ct_se": 0.8}]), "R_ct")
    assert r.y[0] == pytest.approx(np.log(20.0))
    assert r.variance[0] == pytest.approx(0.02**2)
    assert r.unit == "ohm cm2" and not r.filled[0]


@pytest.mark.parametrize(
    ("quantity", "share"),
    [("R_el", 1.0), ("R_sl", 0.5), ("R_ct", 0.5), ("R_lat", 0.5), ("sigma_w", 0.5)],
)
def test_a_symmetric_cell_has_two_interfaces_but_one_electrolyte(quantity, share):
    row = {"configuration": "symmetric", quantity: 10.0, "area_cm2": 2.0}
    assert respond(readings([row]), quantity).y[0] == pytest.approx(np.log(20.0 * share))


def test_interfacial_sum_absent_adds_zero_and_not_fitted_makes_it_missing():
    rows = [
        {"R_sl": 3.0, "R_sl_se": 0.3, "R_ct": 4.0, "R_ct_se": 0.4, "R_lat": 5.0, "R_lat_se": 0.5},
        {"absent": ("R_sl",), "R_ct": 4.0, "R_ct_se": 0.4, "R_lat": 5.0, "R_lat_se": 0.5},
        {"R_ct": 4.0, "R_ct_se": 0.4, "R_lat": 5.0, "R_lat_se": 0.5},
        {"absent": ("R_sl", "R_ct", "R_lat")},
    ]
    r = respond(readings(rows), "R_int")
    assert np.exp(r.y[:2]) == pytest.approx([12.0, 9.0])
    assert np.sqrt(r.variance[:2]) == pytest.approx(
        [np.sqrt(0.3**2 + 0.4**2 + 0.5**2) / 12, np.hypot(0.4, 0.5) / 9]
    )
    assert np.isnan(r.y[2:]).all() and r.absent.tolist() == [False, False, False, True]


def test_a_missing_error_takes_the_median_relative_one_and_is_flagged():
    rows = [{"R_ct": 10.0, "R_ct_se": 10.0 * rel} for rel in (0.01, 0.02, 0.09)] + [{"R_ct": 50.0}]
    r = respond(readings(rows), "R_ct")
    assert np.sqrt(r.variance[3]) == pytest.approx(0.02)
    assert r.filled.tolist() == [False, False, False, True]
    assert any("1 values without a standard error" in text for text in r.warnings)


def test_without_any_error_the_scatter_stands_for_it():
    r = respond(readings([{"R_ct": 10.0}, {"R_ct": 11.0}]), "R_ct")
    assert r.variance.tolist() == [0.0, 0.0] and r.filled.all()
    assert "scatter between readings" in r.warnings[0]


def test_an_unknown_response_is_refused_with_the_known_ones():
    with pytest.raises(Refused, match="no response R_x"):
        respond(readings([{"R_ct": 1.0}]), "R_x")


def porous_film(**facts):
    return ElectrodeFacts("film", "NaMO2", "Na", 1, pore_resistance_ohm_cm2=30.0, **facts)


def test_charge_transfer_is_solved_from_the_apparent_value_with_scaled_pores():
    # conductivity halves from 298 to 278 K, so that R_ion doubles
    table = ((278.15, 0.005), (298.15, 0.010))
    facts = porous_film(pore_electrolyte="here", pore_temperature_K=298.15)
    rows = [
        {"electrolyte": "here", "temperature_K": T, "R_ct": float(apparent_resistance(50.0, ion)),
         "R_ct_se": 0.5}
        for T, ion in ((298.15, 30.0), (278.15, 60.0))
    ]  # fmt: skip
    r = readings(rows)
    pores = Pores(facts, {"here": ElectrolyteFacts("here", conductivity=table)})
    solved = respond(r, "R_ct", pores)
    assert np.exp(solved.y) == pytest.approx([50.0, 50.0])
    assert solved.open_because is None
    # the relative error grows by d ln R_ct / d ln R_app > 1
    assert np.all(solved.variance > respond(r, "R_ct").variance)


def test_pores_that_cannot_be_scaled_leave_concentration_and_barrier_open():
    campaign = snapshot([{"R_ct": 60.0, "electrolyte": "other"}], porous_film())
    solved = respond(campaign.readings, "R_ct", Pores(porous_film(), campaign.electrolytes))
    assert solved.open_because == OPEN_BECAUSE
    assert any("could not be scaled" in text for text in solved.warnings)
    small = ElectrodeFacts("film", "NaMO2", "Na", 1, pore_resistance_ohm_cm2=1.0)
    assert respond(campaign.readings, "R_ct", Pores(small, {})).open_because is None
