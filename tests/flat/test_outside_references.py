"""Uncertainties and unit factors held against other libraries."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from uncertainties import ufloat_fromstr

from campaign.ledger.flat.headers import read_header
from campaign.ledger.flat.values import with_uncertainty

SPELLINGS = [
    "41.2±0.8", "41.2+/-0.8", "41.2(8)", "41.2(12)", "0.0412±0.0008", "1234(5)", "12(3)",
    "1.5e3+/-2e1", "(4.12+/-0.08)e1", "4.12(8)e1", "4.12(8)e-5", "-3.1(2)", "0.001(1)",
    "41.2(0.8)", "1.2(34)", "1(1)", "0.10(10)", "2.50(0.25)e-3", "100.02147(35)",
]  # fmt: skip


@pytest.mark.parametrize("text", SPELLINGS)
def test_uncertainties_agree_with_a_library_for_error_propagation(text):
    """Expected values: uncertainties.ufloat_fromstr."""
    expected = ufloat_fromstr(text)
    value, error = with_uncertainty(text)
    assert value == pytest.approx(expected.nominal_value, rel=1e-13)
    assert error == pytest.approx(expected.std_dev, rel=1e-9)


@settings(max_examples=150, deadline=None)
@given(
    st.decimals(min_value="0.001", max_value=99999, places=3),
    st.integers(min_value=1, max_value=999),
    st.integers(min_value=-12, max_value=12),
)
def test_any_concise_value_agrees_with_it(value, last, power):
    text = f"{value}({last})e{power}"
    expected = ufloat_fromstr(text)
    read = with_uncertainty(text)
    assert read[0] == pytest.approx(expected.nominal_value, rel=1e-12)
    assert read[1] == pytest.approx(expected.std_dev, rel=1e-12)


@pytest.mark.parametrize(
    ("written", "unit", "canonical"),
    [
        ("E/mV", "millivolt", "volt"), ("E/uV", "microvolt", "volt"),
        ("A/mm2", "millimeter**2", "centimeter**2"), ("A/m2", "meter**2", "centimeter**2"),
        ("A/dm2", "decimeter**2", "centimeter**2"), ("A/um2", "micrometer**2", "centimeter**2"),
        ("rest/min", "minute", "hour"), ("rest/d", "day", "hour"), ("rest/week", "week", "hour"),
        ("R_ct/kΩ", "kiloohm", "ohm"), ("R_ct/MΩ", "megaohm", "ohm"),
        ("R_ct/(mΩ mm2)", "milliohm*millimeter**2", "ohm*centimeter**2"),
        ("f_min/uHz", "microhertz", "hertz"), ("f_max/MHz", "megahertz", "hertz"),
        ("amplitude/V", "volt", "millivolt"),
    ],
)  # fmt: skip
def test_factors_agree_with_a_units_library(written, unit, canonical):
    """Expected factors: pint."""
    import pint

    expected = pint.UnitRegistry().Quantity(1, unit).to(canonical).magnitude
    assert read_header(written).scale.factor == pytest.approx(expected, rel=1e-12)
