"""The mixed model against published values and other implementations."""

import csv
from pathlib import Path

import numpy as np
import pytest
import scipy.stats
import statsmodels.regression.tests.results as statsmodels_results
from statsmodels.regression.mixed_linear_model import MixedLM
from statsmodels.regression.tests.results import lme_r_results

from campaign.statistics.mixed import fit_mixed

NIST = Path(scipy.stats.__file__).parent / "tests" / "data"
R_DATA = Path(statsmodels_results.__file__).parent


def nist(name, first):
    lines = (NIST / name).read_text().splitlines()[first:]
    return np.array([[float(field) for field in line.split()] for line in lines if line.split()])


def test_rails():
    """Pinheiro & Bates, Mixed-Effects Models in S and S-PLUS (2000), ch. 1."""
    travel = [55, 53, 54, 26, 37, 32, 78, 91, 85, 92, 100, 96, 49, 51, 50, 80, 85, 83]
    fit = fit_mixed(travel, np.ones((18, 1)), np.repeat(np.arange(6), 3))
    mean = fit.contrast([1.0])
    assert mean.value == pytest.approx(66.5, rel=1e-12)
    assert mean.se == pytest.approx(10.17104, rel=1e-6)
    assert mean.df == pytest.approx(5, rel=1e-6)
    assert fit.sigma_between == pytest.approx(24.80547, rel=1e-6)
    assert fit.sigma_within == pytest.approx(4.020779, rel=1e-6)


def test_one_way_anova_of_silicon_resistivity():
    """NIST StRD, SiRstv: certified mean squares; balanced random-effects ANOVA identities.

    E(MS between) = sigma_within^2 + 5 sigma_between^2 (Searle, Casella & McCulloch, Variance
    Components (1992), ch. 3); REML equals the ANOVA estimates where these are positive.
    """
    data = nist("nist_anova/SiRstv.dat", 60)
    assert data.shape == (25, 2)
    between, within = 1.27865654000000e-02, 1.08318280000000e-02
    fit = fit_mixed(data[:, 1], np.ones((25, 1)), data[:, 0])
    assert fit.sigma_within**2 == pytest.approx(within, rel=1e-7)
    assert fit.sigma_between**2 == pytest.approx((between - within) / 5, rel=1e-6)
    assert fit.contrast([1.0]).se == pytest.approx((between / 25) ** 0.5, rel=1e-7)
    assert fit.contrast([1.0]).df == pytest.approx(4, rel=1e-6)


def test_certified_residual_scatter_with_instruments_as_fixed_effects():
    """NIST StRD, SiRstv: certified residual standard deviation, 20 degrees of freedom."""
    data = nist("nist_anova/SiRstv.dat", 60)
    levels = (data[:, :1] == np.arange(2, 6)).astype(float)
    fit = fit_mixed(data[:, 1], np.column_stack([np.ones(25), levels]), np.arange(25))
    assert fit.sigma_between == pytest.approx(1.04076068334656e-01, rel=1e-9)
    assert fit.contrast([0, 1, 0, 0, 0]).df == pytest.approx(20, rel=1e-9)


def test_straight_line_of_ozone_monitors():
    """NIST StRD, Norris: one reading a specimen is ordinary least squares."""
    data = nist("nist_linregress/Norris.dat", 60)
    assert data.shape == (36, 2)
    fit = fit_mixed(data[:, 0], np.column_stack([np.ones(36), data[:, 1]]), np.arange(36))
    intercept, slope = fit.contrast([1, 0]), fit.contrast([0, 1])
    assert intercept.value == pytest.approx(-0.262323073774029, rel=1e-9)
    assert slope.value == pytest.approx(1.00211681802045, rel=1e-12)
    assert intercept.se == pytest.approx(0.232818234301152, rel=1e-9)
    assert slope.se == pytest.approx(0.429796848199937e-03, rel=1e-9)
    assert slope.df == pytest.approx(34, rel=1e-9)
    assert not fit.separable
    assert fit.sigma_between == pytest.approx(0.884796396144373, rel=1e-9)


