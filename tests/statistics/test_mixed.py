"""Properties of the mixed model that hold whatever the readings are."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.statistics.mixed import NoContrast, fit_mixed


def campaign(seed, specimens=8, between=0.15, within=0.04, gaps=True):
    rng = np.random.default_rng(seed)
    specimen = np.repeat(np.arange(specimens), 12)
    stratum = np.tile(np.arange(4), 3 * specimens)
    x = np.log([0.25, 0.5, 1.0, 2.0])[specimen % 4]
    y = -0.5 * x + rng.normal(0, between, specimens)[specimen] + rng.normal(0, within, x.size)
    y += rng.normal(0, 1, 4)[stratum]
    known = rng.uniform(0.01, 0.05, x.size) ** 2
    keep = rng.uniform(size=x.size) < 0.8 if gaps else np.full(x.size, True)
    return y[keep], x[keep], specimen[keep], stratum[keep], known[keep]


def numbers(fit):
    order = fit.contrast([1.0])
    return np.array([order.value, order.se, order.df, fit.sigma_between, fit.sigma_within])


seeds = st.integers(0, 10_000)


@given(seeds, st.floats(-50, 50), st.floats(-5, 5), st.booleans())
@settings(max_examples=25, deadline=None)
def test_shifts_change_nothing(seed, up, across, with_known):
    y, x, specimen, stratum, known = campaign(seed)
    given_known = known if with_known else None
    first = numbers(fit_mixed(y, x, specimen, stratum, given_known))
    second = numbers(fit_mixed(y + up * stratum, x + across, specimen, stratum, given_known))
    np.testing.assert_allclose(second, first, rtol=2e-5, atol=1e-6)


@given(seeds, st.floats(1e-6, 1e6), st.floats(1e-3, 1e3))
@settings(max_examples=25, deadline=None)
def test_units_carry_through(seed, of_y, of_x):
    y, x, specimen, stratum, known = campaign(seed)
    first = numbers(fit_mixed(y, x, specimen, stratum, known))
    second = numbers(fit_mixed(y * of_y, x * of_x, specimen, stratum, known * of_y**2))
    unit = [of_y / of_x, of_y / of_x, 1, of_y, of_y]
    np.testing.assert_allclose(second / unit, first, rtol=2e-5, atol=1e-6)


@given(seeds, st.permutations(range(8)), st.permutations(range(4)))
@settings(max_examples=25, deadline=None)
def test_order_of_rows_and_names_do_not_matter(seed, specimens, strata):
    y, x, specimen, stratum, known = campaign(seed)
    fit = fit_mixed(y, x, specimen, stratum, known)
    mix = np.random.default_rng(seed).permutation(y.size)
    names = np.array([f"cell {k}" for k in specimens])[specimen]
    strata_new = np.array(strata)[stratum]
    other = fit_mixed(y[mix], x[mix], names[mix], strata_new[mix], known[mix])
    np.testing.assert_allclose(numbers(other), numbers(fit), rtol=2e-5, atol=1e-6)
    assert other.loglik == pytest.approx(fit.loglik, rel=1e-9)
    np.testing.assert_allclose(other.strata[np.array(strata)], fit.strata, rtol=1e-4, atol=1e-5)


@given(seeds, st.integers(2, 20), st.sampled_from([0.0, 0.01, 0.15]))
@settings(max_examples=30, deadline=None)
def test_repeated_readings_do_not_narrow_an_interval_between_specimens(seed, times, between):
    y, x, specimen, stratum, _ = campaign(seed, between=between, gaps=False)
    once = fit_mixed(y, x, specimen, stratum)
    many = fit_mixed(*(np.repeat(part, times) for part in (y, x, specimen, stratum)))
    first, second = once.contrast([1.0]), many.contrast([1.0])
    width = np.subtract(*first.interval()[::-1]), np.subtract(*second.interval()[::-1])
    assert second.df <= 6 + 1e-9
    # copying a balanced campaign leaves the scatter of the specimen means, which is all there is
    means = np.array([y[specimen == k].mean() for k in range(8)])
    levels = np.array([x[specimen == k][0] for k in range(8)])
    line = np.polyfit(levels, means, 1)
    rest = means - np.polyval(line, levels)
    exact = math.sqrt(rest @ rest / 6 / ((levels - levels.mean()) ** 2).sum())
    assert second.se >= exact * (1 - 1e-6)
    if once.sigma_between > 0:
        assert width[1] >= width[0] * (1 - 1e-5)


@given(seeds)
@settings(max_examples=15, deadline=None)
def test_equal_known_variances_only_split_the_scatter_within(seed):
    y, x, specimen, stratum, _ = campaign(seed)
    plain = fit_mixed(y, x, specimen, stratum)
    given_part = (0.3 * plain.sigma_within) ** 2
    split = fit_mixed(y, x, specimen, stratum, np.full(y.size, given_part))
    assert split.contrast([1.0]).se == pytest.approx(plain.contrast([1.0]).se, rel=1e-5)
    whole = math.sqrt(split.sigma_within**2 + given_part)
    assert whole == pytest.approx(plain.sigma_within, rel=1e-5)
    assert split.loglik == pytest.approx(plain.loglik, rel=1e-9)


def test_known_variances_larger_than_the_scatter_leave_none_of_their_own():
    y, x, specimen, stratum, _ = campaign(3)
    fit = fit_mixed(y, x, specimen, stratum, np.full(y.size, 0.5**2))
    assert fit.sigma_within < 1e-3
    assert fit.at_boundary is (fit.sigma_between == 0.0)
    assert fit.sigma_between < fit_mixed(y, x, specimen, stratum).sigma_between


def test_balanced_design_is_the_regression_of_specimen_means():
    y, x, specimen, stratum, _ = campaign(1, gaps=False)
    order = fit_mixed(y, x, specimen, stratum).contrast([1.0])
    means = np.array([y[specimen == k].mean() for k in range(8)])
    levels = np.array([x[specimen == k][0] for k in range(8)])
    slope, cov = np.polyfit(levels, means, 1, cov=True)
    assert order.value == pytest.approx(slope[0], rel=1e-9)
    assert order.se == pytest.approx(cov[0, 0] ** 0.5, rel=1e-7)
    assert order.df == pytest.approx(6, rel=1e-6)


def test_scatter_between_at_zero_does_not_lend_degrees_of_freedom():
    specimen = np.repeat(np.arange(8), 10)
    x = np.repeat([0.0, 1, 2, 3], 20)
    y = np.tile([1.0, -1], 40)  # every specimen has the same mean
    fit = fit_mixed(y, x, specimen, np.zeros(80))
    assert fit.sigma_between == 0.0
    assert fit.at_boundary
    assert fit.contrast([1.0]).df == 6


def test_what_differs_within_specimens_may_use_the_readings():
    rng = np.random.default_rng(2)
    specimen = np.repeat(np.arange(5), 20)
    x = np.tile(np.linspace(0, 1, 20), 5)
    y = 2 * x + rng.normal(0, 1, 5)[specimen] + rng.normal(0, 0.1, 100)
    slope = fit_mixed(y, x, specimen, np.zeros(100)).contrast([1.0])
    assert slope.df == pytest.approx(94, rel=1e-3)
    assert slope.value == pytest.approx(2, abs=4 * slope.se)


def test_random_slopes_rest_on_the_number_of_specimens():
    rng = np.random.default_rng(4)
    specimen = np.repeat(np.arange(6), 40)
    x = np.tile(np.linspace(-1, 1, 40), 6)
    own = rng.normal(2, 0.5, 6)
    y = own[specimen] * x + rng.normal(0, 1, 6)[specimen] + rng.normal(0, 0.1, 240)
    fit = fit_mixed(y, x, specimen, np.zeros(240), slopes=x)
    slope = fit.contrast([1.0])
    each = [np.polyfit(x[:40], y[specimen == k], 1)[0] for k in range(6)]
    assert slope.value == pytest.approx(np.mean(each), rel=1e-9)
    assert slope.se == pytest.approx(np.std(each, ddof=1) / math.sqrt(6), rel=1e-6)
    assert slope.df == pytest.approx(5, rel=1e-3)
    assert fit.blups().shape == (6, 2)
    np.testing.assert_allclose(fit.blups()[:, 1], each - np.mean(each), atol=0.02)


def test_one_specimen_gives_an_estimate_without_interval():
    x = np.linspace(0, 1, 10)
    fit = fit_mixed(3 * x + 0.01 * np.cos(9 * x), x, np.zeros(10), np.zeros(10))
    slope = fit.contrast([1.0])
    assert slope.value == pytest.approx(3, abs=0.05)
    assert math.isnan(slope.se)
    assert slope.interval() is None
    assert fit.single_specimen
    assert math.isnan(fit.sigma_between)


def test_two_specimens_at_two_levels_have_none_to_spare():
    y = [1.0, 1.1, 0.9, 2.0, 2.1, 1.9]
    x = [0.0, 0, 0, 1, 1, 1]
    order = fit_mixed(y, x, [0, 0, 0, 1, 1, 1], [0] * 6).contrast([1.0])
    assert order.value == pytest.approx(1.0)
    assert math.isnan(order.se)


@pytest.mark.parametrize(
    ("x", "stratum"),
    [
        ([1.0, 1, 1, 1], [0, 0, 0, 0]),
        ([0.1, 0.1, 0.3, 0.3], [0, 0, 1, 1]),
        ([1e6, 1e6, 1e6, 1e6], [0, 1, 0, 1]),
        ([[0.0, 1], [1, 0], [0, 1], [1, 0]], [0, 0, 1, 1]),
    ],
)
def test_no_contrast_is_refused(x, stratum):
    with pytest.raises(NoContrast):
        fit_mixed([1.0, 2.0, 1.5, 2.5], x, [0, 1, 2, 3], stratum)


@pytest.mark.parametrize(
    "changed", [{"y": [1.0, math.nan, 2, 3]}, {"specimen": [0, 1]}, {"known": [-1.0, 0, 0, 0]}]
)
def test_arrays_that_do_not_fit_are_refused(changed):
    given = {"y": [1.0, 2, 3, 4], "X": [0.0, 1, 0, 1], "specimen": [0, 1, 2, 3]}
    with pytest.raises(ValueError, match=next(iter(changed))):
        fit_mixed(**{**given, **changed})


def test_contrasts_of_levels_and_strata_share_one_covariance():
    y, x, specimen, stratum, known = campaign(6)
    levels = (np.round(x, 6)[:, None] == np.round(np.log([0.5, 1, 2]), 6)).astype(float)
    fit = fit_mixed(y, levels, specimen, stratum, known)
    estimates, cov = fit.contrasts([[1, 0, 0], [0, 1, 0], [1, -1, 0]])
    assert estimates[2].value == pytest.approx(estimates[0].value - estimates[1].value)
    assert cov[2, 2] == pytest.approx(cov[0, 0] + cov[1, 1] - 2 * cov[0, 1])
    assert estimates[2].se == pytest.approx(cov[2, 2] ** 0.5)
    # a predicted level: 0.5 mol/L in the second stratum
    predicted = fit.contrast([1, 0, 0, 0, 1, 0, 0])
    assert predicted.value == pytest.approx(fit.beta[0] + fit.strata[1])
    here = (stratum == 1) & (levels[:, 0] == 1)
    assert predicted.value == pytest.approx(y[here].mean(), abs=0.3)
    assert 0 < predicted.df <= 4


def test_levels_without_noise_are_recovered_with_error_zero():
    specimen = np.repeat(np.arange(6), 4)
    x = np.repeat([0.0, 1, 2], 8)
    order = fit_mixed(1 + 0.5 * x, x, specimen, np.zeros(24)).contrast([1.0])
    assert order.value == pytest.approx(0.5, rel=1e-12)
    assert order.se < 1e-9


def test_the_odd_specimen_and_the_odd_reading_stand_out():
    y, x, specimen, stratum, known = campaign(7, specimens=12, gaps=False)
    y = y + 1.0 * (specimen == 5)
    y[17] += 1.0
    for given_known in (None, known):
        fit = fit_mixed(y, x, specimen, stratum, given_known)
        assert np.argmax(np.abs(fit.studentised_specimens())) == 5
        assert np.argmax(np.abs(fit.studentised_readings())) == 17
        assert abs(fit.studentised_specimens()[5]) > 3
        assert abs(fit.studentised_readings()[17]) > 5


def test_studentised_readings_are_those_of_dense_algebra():
    y, x, specimen, stratum, known = campaign(8, specimens=6)
    fit = fit_mixed(y, x, specimen, stratum, known)
    f = np.column_stack([x, stratum[:, None] == np.arange(4)]).astype(float)
    d = fit.sigma_within**2 + known
    v = np.diag(d) + fit.sigma_between**2 * (specimen[:, None] == specimen)
    vi = np.linalg.inv(v)
    p = vi - vi @ f @ np.linalg.inv(f.T @ vi @ f) @ f.T @ vi
    np.testing.assert_allclose(fit.residuals(), d * (p @ y), atol=1e-7)
    r = p @ y / np.sqrt(np.diag(p))
    nu = y.size - 5
    np.testing.assert_allclose(
        fit.studentised_readings(), r * np.sqrt((nu - 1) / (nu - r**2)), rtol=1e-5
    )


def test_a_million_readings():
    rng = np.random.default_rng(0)
    n = 1_000_000
    specimen = np.arange(n) % 40
    stratum = rng.integers(0, 30, n)
    x = (specimen % 4).astype(float)
    y = 0.5 * x + rng.normal(0, 0.15, 40)[specimen] + rng.normal(0, 0.04, n)
    fit = fit_mixed(y, x, specimen, stratum)
    assert fit.sigma_within == pytest.approx(0.04, rel=0.01)
    assert fit.contrast([1.0]).df == pytest.approx(38, rel=1e-3)


@pytest.mark.parametrize("slopes", [False, True])
def test_adjusted_error_is_that_of_dense_algebra(slopes):
    """Kenward & Roger, Biometrics 53 (1997) 983, written with n x n matrices."""
    rng = np.random.default_rng(12)
    y, x, specimen, stratum, known = campaign(9, specimens=6)
    x = x + rng.normal(0, 0.3, x.size)
    fit = fit_mixed(y, x, specimen, stratum, known, x if slopes else None)
    f = np.column_stack([x, stratum[:, None] == np.arange(4)]).astype(float)
    same = (specimen[:, None] == specimen).astype(float)
    parts = [np.eye(x.size), same] + ([same * np.outer(x, x)] if slopes else [])
    theta = [fit.sigma_within**2, fit.sigma_between**2, *fit.sigma_slopes**2]
    v = np.diag(known) + sum(t * part for t, part in zip(theta, parts, strict=True))
    vi = np.linalg.inv(v)
    cov = np.linalg.inv(f.T @ vi @ f)
    p = vi - vi @ f @ cov @ f.T @ vi
    w = np.linalg.inv([[0.5 * np.trace(p @ k @ p @ j) for j in parts] for k in parts])
    a = vi @ f @ cov[:, 0]
    extra = 2 * sum(
        w[k, j] * (a @ parts[k] @ p @ parts[j] @ a)
        for k in range(len(parts))
        for j in range(len(parts))
    )
    assert fit.contrast([1.0]).se ** 2 == pytest.approx(cov[0, 0], rel=1e-6)
    assert fit.contrast([1.0], adjusted=True).se ** 2 == pytest.approx(cov[0, 0] + extra, rel=1e-6)


def test_a_balanced_campaign_needs_no_adjustment():
    y, x, specimen, stratum, _ = campaign(10, gaps=False)
    fit = fit_mixed(y, x, specimen, stratum)
    assert fit.contrast([1.0], adjusted=True).se == pytest.approx(fit.contrast([1.0]).se, rel=1e-7)
