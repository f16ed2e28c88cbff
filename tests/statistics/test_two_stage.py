"""Slopes within specimens against separate regressions."""

import math

import numpy as np
import pytest
import scipy.stats

from campaign.statistics.mixed import NoContrast, fit_mixed
from campaign.statistics.random_effects import combine
from campaign.statistics.two_stage import specimen_slopes


def readings(seed, specimens=5, n=12, tau=0.3):
    rng = np.random.default_rng(seed)
    specimen = np.repeat(np.arange(specimens), n)
    x = np.tile(np.linspace(3.0, 3.5, n), specimens)
    y = rng.normal(6, tau, specimens)[specimen] * x + rng.normal(0, 1, specimens)[specimen]
    return y + rng.normal(0, 0.05, x.size), x, specimen


def test_each_slope_is_the_regression_of_its_specimen():
    """scipy.stats.linregress per specimen, with the residual pooled."""
    y, x, specimen = readings(1)
    found = specimen_slopes(y, x, specimen)
    pooled = 0.0
    for k in range(5):
        line = scipy.stats.linregress(x[specimen == k], y[specimen == k])
        assert found.slope[k] == pytest.approx(line.slope, rel=1e-9)
        rest = y[specimen == k] - line.intercept - line.slope * x[specimen == k]
        pooled += rest @ rest
    assert found.sigma_within == pytest.approx(math.sqrt(pooled / 50), rel=1e-9)
    sxx = ((x[:12] - x[:12].mean()) ** 2).sum()
    np.testing.assert_allclose(found.variance, found.sigma_within**2 / sxx, rtol=1e-9)
    assert found.df_within.tolist() == [10] * 5


def test_both_stages_equal_the_mixed_model_with_random_slopes_when_balanced():
    y, x, specimen = readings(2)
    found = specimen_slopes(y, x, specimen)
    both = combine(found.slope, found.variance)
    centred = x - x.mean()
    mixed = fit_mixed(y, centred, specimen, np.zeros(x.size), slopes=centred)
    slope = mixed.contrast([1.0])
    assert both.estimate.value == pytest.approx(slope.value, rel=1e-6)
    assert both.estimate.se == pytest.approx(slope.se, rel=1e-3)
    assert both.estimate.df == pytest.approx(slope.df, abs=0.1)
    assert both.tau == pytest.approx(mixed.sigma_slopes[0], rel=1e-2)


def test_strata_are_taken_out_within_each_specimen():
    y, x, specimen = readings(3)
    stratum = np.tile([0, 1], 30)
    jumps = np.random.default_rng(3).normal(0, 5, (5, 2))
    first = specimen_slopes(y, x, specimen, stratum)
    second = specimen_slopes(y + jumps[specimen, stratum], x, specimen, stratum)
    np.testing.assert_allclose(first.slope, second.slope, rtol=1e-9)
    assert first.df_within.tolist() == [9] * 5


def test_known_variances_enter_the_weights():
    y, x, specimen = readings(4)
    known = np.full(y.size, 0.02**2)
    plain, split = specimen_slopes(y, x, specimen), specimen_slopes(y, x, specimen, None, known)
    assert split.sigma_within**2 + 0.02**2 == pytest.approx(plain.sigma_within**2, rel=1e-8)
    np.testing.assert_allclose(split.variance, plain.variance, rtol=1e-8)
    loose = specimen_slopes(y, x, specimen, None, np.full(y.size, 1.0))
    assert loose.sigma_within == 0.0
    assert (loose.variance > plain.variance).all()


def test_a_noisy_reading_counts_less():
    y, x, specimen = readings(5)
    y[0] += 3.0
    known = np.zeros(y.size)
    known[0] = 9.0
    trusting = specimen_slopes(y, x, specimen).slope[0]
    wary = specimen_slopes(y, x, specimen, None, known).slope[0]
    without = specimen_slopes(y[1:], x[1:], specimen[1:]).slope[0]
    assert abs(wary - without) < 0.05 * abs(trusting - without)


def test_specimens_without_contrast_are_named():
    y, x, specimen = readings(6)
    x[specimen == 2] = 3.2
    found = specimen_slopes(y, x, np.array(["a", "b", "c", "d", "e"])[specimen])
    assert found.left_out == ("c",)
    assert found.specimen.tolist() == ["a", "b", "d", "e"]
    with pytest.raises(NoContrast):
        specimen_slopes(y, np.ones(y.size), specimen)


def test_two_readings_a_specimen_leave_the_scatter_between():
    found = specimen_slopes([1.0, 2, 1, 3, 1, 2.5], [0, 1, 0, 1, 0, 1.0], [0, 0, 1, 1, 2, 2])
    assert math.isnan(found.sigma_within)
    both = combine(found.slope, found.variance)
    assert both.estimate.se == pytest.approx(np.std([1, 2, 1.5], ddof=1) / math.sqrt(3))


def test_repeating_readings_does_not_narrow_the_barrier():
    y, x, specimen = readings(7, tau=0.5)
    once = specimen_slopes(y, x, specimen)
    many = specimen_slopes(*(np.repeat(part, 50) for part in (y, x, specimen)))
    first = combine(once.slope, once.variance).estimate
    second = combine(many.slope, many.variance).estimate
    assert second.se == pytest.approx(first.se, rel=0.02)
    assert second.df == first.df == 4
