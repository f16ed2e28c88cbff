"""Lack of fit, heterogeneity, confounding, exact proportions, AICc."""

import math

import numpy as np
import pytest
import scipy.stats
from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.statistics.coverage import exact_interval
from campaign.statistics.information import aicc
from campaign.statistics.lines import (
    correlation_within,
    heterogeneity,
    heterogeneity_within,
    lack_of_fit,
    wald,
)
from campaign.statistics.mixed import fit_mixed


def test_wald_is_the_f_test_of_one_way_anova():
    """scipy.stats.f_oneway on the hardwood data of Montgomery & Runger, ch. 13: F = 19.61."""
    groups = [
        [7, 8, 15, 11, 9, 10],
        [12, 17, 13, 18, 19, 15],
        [14, 18, 19, 17, 16, 18],
        [19, 25, 22, 23, 18, 20],
    ]
    level = np.repeat(np.arange(4), 6)
    x = np.column_stack([level[:, None] == np.arange(1, 4), np.ones(24)]).astype(float)
    test = wald(fit_mixed(np.concatenate(groups), x, np.arange(24)), np.eye(4)[:3])
    other = scipy.stats.f_oneway(*groups)
    assert test.statistic == pytest.approx(other.statistic, rel=1e-9)
    assert test.statistic == pytest.approx(19.605, abs=5e-4)
    assert (test.df, round(test.df_error, 6)) == (3, 20)
    assert test.p == pytest.approx(other.pvalue, rel=1e-6)


def cells(seed, slope=lambda x, stratum: 0.5 * x, repeats=3, interaction=0.05):
    rng = np.random.default_rng(seed)
    specimen = np.repeat(np.arange(12), 4 * repeats)
    stratum = np.tile(np.repeat(np.arange(4), repeats), 12)
    x = np.log([0.25, 0.5, 1.0, 2.0])[specimen % 4]
    y = slope(x, stratum) + rng.normal(0, 0.1, 12)[specimen] + rng.normal(0, 0.04, x.size)
    return y + rng.normal(0, interaction, (12, 4))[specimen, stratum], x, specimen, stratum


def test_lack_of_fit_is_that_of_specimen_means():
    """Balanced: Draper & Smith's F on the means, residual line against levels."""
    y, x, specimen, stratum = cells(1, interaction=0)
    test = lack_of_fit(y, x, specimen, stratum)
    means = np.array([y[specimen == k].mean() for k in range(12)])
    at = np.array([x[specimen == k][0] for k in range(12)])
    line = means - np.polyval(np.polyfit(at, means, 1), at)
    free = means - np.array([means[at == each].mean() for each in at])
    statistic = (line @ line - free @ free) / 2 / (free @ free / 8)
    assert test.statistic == pytest.approx(statistic, rel=1e-6)
    assert test.df_error == pytest.approx(8, rel=1e-3)
    assert test.p == pytest.approx(scipy.stats.f.sf(statistic, 2, 8), rel=1e-4)


def test_a_bend_is_found_and_two_levels_have_none():
    y, x, specimen, stratum = cells(2, slope=lambda x, _: 2 * x**2)
    assert lack_of_fit(y, x, specimen, stratum).p < 1e-3
    two = specimen % 4 < 2
    assert lack_of_fit(y[two], x[two], specimen[two], stratum[two]) is None


def test_a_split_of_slopes_is_found():
    y, x, specimen, stratum = cells(3, slope=lambda x, s: np.where(s == 0, 0.9, 0.1) * x)
    found = heterogeneity(y, x, specimen, stratum)
    assert found.strata == (0, 1, 2, 3)
    assert found.test.p < 1e-6
    assert found.slopes[0].value == pytest.approx(0.9, abs=0.3)
    assert found.slopes[1].value == pytest.approx(0.1, abs=0.3)


def test_equal_slopes_are_rejected_as_often_as_stated():
    p = []
    for seed in range(200):
        y, x, specimen, stratum = cells(seed, repeats=2)
        p.append(heterogeneity(y, x, specimen, stratum).test.p)
    low, high = exact_interval(int((np.array(p) < 0.05).sum()), len(p), 0.999)
    assert low < 0.05 < high


