"""Headers and their units.

Quantity/unit notation: IUPAC, Quantities, Units and Symbols in Physical Chemistry (Green Book),
3rd ed., section 1.1: the number in a column headed `T/K` is the quantity divided by the unit.
"""

import contextlib
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.ledger.flat.headers import CANONICAL, HeaderError, read_header
from campaign.ledger.flat.units import Scale, UnitError, scale

# The flat table's headers, as its description lists them.
LISTED = """electrode, material, ion, form, cell, specimen, area_cm2, configuration, reference,
    electrolyte, assembled_at, measured_at, potential_V, temperature_C, ion_content, E_half_V,
    cycle, direction, rest_h, R_el, R_el_se, R_sl, R_sl_se, Q_sl, n_sl, R_ct, R_ct_se, Q_ct, n_ct,
    R_lat, R_lat_se, Q_lat, n_lat, sigma_w, sigma_w_se, chi2, circuit, weighting, fitted_at,
    fitted_by, amplitude_mV, f_min_Hz, f_max_Hz, operator, instrument, spectrum, note"""


def test_the_canonical_headers_are_those_of_the_description():
    assert tuple(LISTED.replace(",", " ").split()) == CANONICAL


@pytest.mark.parametrize("name", CANONICAL)
def test_canonical_headers_mean_themselves(name):
    header = read_header(name)
    assert (header.name, header.unit_stated) == (name, True)
    offset = 273.15 if name == "temperature_C" else 0.0
    assert header.scale == Scale(1.0, offset)
    for spelling in (name.upper(), f" {name} ", name.replace("_", " "), "\ufeff" + name):
        assert read_header(spelling).name == name


@pytest.mark.parametrize(
    ("written", "name", "expected"),
    [
        ("R_ct/kΩ", "R_ct", Scale(1e3)),
        ("R_ct/k\u2126", "R_ct", Scale(1e3)),  # OHM SIGN, another character than omega
        ("R_ct / kohm", "R_ct", Scale(1e3)),
        ("R_ct/ohm", "R_ct", Scale(1.0)),
        ("R_ct [kΩ]", "R_ct", Scale(1e3)),
        ("R_ct (mΩ)", "R_ct", Scale(1e-3)),
        ("R_ct_kohm", "R_ct", Scale(1e3)),
        ("R_ct, MΩ", "R_ct", Scale(1e6)),
        ("T/K", "temperature_C", Scale(1.0)),
        ("T / °C", "temperature_C", Scale(1.0, 273.15)),
        ("T/ºC", "temperature_C", Scale(1.0, 273.15)),
        ("temperature_K", "temperature_C", Scale(1.0)),
        ("E/mV", "potential_V", Scale(1e-3)),
        ("Potential (V)", "potential_V", Scale(1.0)),
        ("A/mm2", "area_cm2", Scale(1e-2)),
        ("A/mm²", "area_cm2", Scale(1e-2)),
        ("A/mm^2", "area_cm2", Scale(1e-2)),
        ("area/m2", "area_cm2", Scale(1e4)),
        ("rest/min", "rest_h", Scale(1 / 60)),
        ("rest time (s)", "rest_h", Scale(1 / 3600)),
        ("f_min/mHz", "f_min_Hz", Scale(1e-3)),
        ("f_max/MHz", "f_max_Hz", Scale(1e6)),
        ("amplitude/V", "amplitude_mV", Scale(1e3)),
        ("SOC/%", "ion_content", Scale(1e-2)),
        ("R_ct_se/%", "R_ct_se", Scale(1e-2, relative=True)),
        ("u(R_ct)/kΩ", "R_ct_se", Scale(1e3)),
        ("R_ct error/Ω", "R_ct_se", Scale(1.0)),
        ("R_ct/(Ω cm2)", "R_ct", Scale(1.0, per_area=True)),
        ("R_ct/Ω·cm²", "R_ct", Scale(1.0, per_area=True)),
        ("R_ct/(kΩ cm^2)", "R_ct", Scale(1e3, per_area=True)),
        ("R_ct/(ohm mm2)", "R_ct", Scale(1e-2, per_area=True)),
        ("Q_ct/(S s^n)", "Q_ct", Scale(1.0)),
        ("Q_ct/µS s^n", "Q_ct", Scale(1e-6)),  # MICRO SIGN
        ("Q_ct/μS·sⁿ", "Q_ct", Scale(1e-6)),  # GREEK SMALL LETTER MU
        ("Q_ct/mF s^(n-1)", "Q_ct", Scale(1e-3)),
        ("Q_ct/(Ω⁻¹ sⁿ)", "Q_ct", Scale(1.0)),
        ("Q_ct/(Ω-1 cm-2 s^n)", "Q_ct", Scale(1.0, per_area=True)),
        ("Q_ct/(uF cm-2 s^(n-1))", "Q_ct", Scale(1e-6, per_area=True)),
        ("sigma_w/Ω s^-1/2", "sigma_w", Scale(1.0)),
        ("sigma_w/(kΩ s^-0.5)", "sigma_w", Scale(1e3)),
        ("σ/(Ω s^-½)", "sigma_w", Scale(1.0)),
        ("sigma_w/(Ω cm² s^-1/2)", "sigma_w", Scale(1.0, per_area=True)),
        ("Rs", "R_el", Scale()),
        ("R_s", "R_el", Scale()),
        ("R_ohm", "R_el", Scale()),
        ("R_Ω/Ω", "R_el", Scale()),
        ("R_SEI", "R_sl", Scale()),
        ("Rsei", "R_sl", Scale()),
        ("R film", "R_sl", Scale()),
        ("Rct", "R_ct", Scale()),
        ("RCT", "R_ct", Scale()),
        ("R_lf", "R_lat", Scale()),
        ("CPE_ct", "Q_ct", Scale()),
        ("alpha_ct", "n_ct", Scale()),
        ("n_SEI", "n_sl", Scale()),
        ("χ²", "chi2", Scale()),
        ("chi^2", "chi2", Scale()),
        ("E½/mV", "E_half_V", Scale(1e-3)),
        ("E_1/2", "E_half_V", Scale()),
        ("x", "ion_content", Scale()),
        ("T", "temperature_C", Scale(1.0, 273.15)),
        ("E", "potential_V", Scale()),
        ("A", "area_cm2", Scale()),
    ],
)
def test_other_names_and_units(written, name, expected):
    header = read_header(written)
    assert header.name == name
    assert header.scale.factor == pytest.approx(expected.factor, rel=1e-14)
    assert replace(header.scale, factor=expected.factor) == expected


