"""Random-effects means against published meta-analyses and statsmodels."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from statsmodels.stats.meta_analysis import combine_effects
from statsmodels.stats.tests.results import results_meta

from campaign.statistics.mixed import NoContrast
from campaign.statistics.random_effects import combine, compare, hartung_knapp

# Kacker, Metrologia 41 (2004) 132, as used in statsmodels' tests
KACKER = np.array([61.00, 61.40, 62.21, 62.30, 62.34, 62.60, 62.70, 62.84, 65.90])
KACKER_VAR = np.array([0.2025, 1.21, 0.09, 0.2025, 0.3844, 0.5625, 0.0676, 0.0225, 1.8225])

# 13 trials of the BCG vaccine: ill and well, vaccinated and control.
# Colditz et al., J. Am. Med. Assoc. 271 (1994) 698 (from memory)
BCG = np.array(
    [
        [4, 119, 11, 128], [6, 300, 29, 274], [3, 228, 11, 209], [62, 13536, 248, 12619],
        [33, 5036, 47, 5761], [180, 1361, 372, 1079], [8, 2537, 10, 619],
        [505, 87886, 499, 87892], [29, 7470, 45, 7232], [17, 1699, 65, 1600],
        [186, 50448, 141, 27197], [5, 2493, 3, 2338], [27, 16886, 29, 17825],
    ],
    dtype=float,
)  # fmt: skip


def risk_ratios():
    treated, control = BCG[:, 0] + BCG[:, 1], BCG[:, 2] + BCG[:, 3]
    effect = np.log(BCG[:, 0] / treated) - np.log(BCG[:, 2] / control)
    return effect, 1 / BCG[:, 0] - 1 / treated + 1 / BCG[:, 2] - 1 / control


def test_bcg_trials_by_reml():
    """Viechtbauer, J. Stat. Softw. 36(3) (2010), sec. 3.2: tau^2 0.3132, mean -0.7145,
    SE 0.1798 by REML, without the factor q (values from memory)."""
    effect, variance = risk_ratios()
    result = combine(effect, variance)
    assert result.tau**2 == pytest.approx(0.3132, abs=5e-5)
    assert result.estimate.value == pytest.approx(-0.7145, abs=5e-5)
    assert result.estimate.se / math.sqrt(max(1, result.q)) == pytest.approx(0.1798, abs=5e-5)
    assert result.estimate.df == 12


def test_factor_q_as_in_r():
    """Hartung-Knapp at the DerSimonian-Laird tau^2, fitted in R, shipped with statsmodels."""
    res = results_meta.exk1_dl_hksj
    mean, cov, q = hartung_knapp(KACKER, KACKER_VAR, np.ones((9, 1)), float(res.tau2))
    assert mean[0] == pytest.approx(float(np.squeeze(res.b)), rel=1e-9)
    assert q > 1
    assert cov[0, 0] ** 0.5 == pytest.approx(float(np.squeeze(res.se)), rel=1e-9)


def test_statsmodels_combine_effects_with_equal_variances():
    """With equal variances REML and Paule-Mandel are one: combine_effects(method_re="pm")."""
    variance = np.full(9, 0.3)
    result = combine(KACKER, variance)
    other = combine_effects(KACKER, variance, method_re="pm", use_t=True, atol=1e-12)
    assert result.tau**2 == pytest.approx(other.tau2, rel=1e-6)
    assert result.estimate.value == pytest.approx(other.mean_effect_re, rel=1e-9)
    assert result.estimate.interval() == pytest.approx(tuple(other.conf_int()[3]), rel=1e-7)


def test_no_scatter_between_leaves_the_fixed_effect_interval_as_least():
    """combine_effects: fixed-effect standard error where the scatter is below the errors."""
    effect, variance = np.array([1.0, 1.01, 0.99, 1.0]), np.full(4, 0.04)
    result = combine(effect, variance)
    other = combine_effects(effect, variance)
    assert result.tau == 0.0
    assert result.q < 1
    assert result.estimate.se == pytest.approx(other.sd_eff_w_fe, rel=1e-12)
    assert result.estimate.df == 3


def test_without_error_variances_the_scatter_is_all():
    effect = np.array([50.0, 53.0, 47.0, 51.0])
    result = combine(effect, np.full(4, math.nan))
    assert result.estimate.value == pytest.approx(effect.mean())
    assert result.estimate.se == pytest.approx(effect.std(ddof=1) / 2, rel=1e-9)
    exact = combine(effect, np.zeros(4))
    assert exact.estimate.se == pytest.approx(result.estimate.se, rel=1e-6)


def test_one_and_none():
    assert combine([2.0], [0.1]).estimate.interval() is None
    with pytest.raises(NoContrast):
        combine([], [])
    with pytest.raises(ValueError, match="negative"):
        combine([1.0, 2.0], [0.1, -0.1])


numbers = st.lists(
    st.tuples(st.floats(-5, 5), st.floats(0.01, 2)), min_size=3, max_size=8
).map(np.array)  # fmt: skip


@given(numbers, st.floats(-100, 100), st.floats(0.01, 100))
@settings(max_examples=40, deadline=None)
def test_shift_and_unit(data, shift, unit):
    first = combine(data[:, 0], data[:, 1])
    second = combine(unit * data[:, 0] + shift, unit**2 * data[:, 1])
    assert second.estimate.value == pytest.approx(unit * first.estimate.value + shift, abs=1e-4)
    assert second.estimate.se == pytest.approx(unit * first.estimate.se, rel=1e-4)
    assert second.tau == pytest.approx(unit * first.tau, rel=1e-3, abs=1e-4 * unit)


@given(numbers)
@settings(max_examples=40, deadline=None)
def test_never_narrower_than_exact_errors_allow(data):
    result = combine(data[:, 0], data[:, 1])
    assert result.estimate.se >= math.sqrt(1 / (1 / data[:, 1]).sum()) * (1 - 1e-9)
    grid = np.linspace(0, 2 * result.tau**2 + 0.1, 60)

    def level(tau2):
        w = 1 / (data[:, 1] + tau2)
        mean = (w @ data[:, 0]) / w.sum()
        return 0.5 * (np.log(w).sum() - np.log(w.sum()) - w @ (data[:, 0] - mean) ** 2)

    assert level(result.tau**2) >= max(level(t) for t in grid) - 1e-7


def test_welch_difference_of_two_groups():
    """scipy.stats.ttest_ind(equal_var=False): without error variances it is Welch's test."""
    import scipy.stats

    a, b = np.array([50.0, 53, 47, 51]), np.array([40.0, 45, 41, 44, 43])
    (found,) = compare({"a": (a, np.zeros(4)), "b": (b, np.zeros(5))})
    other = scipy.stats.ttest_ind(a, b, equal_var=False)
    assert found.estimate.interval() == pytest.approx(tuple(other.confidence_interval()), rel=1e-5)
    assert found.estimate.df == pytest.approx(other.df, rel=1e-5)


def test_common_scatter_is_the_pooled_t_test():
    """scipy.stats.ttest_ind(equal_var=True)."""
    import scipy.stats

    a, b = np.array([50.0, 53, 47, 51]), np.array([40.0, 45, 41, 44, 43])
    groups = {"a": (a, np.zeros(4)), "b": (b, np.zeros(5))}
    (found,) = compare(groups, common_tau=True)
    other = scipy.stats.ttest_ind(a, b)
    assert found.estimate.interval() == pytest.approx(tuple(other.confidence_interval()), rel=1e-5)


def test_a_group_of_one_specimen():
    groups = {"a": ([50.0, 53, 47], [1.0, 1, 1]), "b": ([40.0], [1.0]), "c": ([45.0, 46], [1, 1])}
    own = {(d.a, d.b): d.estimate for d in compare(groups)}
    assert own["a", "b"].interval() is None
    assert own["a", "c"].interval() is not None
    common = {(d.a, d.b): d.estimate for d in compare(groups, common_tau=True)}
    assert common["a", "b"].df == 3
    assert common["a", "b"].interval() is not None
    alone = compare({"a": ([1.0], [0.1]), "b": ([2.0], [0.1])}, common_tau=True)
    assert alone[0].estimate.interval() is None
