"""Bracketed roots against SciPy's and against roots known in closed form."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from campaign.statistics.roots import root


@pytest.mark.parametrize(
    ("function", "low", "high", "expected"),
    [
        (lambda x: x * x - 2, 0.0, 2.0, math.sqrt(2)),
        (lambda x: math.cos(x) - x, 0.0, 1.0, 0.7390851332151607),  # Dottie number
        (lambda x: x**3 - 2 * x - 5, 2.0, 3.0, 2.0945514815423265),  # Wallis's example
        (lambda x: math.exp(x) - 10, -50.0, 50.0, math.log(10)),
        (lambda x: math.tanh(1e6 * (x - 0.3)), -7.0, 1.0, 0.3),
    ],
)
def test_known_roots(function, low, high, expected):
    assert root(function, low, high, xtol=1e-14) == pytest.approx(expected, rel=1e-12)


@settings(max_examples=150, deadline=None)
@given(st.floats(-3, 3), st.floats(0.05, 20), st.integers(0, 4), st.floats(0.1, 30))
def test_agrees_with_scipy(centre, steepness, power, reach):
    def function(x: float) -> float:
        return math.expm1(min(steepness * (x - centre), 50.0)) * (1 + abs(x)) ** power

    low, high = centre - reach, centre + 1.7 * reach
    # SciPy's brentq: an implementation outside the project
    assert root(function, low, high, xtol=1e-12) == pytest.approx(
        brentq(function, low, high, xtol=1e-12), abs=3e-12
    )


def test_an_end_that_is_the_root_is_returned():
    assert root(lambda x: x, 0.0, 1.0, xtol=1e-9) == 0.0
    assert root(lambda x: x - 1, 0.0, 1.0, xtol=1e-9) == 1.0


def test_without_a_change_of_sign_it_is_refused():
    with pytest.raises(ValueError, match="same sign"):
        root(lambda x: x * x + 1, -1.0, 1.0, xtol=1e-9)
