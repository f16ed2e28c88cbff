"""Matching by gaps: properties that hold for any values."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.trends.strata import (
    WIDEST_CHAIN,
    combine,
    components,
    factor,
    levels_per_stratum,
    match,
)

values = st.lists(st.floats(-50, 50), min_size=1, max_size=60).map(np.array)


@settings(max_examples=80, deadline=None)
@given(values, st.floats(0.01, 10))
def test_a_level_is_a_chain_no_wider_than_three_tolerances(x, tolerance):
    codes = match(x, tolerance).codes
    for code in range(codes.max() + 1):
        level = np.sort(x[codes == code])
        assert len(level) > 0
        assert np.all(np.diff(level) <= tolerance * (1 + 1e-6))
        assert np.ptp(level) <= WIDEST_CHAIN * tolerance * (1 + 1e-6)


@settings(max_examples=80, deadline=None)
@given(values, st.floats(0.01, 10))
def test_codes_rise_with_the_values_and_wide_gaps_always_separate(x, tolerance):
    matched = match(x, tolerance)
    order = np.argsort(x, kind="stable")
    steps = np.diff(matched.codes[order])
    assert np.all(steps >= 0) and np.all(steps <= 1)
    assert np.all(steps[np.diff(x[order]) > tolerance * (1 + 1e-6)] == 1)
    assert np.all(steps[np.diff(x[order]) == 0] == 0)
    if not matched.chains:
        assert np.all(steps[np.diff(x[order]) <= tolerance] == 0)


@settings(max_examples=40, deadline=None)
@given(values, st.floats(0.01, 10), st.randoms(use_true_random=False))
def test_the_order_of_readings_does_not_matter(x, tolerance, random):
    shuffle = list(range(len(x)))
    random.shuffle(shuffle)
    assert np.array_equal(match(x[shuffle], tolerance).codes, match(x, tolerance).codes[shuffle])


def test_set_temperatures_with_scatter_are_found_again(rng):
    sets = np.array([278.15, 288.15, 298.15, 308.15, 318.15])
    truth = rng.integers(0, 5, 500)
    assert np.array_equal(match(sets[truth] + rng.uniform(-0.4, 0.4, 500), 1.0).codes, truth)


def test_a_wide_chain_is_split_and_reported_and_tight_clusters_stay_together():
    cluster = np.array([0.0, 0.01, 0.02])
    x = np.concatenate([cluster + 0.9 * k for k in range(8)])
    matched = match(x, 1.0)
    assert matched.chains == ((0.0, 0.9 * 7 + 0.02),)
    assert matched.codes.max() == 1  # 6.32 wide: two pieces of 2.72 are narrow enough
    assert all(len(set(matched.codes[3 * k : 3 * k + 3])) == 1 for k in range(8))


def test_what_is_not_recorded_has_no_level():
    assert match(np.array([np.nan, 1.0, np.nan]), 1.0).codes.tolist() == [-1, 0, -1]
    assert match(np.array([np.nan]), 1.0).codes.tolist() == [-1]
    assert match(np.zeros(0), 1.0).codes.tolist() == []


def test_many_values_in_one_chain_stay_quick_to_split():
    matched = match(np.linspace(0.0, 10.0, 50_000), 0.005)
    assert len(matched.chains) == 1
    assert 10 / 0.015 <= matched.codes.max() + 1 <= 4 * 10 / 0.015


@settings(max_examples=60, deadline=None)
@given(st.lists(st.tuples(st.integers(-1, 4), st.integers(-1, 3)), min_size=1, max_size=40))
def test_combined_codes_are_equal_exactly_where_all_columns_are(pairs):
    a, b = (np.array(column) for column in zip(*pairs, strict=True))
    codes = combine(a, b)
    assert sorted(set(codes.tolist())) == list(range(len(set(pairs))))
    for i in range(len(pairs)):
        for j in range(len(pairs)):
            assert (codes[i] == codes[j]) == (pairs[i] == pairs[j])


def test_levels_per_stratum_and_factor():
    stratum, level = np.array([0, 0, 1, 1, 1]), np.array([2, 2, 0, 1, 1])
    assert levels_per_stratum(stratum, level).tolist() == [1, 1, 2, 2, 2]
    coded = factor(np.array(["b", "a", "b"], dtype=object))
    assert coded.names == ("a", "b") and coded.codes.tolist() == [1, 0, 1]


def test_levels_are_linked_only_through_shared_strata():
    assert components([(0, 0), (0, 1), (1, 1), (1, 2), (2, 3)], 4) == [[0, 1, 2], [3]]
    assert components([(0, 2), (1, 0)], 3) == [[0], [2]]
