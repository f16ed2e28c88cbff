"""The absorbed likelihood against the same formulas written with dense matrices."""

import numpy as np
import pytest

from campaign.statistics.design import prepare
from campaign.statistics.likelihood import Likelihood


def dense(data, theta, reml):
    """REML/ML value, score, expected information, with n x n matrices throughout."""
    n, p, s = data.n, data.p, data.s
    strata = np.zeros((n, s))
    if s:
        strata[np.arange(n), data.stratum] = 1
    fixed = np.hstack([data.columns[:, :p], strata])
    y = data.columns[:, p]
    parts = [np.eye(n)]
    for k in range(data.q):
        z = np.zeros((n, data.m))
        z[np.arange(n), data.specimen] = data.z[:, k]
        parts.append(z @ z.T)
    v = sum(t * part for t, part in zip(theta, parts, strict=True))
    if data.known is not None:
        v = v + np.diag(data.known)
    vi = np.linalg.inv(v)
    cov = np.linalg.inv(fixed.T @ vi @ fixed)
    proj = vi - vi @ fixed @ cov @ fixed.T @ vi
    in_trace = proj if reml else vi
    f = fixed.shape[1]
    value = n * np.log(2 * np.pi) + np.linalg.slogdet(v)[1] + y @ proj @ y
    if reml:
        value += -f * np.log(2 * np.pi) - np.linalg.slogdet(cov)[1]
    score = [0.5 * (y @ proj @ k @ proj @ y - np.trace(in_trace @ k)) for k in parts]
    info = [[0.5 * np.trace(in_trace @ k @ in_trace @ j) for j in parts] for k in parts]
    return -0.5 * value, np.array(score), np.array(info), cov


def readings(rng, strata=True, known=True, slopes=0):
    n = 40
    specimen = rng.integers(0, 7, n)
    x = rng.normal(size=(n, 2))
    return prepare(
        rng.normal(size=n) + rng.normal(size=7)[specimen],
        x if strata else np.column_stack([np.ones(n), x]),
        specimen,
        rng.integers(0, 3, n) if strata else None,
        rng.uniform(0, 0.3, n) if known else None,
        rng.normal(size=(n, slopes)) if slopes else None,
    ).data


@pytest.mark.parametrize("reml", [True, False])
@pytest.mark.parametrize("slopes", [0, 1, 2])
@pytest.mark.parametrize("known", [True, False])
@pytest.mark.parametrize("strata", [True, False])
@pytest.mark.parametrize("zero", [True, False])
def test_value_score_and_information_equal_the_dense_ones(reml, slopes, known, strata, zero):
    rng = np.random.default_rng(11)
    data = readings(rng, strata, known, slopes)
    theta = rng.uniform(0.2, 1.5, 2 + slopes)
    if zero:
        theta[-1] = 0.0
    point = Likelihood.of(data, reml).at(theta)
    value, score, info, cov = dense(data, theta, reml)
    assert point.loglik == pytest.approx(value, rel=1e-11)
    np.testing.assert_allclose(point.score, score, rtol=1e-9, atol=1e-9)
    np.testing.assert_allclose(point.information, info, rtol=1e-9, atol=1e-10)
    np.testing.assert_allclose(point.cov, cov, rtol=1e-9, atol=1e-12)


@pytest.mark.parametrize("seed", range(6))
@pytest.mark.parametrize("slopes", [0, 1])
@pytest.mark.parametrize("known", [True, False])
def test_no_other_optimiser_climbs_higher(seed, slopes, known):
    """scipy.optimize.minimize (Nelder-Mead) on the logarithms, from several starts."""
    from scipy.optimize import minimize

    from campaign.statistics.mixed import fit_mixed

    rng = np.random.default_rng([seed, slopes, known])
    n, m = 60, 6
    specimen, stratum = rng.integers(0, m, n), rng.integers(0, 4, n)
    x = rng.normal(size=n)
    y = 0.5 * x + rng.normal(0, rng.choice([0, 0.3, 3]), m)[specimen] + rng.normal(0, 0.5, n)
    variances = rng.uniform(0, 0.5, n) ** 2 if known else None
    columns = x if slopes else None
    fit = fit_mixed(y, x, specimen, stratum, variances, columns)
    design = prepare(y, x, specimen, stratum, variances, columns)
    likelihood = Likelihood.of(design.data, True)
    offset = fit.loglik - likelihood.at(fit._point.theta).loglik

    def below(logs):
        return -likelihood.at(np.exp(np.clip(logs, -18, 8))).loglik - offset

    for start in ([-1.0, -1, -1], [-3, 1, 1], [0, -6, -6]):
        other = minimize(below, start[: 2 + slopes], method="Nelder-Mead", options={"fatol": 1e-10})
        assert fit.loglik >= -other.fun - 1e-6
