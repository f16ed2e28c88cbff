"""The decision rules."""

import math
from dataclasses import dataclass, replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.statistics.comparisons import critical
from campaign.statistics.equivalence import beyond, decide, inside
from campaign.statistics.estimate import Estimate
from campaign.trends.findings import Contrast, Finding

RATIO = math.log(1.5)


@dataclass(frozen=True)
class Level:
    estimate: Estimate


def order(value, se, df=10.0, contrasts=(0.0,)):
    levels = tuple(Contrast("a", "b", Estimate(each, 0.01, 10.0)) for each in contrasts)
    return Finding(
        "concentration", "R_ct", 8, 80, Estimate(value, se, df), 0.15, levels, RATIO, "tukey", 4
    )


def solvents(*estimates, family="tukey", n_levels=3):
    levels = tuple(Contrast(str(k), "z", each) for k, each in enumerate(estimates))
    return Finding(
        "solvent", "R_ct", 8, 80, None, None, levels, RATIO, family, n_levels
    )  # fmt: skip


@pytest.mark.parametrize(
    ("value", "se", "decision"),
    [
        (0.5, 0.1, "responds"),
        (-0.5, 0.1, "responds, inverse"),
        (0.3, 0.1, "open"),
        (0.0, 0.02, "unresponsive"),
        (0.0, 0.1, "open"),
        (0.1, 0.01, "unresponsive"),
        (0.5, math.nan, "open"),
    ],
)
def test_order(value, se, decision):
    assert order(value, se).decision() == decision


def test_a_flat_order_with_one_level_apart_is_open():
    assert order(0.0, 0.02, contrasts=(0.0, 0.5)).decision() == "open"
    assert order(0.0, 0.02, contrasts=(0.0, 0.1)).decision() == "unresponsive"


def test_a_steep_order_needs_no_errors_of_its_levels():
    finding = order(0.5, 0.05)
    blind = replace(finding, contrasts=(Contrast("a", "b", Estimate(1.0, math.nan, 0.0)),))
    assert blind.decision() == "responds"


def test_levels():
    flat, steep = Estimate(0.0, 0.05, 8.0), Estimate(1.0, 0.05, 8.0)
    loose, blind = Estimate(0.3, 0.3, 8.0), Estimate(0.0, math.nan, 0.0)
    assert solvents(flat, flat, flat).decision() == "unresponsive"
    assert solvents(flat, steep, flat).decision() == "responds"
    assert solvents(flat, Estimate(-1.0, 0.05, 8.0)).decision() == "responds"
    assert solvents(flat, loose).decision() == "open"
    assert solvents(flat, blind).decision() == "open"
    assert solvents().decision() == "open"


def test_responding_is_simultaneous_but_unresponsive_is_not():
    df = 8.0
    single, tukey = critical("single", 0.05, df, 4), critical("tukey", 0.05, df, 4)
    between = Estimate(RATIO + 0.1 * (single + tukey) / 2, 0.1, df)
    assert solvents(between, family="single", n_levels=4).decision() == "responds"
    assert solvents(between, family="tukey", n_levels=4).decision() == "open"
    one_sided = critical("single", 0.10, df, 4)
    just = Estimate(RATIO - 0.1 * one_sided * 1.001, 0.1, df)
    assert solvents(just, just, just, n_levels=4).decision() == "unresponsive"
    too_wide = Estimate(RATIO - 0.1 * one_sided * 0.999, 0.1, df)
    assert solvents(just, too_wide, n_levels=4).decision() == "open"


def test_a_reason_to_leave_open_wins():
    assert replace(order(0.5, 0.01), open_because="potential not comparable").decision() == "open"


def test_an_order_without_margin_is_open():
    assert replace(order(0.5, 0.01), slope_margin=None).decision() == "open"


@pytest.mark.parametrize("alpha", [0.0, 0.5, 1.0, -0.1])
def test_alpha_outside_its_range_is_refused(alpha):
    with pytest.raises(ValueError, match="error probability"):
        decide(order(0.5, 0.01), alpha)


estimates = st.builds(Estimate, st.floats(-2, 2), st.floats(0.001, 1), st.floats(1, 50))


@given(estimates, st.lists(estimates, max_size=4), st.floats(0.001, 0.2), st.booleans())
@settings(max_examples=80, deadline=None)
def test_a_stricter_error_only_opens_decisions(slope, levels, alpha, with_slope):
    finding = solvents(*levels, n_levels=4)
    if with_slope:
        finding = replace(finding, slope=slope, slope_margin=0.15)
    loose, strict = finding.decision(alpha), finding.decision(alpha / 3)
    assert strict in (loose, "open")


@given(estimates, st.lists(estimates, max_size=3))
@settings(max_examples=60, deadline=None)
def test_the_sign_of_an_order_mirrors_the_decision(slope, levels):
    finding = replace(solvents(*levels), slope=slope, slope_margin=0.15)
    mirrored = replace(finding, slope=Estimate(-slope.value, slope.se, slope.df))
    swap = {"responds": "responds, inverse", "responds, inverse": "responds"}
    decision = finding.decision()
    assert mirrored.decision() == swap.get(decision, decision)


def test_edges():
    assert beyond((0.15, 0.3), 0.15) == 0
    assert beyond((0.16, 0.3), 0.15) == 1
    assert beyond((-0.3, -0.16), 0.15) == -1
    assert beyond(None, 0.15) == 0
    assert inside((-0.14, 0.14), 0.15)
    assert not inside((-0.15, 0.1), 0.15)
    assert not inside(None, 0.15)