@pytest.mark.parametrize(
    ("written", "name", "factor", "reference"),
    [
        ("E vs Na/Na+", "potential_V", 1.0, "Na/Na+"),
        ("E/V vs. Na/Na+", "potential_V", 1.0, "Na/Na+"),
        ("E (mV vs Ag/AgCl)", "potential_V", 1e-3, "Ag/AgCl"),
        ("E vs. Na/Na+ / mV", "potential_V", 1e-3, "Na/Na+"),
        ("Potential versus SCE", "potential_V", 1.0, "SCE"),
    ],
)
def test_a_potential_header_may_name_its_reference(written, name, factor, reference):
    header = read_header(written)
    assert (header.name, header.scale.factor, header.reference) == (name, factor, reference)


@pytest.mark.parametrize(
    "written",
    ["t", "R1", "R_hf", "foo", "R_ct vs SCE", "E vs", "U(R_ct)", "n_ct_se", "cell/m", "R_ct/V",
     "T/V", "Q_ct/µF", "Q_ct/(S s^(n-1))", "A/cm", "R_ct/", "T/°F", "E/parrot", "R_ct/9^9^9^9^9^9",
     "R_ct/ohm^99999999999", "x" * 2_000_000, "/" * 100, "R_ct/" + "(" * 90],
)  # fmt: skip
def test_other_headers_are_refused(written):
    with pytest.raises(HeaderError) as caught:
        read_header(written)
    assert caught.value.expected
    assert len(str(caught.value)) < 400


def test_near_names_are_offered():
    with pytest.raises(HeaderError, match="near: potential_V"):
        read_header("potentialV2")


@pytest.mark.parametrize(
    ("unit", "canonical", "factor"),
    [("dm2", "cm2", 100.0), ("hours", "h", 1.0), ("microvolt", "V", 1e-6), ("GΩ", "ohm", 1e9),
     ("day", "h", 24.0), ("inch^2", "cm2", 6.4516)],
)  # fmt: skip
def test_rare_units_by_the_reference_library(unit, canonical, factor):
    """Expected factors: SI Brochure, 9th ed.; the inch is 25.4 mm by definition."""
    assert scale(unit, canonical).factor == pytest.approx(factor, rel=1e-12)


@given(st.text(max_size=60), st.sampled_from(["V", "K", "ohm", "S s^n", "ohm s^-1/2", "1", "cm2"]))
@settings(max_examples=300, deadline=None)
def test_any_unit_is_read_or_refused(unit, canonical):
    try:
        found = scale(unit, canonical)
    except UnitError:
        return
    assert found.factor > 0


@given(st.one_of(st.text(max_size=130), st.text("RECTAsct_eΩ/()[]%^0.5 -vs", max_size=40)))
@settings(max_examples=300, deadline=None)
def test_any_header_is_read_or_refused(text):
    with contextlib.suppress(HeaderError):
        assert read_header(text).name in CANONICAL
