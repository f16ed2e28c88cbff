"""The numbers behind a decision, in words."""

import math

import pytest

from campaign.diagnosis.wording import listed, numbers, telling
from campaign.statistics.estimate import Estimate
from campaign.trends.findings import Contrast, Finding


def of(*contrasts, **options):
    return Finding(
        "solvent", "R_ct", 9, 90, contrasts=contrasts, contrast_margin=math.log(1.5), **options
    )


def test_the_telling_pair_is_the_one_clear_of_zero_not_the_largest():
    noisy = Contrast("a", "b", Estimate(2.0, 2.0, 10))
    clear = Contrast("a", "c", Estimate(-1.0, 0.05, 10))
    assert telling(of(noisy, clear), 0.05) is clear
    assert telling(of(noisy), 0.05) is noisy
    assert telling(of(), 0.05) is None


def test_interval_of_a_pair_is_simultaneous():
    # Tukey: Montgomery & Runger, hardwood, 10 % less 5 %: 1.542 to 9.791 (published value)
    difference = Contrast("10 %", "5 %", Estimate(5.667, math.sqrt(2 * 6.51 / 6), 20))
    six = (difference, *(Contrast(str(i), "x", Estimate(0.0, 1.473, 20)) for i in range(5)))
    found = of(*six, family="tukey", n_levels=4)
    text = numbers("barrier", found, 0.05)
    low, high = (float(x) for x in text.split("[")[1].split("]")[0].split(", "))
    assert (low, high) == pytest.approx((1.542, 9.791), abs=0.01)


def test_without_interval_it_is_said():
    alone = of(Contrast("a", "b", Estimate(math.log(2), math.nan, 0)))
    assert numbers("solvent", alone) == "factor 2 (no interval), a against b"


def test_order_and_its_interval():
    found = Finding("concentration", "R_ct", 9, 90, slope=Estimate(0.5, 0.1, 1e6))
    assert numbers("concentration", found) == "order 0.5 [0.304, 0.696]"


def test_listed():
    assert [listed(x) for x in ([], ["a"], ["a", "b"], ["a", "b", "c"])] == [
        "", "a", "a and b", "a, b and c",
    ]  # fmt: skip
