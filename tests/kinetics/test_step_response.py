"""The Mittag-Leffler function against closed forms and its definition."""

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.special import erfcx, gamma

from campaign.kinetics.step_response import arc_response, mittag_leffler

WIDE = np.concatenate([[0.0], 10.0 ** np.linspace(-8, 8, 81)])


def test_exponent_one_is_the_exponential():
    np.testing.assert_allclose(mittag_leffler(1.0, WIDE), np.exp(-WIDE), atol=1e-13)


def test_exponent_one_half_is_erfcx():
    # SciPy's erfcx: an implementation outside the project
    np.testing.assert_allclose(mittag_leffler(0.5, WIDE), erfcx(WIDE), rtol=1e-12)


@pytest.mark.parametrize("n", [0.01, 0.1, 0.3, 0.5, 0.69, 0.71, 0.85, 0.97, 0.9999, 1 - 1e-9])
@pytest.mark.parametrize("x", [0.01, 0.2, 0.7])
def test_power_series_of_the_definition(n, x):
    # Mittag-Leffler (1903): E_n(z) = sum of z^k / Gamma(1 + nk)
    last = min(150, int(165 / n))
    series = math.fsum((-x) ** k / gamma(1 + n * k) for k in range(last))
    assert mittag_leffler(n, x) == pytest.approx(series, abs=1e-11)


@pytest.mark.parametrize("n", [0.3, 0.6, 0.69, 0.71, 0.8, 0.95, 0.99])
@pytest.mark.parametrize("x", [0.05, 1.0, 4.0, 60.0])
def test_numerical_integration_of_the_spectral_representation(n, x):
    # Gorenflo & Mainardi (1997), the form in ln r, by QUADPACK
    t = x ** (1 / n)

    def density(u):
        power = math.exp(n * u)
        below = power * power + 2 * power * math.cos(n * math.pi) + 1
        return math.exp(-t * math.exp(u)) * power / below

    edges = (-60 / n, -4, -0.5, -0.02, 0, 0.02, 0.5, 4, 40)
    total = sum(
        quad(density, low, high, epsabs=1e-13, limit=400)[0]
        for low, high in itertools.pairwise(edges)
    )
    expected = math.sin(n * math.pi) / math.pi * total
    assert mittag_leffler(n, x) == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("n", [0.4, 0.69, 0.75, 0.95])
def test_tail_follows_the_asymptotic_series(n):
    # E_n(-x) ~ sum over k >= 1 of (-1)^(k-1) x^-k / Gamma(1 - nk) (Gorenflo & Mainardi 1997)
    x = 1e5
    series = sum((-1) ** (k - 1) * x**-k / gamma(1 - n * k) for k in range(1, 4))
    assert mittag_leffler(n, x) == pytest.approx(series, rel=1e-9)


@settings(max_examples=60, deadline=None)
@given(
    n=st.floats(0.05, 1.0),
    low=st.floats(1e-6, 1e6),
    factor=st.floats(1.001, 1e3),
)
def test_falls_from_one_to_zero(n, low, factor):
    near, far = mittag_leffler(n, np.array([low, low * factor]))
    assert -1e-12 <= far <= near + 1e-12
    assert near <= 1 + 1e-12


def test_broadcasts_and_passes_nan():
    table = mittag_leffler(np.array([[0.5], [1.0]]), np.array([0.0, 1.0, np.inf, np.nan]))
    assert table.shape == (2, 4)
    np.testing.assert_allclose(table[1, :3], [1, math.exp(-1), 0], atol=1e-14)
    assert np.isnan(table[:, 3]).all()


@pytest.mark.parametrize(("n", "x"), [(0.0, 1.0), (1.2, 1.0), (0.5, -0.1)])
def test_outside_its_range_is_refused(n, x):
    with pytest.raises(ValueError, match="0 < n <= 1 and x >= 0"):
        mittag_leffler(n, x)


def test_arc_response_of_a_capacitor_is_the_textbook_exponential():
    # R = 100, C = 1 mF: tau = 0.1 s
    response = arc_response(100.0, 1e-3, 1.0, np.array([0.0, 0.1, 10.0]))
    np.testing.assert_allclose(response, [0, 100 * (1 - math.exp(-1)), 100], atol=1e-9)


def test_arc_without_q_counts_fully_and_an_absent_arc_not_at_all():
    response = arc_response(
        np.array([50.0, 50.0, 0.0, np.nan]),
        np.array([np.nan, 1e-3, 1e-3, 1e-3]),
        np.array([0.8, np.nan, 0.8, 0.8]),
        1e-6,
    )
    np.testing.assert_array_equal(response[:3], [50, 50, 0])
    assert np.isnan(response[3])


def test_arc_response_does_not_depend_on_the_area():
    area = 1.7
    whole = arc_response(80.0, 2e-4, 0.8, 0.03)
    per_area = arc_response(80.0 * area, 2e-4 / area, 0.8, 0.03)
    assert per_area == pytest.approx(whole * area)
