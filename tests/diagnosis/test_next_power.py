"""The averaged chance of a decision: against exact results, and the rule against `decide`."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.stats import norm

from campaign.diagnosis.next_power import (
    Estimates,
    Linear,
    Problem,
    Rule,
    Scatter,
    Unknown,
    _combined,
    decided,
    falls_to,
    outlook,
)
from campaign.statistics.estimate import Estimate
from campaign.trends.findings import Contrast, Finding


def mean_problem(value, n, sd, df, margin, alpha=0.05, family="single"):
    """One mean of n specimens with scatter sd at df, asked to lie beyond or inside a margin."""
    model = Linear(np.array([[float(n)]]), np.array([n * value]), sd**2 * df, df, np.eye(1))
    rows = np.ones((1, 1, 1))
    rule = Rule(margin, alpha, family)
    return Problem(model, model, Scatter(sd**2, df), rule, rows, rows, 0.0)


def test_known_scatter_gives_the_closed_form_of_the_averaged_chance():
    # O'Hagan, Stevens & Campbell, Pharm. Stat. 4 (2005) 187: with known variance and a normal
    # distribution of the truth the averaged chance is a normal integral. Worked out here for a
    # mean b of n specimens and m new ones: the mean of all is normal about b with variance
    # V m / (n (n + m)).
    value, n, m, sd, margin, alpha = 0.5, 6, 8, 0.4, 0.25, 0.05
    spread = sd * math.sqrt(m / (n * (n + m)))
    half = norm.ppf(1 - alpha / 2) * sd / math.sqrt(n + m)
    responds = norm.sf((margin + half - value) / spread)
    responds += norm.cdf((-margin - half - value) / spread)
    problem = mean_problem(value, n, sd, 1e7, margin, alpha)
    found = outlook(problem, [0] * m, draws=200_000, seed=3)
    assert found.responds == pytest.approx(responds, abs=0.005)
    assert found.half_width == pytest.approx(half, rel=1e-3)


def test_known_scatter_gives_the_closed_form_of_unresponsive():
    value, n, m, sd, margin, alpha = 0.05, 6, 20, 0.4, 0.4, 0.05
    spread = sd * math.sqrt(m / (n * (n + m)))
    half = norm.ppf(1 - alpha) * sd / math.sqrt(n + m)
    inside = norm.cdf((margin - half - value) / spread)
    inside -= norm.cdf((-margin + half - value) / spread)
    problem = mean_problem(value, n, sd, 1e7, margin, alpha)
    found = outlook(problem, [0] * m, draws=200_000, seed=4)
    assert found.unresponsive == pytest.approx(inside, abs=0.005)


def test_the_chance_averaged_over_the_unknown_is_less_than_the_plug_in_one():
    problem = mean_problem(0.75, 4, 0.25, 3, 0.25)
    # many specimens behind it, at the same value: the truth is nearly the estimate
    sure = replace(problem, scatter=Scatter(0.25**2, 1e7))
    rng = np.random.default_rng(1)
    own = problem.levels
    hits = 0
    for _ in range(4000):  # the estimate and the scatter put in for the truth
        new = rng.normal(0.75, 0.25, 4)
        total = (own.right[0] + new.sum()) / 8
        squares = own.sse + 4 * 0.75**2 + float(new @ new) - 8 * total**2
        e = Estimate(total, math.sqrt(squares / 7 / 8), 7)
        hits += Finding("solvent", "R_ct", 8, 8, contrasts=(Contrast("a", "b", e),),
                        contrast_margin=0.25).decision() == "responds"  # fmt: skip
    plug_in = hits / 4000
    averaged = outlook(problem, [0] * 4, draws=20_000).chance
    assert averaged < plug_in - 0.05
    assert averaged < outlook(sure, [0] * 4, draws=20_000).chance


def test_present_and_new_units_together_are_one_least_squares_fit():
    rng = np.random.default_rng(5)
    X, y = rng.normal(size=(9, 3)), rng.normal(size=9)
    more, new = rng.normal(size=(4, 3)), rng.normal(size=(2, 4))
    _, rest, _, _ = np.linalg.lstsq(X, y, rcond=None)
    contrast = np.array([[0.0, 1.0, -1.0]])
    model = Linear(X.T @ X, X.T @ y, float(rest[0]), 6.0, contrast)
    rows = np.zeros((1, 1, 3))
    problem = Problem(model, model, Scatter(1.0, 6.0), Rule(1.0, 0.05), rows, rows, 0.0)
    found = _combined(problem, model, more, new)
    for draw in range(2):
        A, b = np.vstack([X, more]), np.concatenate([y, new[draw]])
        whole, squares, _, _ = np.linalg.lstsq(A, b, rcond=None)
        variance = float(squares[0]) / 10 * contrast @ np.linalg.inv(A.T @ A) @ contrast.T
        assert found.df == 10
        assert found.value[draw, 0] == pytest.approx(float((contrast @ whole)[0]))
        assert found.se[draw, 0] == pytest.approx(math.sqrt(float(variance[0, 0])))


@settings(max_examples=60, deadline=None)
@given(
    values=st.lists(st.floats(-1.5, 1.5), min_size=3, max_size=3),
    se=st.floats(0.02, 0.5),
    df=st.sampled_from([2.0, 4.0, 9.0, 30.0]),
    alpha=st.sampled_from([0.05, 0.025]),
    family=st.sampled_from(["single", "tukey", "dunnett", "bonferroni"]),
    slope=st.one_of(st.none(), st.floats(-0.8, 0.8)),
)
def test_the_rule_is_that_of_the_findings(values, se, df, alpha, family, slope):
    estimates = tuple(
        Contrast(f"{i}", "x", Estimate(value, se * (1 + i), df)) for i, value in enumerate(values)
    )
    related = np.array([[1.0, 0.5, 0.4], [0.5, 1.0, 0.3], [0.4, 0.3, 1.0]])
    k = 4 if family == "dunnett" else 3
    finding = Finding(
        "concentration" if slope is not None else "solvent", "R_ct", 9, 9,
        slope=None if slope is None else Estimate(slope, se, df),
        slope_margin=None if slope is None else 0.15, contrasts=estimates,
        contrast_margin=math.log(1.5), family=family, n_levels=k,
        correlation=tuple(map(tuple, related.tolist())),
    )  # fmt: skip
    levels = Estimates(np.array([values]), se * np.array([[1.0, 2.0, 3.0]]), df, (0, 1, 2), related)
    order = None if slope is None else Estimates(np.array([[slope]]), np.array([[se]]), df, (0,))
    rule = Rule(math.log(1.5), alpha, family, None if slope is None else 0.15)
    responds, flat = decided(rule, order, levels, k)
    word = finding.decision(alpha)
    assert bool(responds[0]) == word.startswith("responds")
    assert bool(flat[0]) == (word == "unresponsive")


def test_more_cells_decide_more_often_and_a_seed_repeats_the_answer():
    problem = mean_problem(0.9, 4, 0.4, 3, 0.3)
    chances = [outlook(problem, [0] * m, draws=4000).chance for m in (1, 3, 8, 20)]
    assert chances == sorted(chances)
    assert outlook(problem, [0] * 3) == outlook(problem, [0] * 3)
    assert outlook(problem, [0] * 3, seed=1) != outlook(problem, [0] * 3, seed=2)


def test_without_any_scatter_known_in_advance_nothing_is_decided_by_one_cell():
    empty = Linear(np.zeros((1, 1)), np.zeros(1), 0.0, 0.0, np.eye(1))
    rows = np.ones((1, 1, 1))
    unknown = Unknown((1.0, 2.0), np.ones(1))
    problem = Problem(
        empty, empty, Scatter(0.1**2, 6.0), Rule(0.3, 0.05), rows, rows, 0.0, unknown=unknown
    )
    assert outlook(problem, [0]).chance == 0
    many = outlook(problem, [0] * 8)
    assert many.chance > 0.95
    assert many.responds == pytest.approx(0.5, abs=0.05)  # even odds of an effect


def test_scatter_that_would_do_reaches_the_chance_and_more_does_not():
    problem = mean_problem(0.55, 3, 0.5, 2, 0.3)
    factor = falls_to(problem, [0] * 3, 0.8, draws=4000)
    assert factor is not None and 0 < factor < 1

    def chance(f):
        quiet = replace(
            problem, scatter=problem.scatter.scaled(f),
            truth=replace(problem.truth, sse=problem.truth.sse * f**2),
            levels=replace(problem.levels, sse=problem.levels.sse * f**2),
        )  # fmt: skip
        return outlook(quiet, [0] * 3, draws=4000).chance

    assert chance(factor) >= 0.8 > chance(min(1.3 * factor, 1.0))


def test_an_estimate_at_its_margin_is_not_decided_by_any_scatter():
    problem = mean_problem(0.3, 50, 0.001, 49, 0.3)
    assert falls_to(problem, [0] * 3, 0.97, draws=500) is None


def test_variances_are_drawn_from_scaled_inverse_chi_squares():
    # mean of a scaled inverse chi-square: s2 df / (df - 2) (Gelman et al., Bayesian Data Analysis,
    # 3rd ed., app. A)
    scatter = Scatter(0.04, 8.0, within=0.01, df_within=30.0, k_typical=0.2)
    typical, between = scatter.draw(np.random.default_rng(2), 200_000)
    assert typical.mean() == pytest.approx(0.04 * 8 / 6, rel=0.02)
    assert between.mean() == pytest.approx(0.04 * 8 / 6 - 0.2 * 0.01 * 30 / 28, rel=0.02)
    assert (between > 0).all()