def test_repeats_do_not_make_a_split():
    y, x, specimen, stratum = cells(5)
    once = heterogeneity(y, x, specimen, stratum).test
    many = heterogeneity(*(np.repeat(part, 30) for part in (y, x, specimen, stratum))).test
    assert many.p == pytest.approx(once.p, rel=1e-6)


def test_one_stratum_has_nothing_to_compare():
    y, x, specimen, stratum = cells(6)
    assert heterogeneity(y, x, specimen, np.zeros(y.size)) is None
    flat = np.where(stratum > 0, 0.0, x)
    assert heterogeneity(y, flat, specimen, stratum) is None


def ramps(seed, split=0.0, tau=0.1):
    rng = np.random.default_rng(seed)
    specimen, stratum, step = (part.ravel() for part in np.indices((6, 3, 8)))
    x = np.linspace(3.0, 3.5, 8)[step]
    slope = 6 + rng.normal(0, 0.3, 6)[specimen] + rng.normal(0, tau, (6, 3))[specimen, stratum]
    y = (slope + split * (stratum == 2)) * x + rng.normal(0, 0.01, x.size)
    return y + rng.normal(0, 1, (6, 3))[specimen, stratum], x, specimen, stratum


def test_a_split_of_slopes_within_specimens_is_found():
    found = heterogeneity_within(*ramps(1, split=1.0))
    assert found.test.p < 1e-3
    assert found.slopes[2].value - found.slopes[0].value == pytest.approx(1.0, abs=0.3)
    y, x, specimen, stratum = ramps(1)
    assert heterogeneity_within(y, x, specimen, np.zeros(y.size)) is None
    assert heterogeneity_within(y, np.ones(y.size), specimen, stratum) is None


@pytest.mark.parametrize("tau", [0.0, 0.1])
def test_equal_slopes_within_specimens_are_rejected_as_often_as_stated(tau):
    p = [heterogeneity_within(*ramps(seed, tau=tau)).test.p for seed in range(200)]
    low, high = exact_interval(int((np.array(p) < 0.05).sum()), len(p), 0.999)
    assert low < 0.05 < high


def test_confounding_with_age():
    _, x, specimen, stratum = cells(7)
    assert correlation_within(x, 3 * x + stratum, specimen, stratum) == pytest.approx(1.0)
    assert correlation_within(x, -x + 10 * stratum, specimen, stratum) == pytest.approx(-1.0)
    assert math.isnan(correlation_within(x, stratum, specimen, stratum))
    noise = np.random.default_rng(1).normal(size=12)[specimen]
    assert abs(correlation_within(x, noise, specimen, stratum)) < 0.7


def test_correlation_without_strata_is_pearson():
    """scipy.stats.pearsonr."""
    rng = np.random.default_rng(2)
    x, other = rng.normal(size=(2, 15))
    found = correlation_within(x, other, np.arange(15), np.zeros(15))
    assert found == pytest.approx(scipy.stats.pearsonr(x, other).statistic)


@given(st.integers(1, 400), st.floats(0, 1), st.sampled_from([0.9, 0.95, 0.99]))
@settings(max_examples=40, deadline=None)
def test_exact_proportion(trials, share, level):
    """scipy.stats.binomtest(...).proportion_ci(method="exact")."""
    hits = round(share * trials)
    other = scipy.stats.binomtest(hits, trials).proportion_ci(level, method="exact")
    assert exact_interval(hits, trials, level) == pytest.approx((other.low, other.high), abs=1e-9)


def test_exact_proportion_refuses_nonsense():
    with pytest.raises(ValueError, match="proportion"):
        exact_interval(5, 3)


def test_aicc():
    """statsmodels.tools.eval_measures.aicc."""
    from statsmodels.tools.eval_measures import aicc as other

    assert aicc(-12.5, 3, 20) == pytest.approx(other(-12.5, 20, 3))
    assert aicc(-12.5, 3, 4) == math.inf
