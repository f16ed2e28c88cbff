"""Charge transfer, isotherm, Arrhenius, CPE and Warburg against closed forms and papers."""

import math

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from scipy import constants as codata
from scipy.integrate import quad

from campaign.kinetics import arrhenius, charge_transfer, constants, cpe, frumkin, warburg


def test_constants_are_codata():
    # scipy.constants carries the CODATA tables
    assert pytest.approx(codata.R, rel=1e-13) == constants.GAS_CONSTANT
    faraday = codata.physical_constants["Faraday constant"][0]
    assert pytest.approx(faraday, rel=1e-10) == constants.FARADAY_CONSTANT


def test_thermal_voltage_at_25_celsius():
    # 25.69 mV: common knowledge of the trade, e.g. Bard & Faulkner
    assert constants.thermal_voltage(298.15) == pytest.approx(0.025693, abs=1e-6)
    assert constants.thermal_voltage(298.15, 2) == pytest.approx(0.012846, abs=1e-6)


def test_charge_transfer_resistance_of_one_milliampere():
    # 25.693 mV / 1 mA = 25.693 ohm
    assert charge_transfer.charge_transfer_resistance(1e-3, 298.15) == pytest.approx(
        25.693, abs=1e-3
    )
    assert charge_transfer.exchange_current(25.693, 298.15) == pytest.approx(1e-3, rel=1e-4)


@pytest.mark.parametrize("a", [0.3, 0.5, 0.7])
def test_insertion_exchange_current_has_order_one_minus_a_and_its_valley_at_a(a):
    # Doyle, Fuller, Newman 1993: the kinetic law of their equation for the exchange current
    low, high = charge_transfer.insertion_exchange_current(1e-9, np.array([1.0, 2.0]), 0.4, a)
    assert math.log(high / low) / math.log(2) == pytest.approx(1 - a)
    theta = np.linspace(0.001, 0.999, 999)
    current = charge_transfer.insertion_exchange_current(1e-9, 1.0, theta, a)
    assert theta[np.argmax(current)] == pytest.approx(a, abs=0.002)


def test_insertion_exchange_current_by_hand():
    # F * 1e-9 * sqrt(1) * sqrt(0.25 * 0.75)
    value = charge_transfer.insertion_exchange_current(1e-9, 1.0, 0.25)
    assert value == pytest.approx(96485.33212e-9 * math.sqrt(0.1875), rel=1e-9)


def test_frumkin_without_interaction_is_the_cosh_valley():
    E = np.linspace(-0.4, 0.4, 17)
    valley = frumkin.valley_resistance(E + 3.0, 3.0, 0.0, 7.0, 298.15)
    np.testing.assert_allclose(valley, 7 * np.cosh(E / (2 * 0.0256926)), rtol=1e-4)


def test_frumkin_valley_is_the_exchange_current_law_at_half():
    E = np.linspace(2.9, 3.1, 9)
    theta = frumkin.isotherm_occupancy(E, 3.0, 2.5, 298.15)
    current = charge_transfer.insertion_exchange_current(1e-9, 1.0, theta)
    resistance = charge_transfer.charge_transfer_resistance(current, 298.15)
    valley = frumkin.valley_resistance(E, 3.0, 2.5, 1.0, 298.15)
    ratio = resistance / valley
    np.testing.assert_allclose(ratio, ratio[0], rtol=1e-10)


def test_nernstian_width_of_the_isotherm():
    # g = 0: theta falls from 10/11 to 1/11 over 2 RT/F ln 10 = 118.3 mV at 25 C
    low, high = frumkin.isotherm_potential(np.array([10 / 11, 1 / 11]), 3.0, 0.0, 298.15)
    assert high - low == pytest.approx(0.11832, abs=1e-5)


@settings(max_examples=80, deadline=None)
@example(theta=0.099609375, g=50.0, kelvin=230.0, z=1)  # Newton's method alone runs in a cycle
@given(
    theta=st.floats(1e-6, 1 - 1e-6),
    g=st.floats(-3.99, 60),
    kelvin=st.floats(230, 360),
    z=st.sampled_from([1, 2]),
)
def test_isotherm_round_trip(theta, g, kelvin, z):
    E = frumkin.isotherm_potential(theta, 3.3, g, kelvin, z)
    assert frumkin.isotherm_occupancy(E, 3.3, g, kelvin, z) == pytest.approx(theta, abs=1e-8)


@settings(max_examples=40, deadline=None)
@given(g=st.floats(-3.9, 30), a=st.floats(2.5, 3.5), b=st.floats(2.5, 3.5))
def test_occupancy_falls_with_potential(g, a, b):
    low, high = frumkin.isotherm_occupancy(np.array(sorted((a, b))), 3.0, g, 298.15)
    assert high <= low


@pytest.mark.parametrize("g", [-4.0, -6.0, math.nan])
def test_two_phases_are_undefined(g):
    with pytest.raises(frumkin.IsothermUndefined, match="two phases"):
        frumkin.valley_resistance(3.0, 3.0, g, 1.0, 298.15)
    with pytest.raises(ValueError, match="g > -4"):
        frumkin.isotherm_occupancy(3.0, 3.0, g, 298.15)


