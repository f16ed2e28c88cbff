"""The porous electrode against its limits, the transmission line itself, and its inverse."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.kinetics import porous

POSITIVE = st.floats(1e-4, 1e6)


def test_thin_and_thick_limits():
    # Ogihara et al. 2012: R_ct + R_ion/3 for small R_ion; sqrt(R_ion R_ct) for large
    assert porous.apparent_resistance(100.0, 0.3) == pytest.approx(100.1, abs=1e-3)
    assert porous.apparent_resistance(0.01, 100.0) == pytest.approx(1.0)


def test_agrees_with_a_ladder_of_resistors():
    # the transmission line as 4000 slices, reduced from the closed end
    r_ct, r_ion, slices = 40.0, 90.0, 4000
    leak, series = r_ct * slices, r_ion / slices
    z = math.inf
    for _ in range(slices):
        z = 1 / (1 / (z + series / 2) + 1 / leak) + series / 2
    assert porous.apparent_resistance(r_ct, r_ion) == pytest.approx(z, rel=1e-5)


@settings(max_examples=100, deadline=None)
@given(r_ct=POSITIVE, r_ion=POSITIVE)
def test_inverse_round_trip(r_ct, r_ion):
    apparent = porous.apparent_resistance(r_ct, r_ion)
    # R_app = R_ct + R_ion/3 + ...: where R_ct is a small part of it, digits are lost
    assert porous.charge_transfer_from_apparent(apparent, r_ion) == pytest.approx(r_ct, rel=1e-8)


def test_inverse_is_vectorised_and_gives_nan_for_the_impossible():
    found = porous.charge_transfer_from_apparent(np.array([1.0, 0.0, -2.0, np.nan]), 5.0)
    assert np.isfinite(found[0])
    assert np.isnan(found[1:]).all()


def test_below_a_third_of_the_pore_resistance_there_is_still_one_solution():
    found = porous.charge_transfer_from_apparent(1.0, 100.0)
    assert found == pytest.approx(0.01, rel=1e-6)
    assert not porous.penetrated(1.0, 100.0)
    assert porous.penetrated(40.0, 100.0)


@settings(max_examples=50)
@given(r_ct=POSITIVE, r_ion=POSITIVE)
def test_sensitivity_is_the_log_derivative(r_ct, r_ion):
    h = 1e-5
    up, down = (float(porous.apparent_resistance(r_ct * math.exp(d), r_ion)) for d in (h, -h))
    slope = (math.log(up) - math.log(down)) / (2 * h)
    assert porous.sensitivity(r_ct, r_ion) == pytest.approx(slope, abs=1e-5)


def test_thick_pores_halve_the_barrier():
    # Ogihara et al. 2012: sqrt(R_ion R_ct) carries half the barrier of R_ct
    T = np.array([280.0, 300.0])
    r_ct = 0.1 * np.exp(60e3 / 8.314462618 * (1 / T - 1 / 300))
    apparent = porous.apparent_resistance(r_ct, 1e4)
    barrier = 8.314462618e-3 * math.log(apparent[0] / apparent[1]) / (1 / T[0] - 1 / T[1])
    assert barrier == pytest.approx(30, rel=1e-6)


def test_conductivity_scales_the_pore_resistance():
    table = ((273.15, 4e-3), (298.15, 8e-3), (323.15, 13e-3))
    assert porous.conductivity_at(table, 298.15) == pytest.approx(8e-3)
    # Arrhenius between two points: the geometric mean lies at the harmonic mean temperature
    middle = 2 / (1 / 273.15 + 1 / 298.15)
    assert porous.conductivity_at(table, middle) == pytest.approx(math.sqrt(32e-6))
    assert porous.conductivity_at(table, 340.0) is None
    assert porous.conductivity_at((), 300.0) is None
    assert porous.scaled_pore_resistance(30.0, 8e-3, 4e-3) == pytest.approx(60.0)