def r_data(number):
    with (R_DATA / f"lme{number:02d}.csv").open() as file:
        rows = list(csv.DictReader(file))
    table = {name: np.array([float(row[name]) for row in rows]) for name in rows[0]}
    fixed = np.column_stack([table[name] for name in table if name.startswith("exog_fe")])
    random = np.column_stack([table[name] for name in table if name.startswith("exog_re")])
    assert (random[:, 0] == 1).all()
    return table["endog"], fixed, table["groups"], random[:, 1:]


CASES = [(number, "drf") for number in range(6)] + [(number, "irf") for number in range(6, 12)]


@pytest.mark.parametrize("method", ["REML", "ML"])
@pytest.mark.parametrize(("number", "effects"), CASES)
def test_models_fitted_in_r(number, effects, method):
    """lme4 fits in R, 7 digits, shipped with statsmodels (regression/tests/results).

    irf: intercept and slope independent, as here.
    """
    y, fixed, groups, random = r_data(number)
    fit = fit_mixed(y, fixed, groups, slopes=random if random.size else None, method=method)

    def reference(name):
        return getattr(lme_r_results, f"{name}_{method.lower()}_{effects}_{number}")

    variances = np.diag(np.atleast_2d(reference("cov_re")))
    loglik = float(reference("loglike")[0])
    assert fit.loglik >= loglik - 5e-4 * max(1, abs(loglik) / 100)
    assert fit.loglik == pytest.approx(loglik, rel=1e-5)
    np.testing.assert_allclose(fit.beta, reference("coef"), rtol=2e-4)
    np.testing.assert_allclose(fit.cov, reference("vcov"), rtol=1e-3, atol=1e-6)
    assert fit.sigma_within**2 == pytest.approx(float(reference("scale")[0]), rel=1e-3)
    got = [fit.sigma_between**2, *fit.sigma_slopes**2]
    np.testing.assert_allclose(got, variances, rtol=5e-3, atol=1e-4)


@pytest.mark.parametrize("number", [0, 2, 4, 5])
def test_predicted_effects_fitted_in_r(number):
    """lme4 conditional mode of the first group, shipped with statsmodels."""
    y, fixed, groups, _ = r_data(number)
    effects = fit_mixed(y, fixed, groups).blups()
    expected = float(getattr(lme_r_results, f"ranef_mean_reml_drf_{number}")[0])
    assert effects[0, 0] == pytest.approx(expected, rel=2e-3)


def campaign(seed, specimens=16, readings=60, strata=15, drop=0.0):
    rng = np.random.default_rng(seed)
    n = specimens * readings
    specimen = np.repeat(np.arange(specimens), readings)
    stratum = np.tile(np.arange(strata), n // strata)
    x = np.log([0.25, 0.5, 1.0, 2.0])[specimen % 4]
    y = -0.5 * x + rng.normal(0, 0.15, specimens)[specimen] + rng.normal(0, 0.04, n)
    y += rng.normal(0, 1, strata)[stratum]
    keep = rng.uniform(size=n) >= drop
    return y[keep], x[keep], specimen[keep], stratum[keep]


@pytest.mark.filterwarnings("ignore:The MLE may be on the boundary")
@pytest.mark.parametrize("drop", [0.0, 0.5])
def test_agreement_with_statsmodels(drop):
    """statsmodels MixedLM by REML, converged tightly: 1e-4 relative throughout."""
    y, x, specimen, stratum = campaign(5, drop=drop)
    fit = fit_mixed(y, x, specimen, stratum)
    strata = (stratum[:, None] == np.arange(15)).astype(float)
    model = MixedLM(y, np.column_stack([x, strata]), specimen)
    other = model.fit(reml=True, method="powell", ftol=1e-14)
    order = fit.contrast([1.0])
    assert order.value == pytest.approx(other.params[0], rel=1e-4)
    assert order.se == pytest.approx(other.bse[0], rel=1e-4)
    assert fit.sigma_within == pytest.approx(other.scale**0.5, rel=1e-4)
    assert fit.sigma_between == pytest.approx(np.asarray(other.cov_re)[0, 0] ** 0.5, rel=1e-4)
    np.testing.assert_allclose(fit.strata, other.params[1:16], rtol=1e-4, atol=1e-4)