def test_arrhenius_acetaldehyde():
    # Atkins, Physical Chemistry (from memory): Ea 188 kJ/mol, ln A 27.7
    T = np.array([700, 730, 760, 790, 810, 840, 910, 1000.0])
    k = np.array([0.011, 0.035, 0.105, 0.343, 0.789, 2.17, 20.0, 145])
    line = arrhenius.arrhenius_line(T, 1 / k)
    assert line.barrier_kJ_mol == pytest.approx(188, abs=1)
    assert -line.log_prefactor == pytest.approx(27.7, abs=0.1)
    assert line.form == "ln R"


@pytest.mark.parametrize("barrier", [23.0, 40.0, 58.0])
def test_the_two_forms_differ_by_rt(barrier):
    T = np.linspace(288.15, 308.15, 41)
    R = np.exp(barrier * 1000 / (8.314462618 * T))
    plain = arrhenius.arrhenius_line(T, R)
    over_t = arrhenius.arrhenius_line(T, R, "ln(R/T)")
    assert plain.barrier_kJ_mol == pytest.approx(barrier, rel=1e-9)
    assert over_t.barrier_kJ_mol - barrier == pytest.approx(2.479, abs=0.01)
    converted = arrhenius.convert_barrier(barrier, 298.15, "ln R", "ln(R/T)")
    assert converted == pytest.approx(over_t.barrier_kJ_mol, abs=0.01)
    assert arrhenius.convert_barrier(converted, 298.15, "ln(R/T)", "ln R") == pytest.approx(barrier)


def test_brug_by_hand_and_its_limits():
    # n = 0.5, Q = 1e-4, R_el = 10, R = 90: 1e-8 * (1/9)^-1 = 9e-8
    assert cpe.brug_capacitance(10.0, 90.0, 1e-4, 0.5) == pytest.approx(9e-8)
    assert cpe.brug_capacitance(10.0, 90.0, 2e-5, 1.0) == pytest.approx(2e-5)


@settings(max_examples=60)
@given(r_el=st.floats(0.1, 1e3), r=st.floats(0.1, 1e6), q=st.floats(1e-8, 1), n=st.floats(0.4, 1))
def test_hsu_mansfeld_is_tau_over_r_and_the_limit_of_brug(r_el, r, q, n):
    surface = cpe.hsu_mansfeld_capacitance(r, q, n)
    assert surface == pytest.approx(cpe.time_constant(r, q, n) / r, rel=1e-9)
    # without an electrolyte resistance in the way, Brug's form becomes Hsu and Mansfeld's
    assert cpe.brug_capacitance(1e300, r, q, n) == pytest.approx(surface, rel=1e-9)
    assert cpe.brug_capacitance(r_el, r, q, n) <= surface * (1 + 1e-12)


def test_apex_of_the_arc_lies_at_the_time_constant():
    r, q, n = 120.0, 3e-5, 0.82
    tau = float(cpe.time_constant(r, q, n))
    omega = np.geomspace(0.5 / tau, 2 / tau, 2001)
    z = r / (1 + r * q * (1j * omega) ** n)
    assert omega[np.argmax(-z.imag)] == pytest.approx(1 / tau, rel=1e-3)


def test_warburg_impedance_has_45_degrees():
    z = warburg.impedance(5.0, np.array([1.0, 4.0]))
    np.testing.assert_allclose(z, [5 - 5j, 2.5 - 2.5j])


def test_warburg_step_is_the_transform_of_the_impedance():
    # response to a unit step = (2/pi) integral of Re Z(omega) sin(omega t)/omega d omega,
    # by QUADPACK with omega = u^2, at t = 1 and sigma_w = 1
    integral, _ = quad(
        lambda u: 2 * float(warburg.impedance(1.0, u * u).real) * math.sin(u * u) / u,
        1e-9, 12, limit=2000,
    )  # fmt: skip
    assert warburg.step_resistance(1.0, 1.0) == pytest.approx(2 / math.pi * integral, rel=1e-3)


def test_diffusion_resistance_joins_warburg_and_dc_limit():
    sigma, length, d = 3.0, 1e-5, 1e-12
    r_d = float(warburg.diffusion_resistance(sigma, length, d))
    tau = warburg.diffusion_time(length, d)
    assert tau == pytest.approx(100)

    def element(s):
        x = np.sqrt(s * tau)
        return r_d / (np.tanh(x) * x)

    omega = 1e5
    assert element(1j * omega) == pytest.approx(warburg.impedance(sigma, omega), rel=1e-6)
    slow = 1e-6
    assert element(1j * slow).real == pytest.approx(r_d / 3, rel=1e-4)


def test_step_is_capped_at_a_third_of_the_diffusion_resistance():
    free = warburg.capped_step_resistance(3.0, 1e6)
    capped = warburg.capped_step_resistance(3.0, np.array([1e-3, 1e6]), 1e-5, 1e-12)
    assert free == pytest.approx(6 * math.sqrt(2e6 / math.pi))
    assert capped[0] == pytest.approx(float(warburg.step_resistance(3.0, 1e-3)))
    assert capped[1] == pytest.approx(math.sqrt(2) * 3.0 * 1e-5 / 1e-6 / 3)


def test_diffusivity_from_the_warburg_coefficient():
    # Ho, Raistrick, Huggins 1980, their relation worked by hand:
    # 30 cm3/mol * 0.5 V / (sqrt 2 * 96485 C/mol * 10 ohm cm2 s^-1/2), squared
    by_hand = (15 / (1.41421356 * 96485.332 * 10)) ** 2
    assert warburg.diffusivity(10.0, -0.5, 30.0) == pytest.approx(by_hand, rel=1e-6)
