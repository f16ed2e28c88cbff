"""Values with their uncertainties.

Source of the notation: JCGM 100:2008 (GUM), 7.2.2, whose own example is a mass standard of
100.021 47 g with a combined standard uncertainty of 0.35 mg, written in four ways.
"""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from campaign.errors import Refused
from campaign.ledger.flat.values import (
    OtherMark,
    Value,
    as_point,
    plain_number,
    read_amended,
    with_uncertainty,
)


@pytest.mark.parametrize(
    "written", ["100.02147(35)", "100.02147(0.00035)", "100.02147±0.00035", "(100.02147±0.00035)"]
)
def test_the_guide_s_example_in_its_notations(written):
    assert with_uncertainty(written) == (100.02147, 0.00035)


@pytest.mark.parametrize(
    ("written", "value", "se"),
    [
        ("41.2", 41.2, None),
        ("41.2±0.8", 41.2, 0.8),
        ("41.2 ± 0.8", 41.2, 0.8),
        ("41.2+/-0.8", 41.2, 0.8),
        ("41.2 +- 0.8", 41.2, 0.8),
        ("41.2(8)", 41.2, 0.8),
        ("41.2 (8)", 41.2, 0.8),
        ("41.20(12)", 41.2, 0.12),
        ("412(8)", 412.0, 8.0),
        ("0.0412(8)", 0.0412, 0.0008),
        ("4.12(8)e1", 41.2, 0.8),
        ("4.12(8)E-5", 4.12e-5, 8e-7),
        ("(4.12±0.08)e1", 41.2, 0.8),
        ("4.12e1±8e-1", 41.2, 0.8),
        ("-0.5(1)", -0.5, 0.1),
        (".5", 0.5, None),
        ("5.", 5.0, None),
        ("+1e3", 1000.0, None),
    ],
)
def test_numbers_and_uncertainties(written, value, se):
    found = with_uncertainty(written)
    assert found[0] == pytest.approx(value, rel=1e-15)
    assert found[1] == (None if se is None else pytest.approx(se, rel=1e-14))


@pytest.mark.parametrize(
    "written",
    ["", " ", "inf", "-inf", "nan", "NaN", "Infinity", "1_000", "0x1F", "1e999", "1e-9999", "1,5",
     "41.2±", "±0.8", "41.2±0.8±0.1", "41.2(8", "41.2 8)", "41.2()", "(41.2±0.8", "41.2±0.8)",
     "41.2±0.8e", "41.2(-8)", "41.2±inf", "4 1", "1.2.3", "--1", "1e5e5", "٤١", "½", "1" * 81,
     "41.2 Ω", "<5", "~3", "41.2±2%", "4.12±0.08e1)"],
)  # fmt: skip
def test_anything_else_is_not_a_number(written):
    if written == "1e-9999":
        with pytest.raises(ValueError):
            plain_number(written)
        return
    with pytest.raises(ValueError):
        with_uncertainty(written)


@given(
    st.floats(1e-12, 1e12), st.integers(0, 12), st.floats(1e-6, 0.5), st.sampled_from("ge")
)
def test_what_is_written_with_an_uncertainty_reads_back(value, digits, relative, style):
    number, error = f"{value:.{digits}{style}}", f"{value * relative:.3g}"
    for written in (f"{number}±{error}", f"{number} +/- {error}"):
        assert with_uncertainty(written) == (float(number), float(error))


@given(st.integers(1, 10**9), st.integers(0, 8), st.integers(1, 999), st.integers(-20, 20))
def test_concise_notation_counts_in_last_digits(digits, places, error, power):
    whole = str(digits).rjust(places + 1, "0")
    text = f"{whole[: len(whole) - places]}.{whole[len(whole) - places :]}" if places else whole
    value, se = with_uncertainty(f"{text}({error})e{power}")
    assert value == float(f"{digits}e{power - places}")
    assert se == float(f"{error}e{power - places}")


def test_decimal_marks_and_typeset_numbers():
    assert as_point(" 41,2 ", ",") == "41.2"
    assert as_point("−0.5", ".") == "-0.5"
    assert as_point("12\u202f345.6", ".") == "12345.6"
    for text, mark in (("41.2", ","), ("41,2", "."), ("1.234,5", ","), ("1,234.5", ".")):
        with pytest.raises(OtherMark):
            as_point(text, mark)


@given(st.text(max_size=90))
def test_any_text_is_a_finite_number_or_refused(text):
    try:
        value, se = with_uncertainty(text)
    except ValueError:
        return
    assert math.isfinite(value)
    assert se is None or math.isfinite(se)


def test_absence_is_a_value():
    assert Value(None).absent
    assert not Value(41.2, 0.8).absent


STORED = {"value": 41.2, "se": 0.8}


@pytest.mark.parametrize(
    ("quantity", "is_error", "text", "expected"),
    [
        ("R_ct", False, "42", {"value": 42.0, "se": 0.8}),
        ("R_ct", False, "42(1)", {"value": 42.0, "se": 1.0}),
        ("R_ct", False, "", None),
        ("R_ct", True, "", {"value": 41.2, "se": None}),
        ("R_ct", True, "0.5", {"value": 41.2, "se": 0.5}),
        ("R_sl", False, "Absent", {"value": None, "se": None}),
    ],
)
def test_amended_values(quantity, is_error, text, expected):
    assert read_amended(quantity, is_error, text, STORED) == expected


@pytest.mark.parametrize(
    ("quantity", "text"), [("R_ct", "absent"), ("R_ct", "-1"), ("R_ct", "0"), ("n_ct", "1.01"),
                           ("R_ct", "4,2"), ("R_ct", "x"), ("R_ct", "1(0)")],
)  # fmt: skip
def test_amended_values_are_refused(quantity, text):
    with pytest.raises(Refused) as caught:
        read_amended(quantity, False, text, STORED)
    assert caught.value.faults[0].column == quantity
    assert caught.value.faults[0].expected
