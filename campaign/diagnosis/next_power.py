"""The chance that more cells decide an axis, averaged over what is not known.

Data are brought to units: one value a cell (ln R with its strata taken out), a barrier a
specimen, and so on. A unit has the variance sigma_between^2 + k sigma_within^2. For each draw

1. both variances are drawn from their scaled inverse chi-square distributions [1],
2. the true effects from the normal distribution of the present estimate under that variance,
   so that they follow its t distribution [1],
3. new units from truth and variances,
4. present and new units are combined (precisions add, residual squares and degrees of freedom
   are pooled), and the decision rule of `statistics.equivalence` is applied.

The chance is the share of draws in which the axis is decided. Putting the present estimates in
for the truth instead would promise too much.

[1] Gelman et al., Bayesian Data Analysis, 3rd ed. (2013), sec. 3.2 and 14.2 (flat prior on the
    effects and on ln sigma).
[2] O'Hagan, Stevens & Campbell, Pharm. Stat. 4 (2005) 187 (the averaged chance, "assurance").
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from campaign.ledger.readings import BoolArray, FloatArray
from campaign.statistics.equivalence import Family

DRAWS = 2000
SEED = 20260301
_DUST = 1e-9


@dataclass(frozen=True)
class Linear:
    """A linear model of the units: normal equations of the present ones, contrasts asked of it.

    normal (p, p) = X'X and right (p,) = X'y in units of the typical variance; sse: residual
    sum of squares; df: its degrees of freedom; contrasts (q, p).
    """

    normal: FloatArray
    right: FloatArray
    sse: float
    df: float
    contrasts: FloatArray

    @property
    def beta(self) -> FloatArray:
        """Return the least-squares coefficients (least norm where some are free)."""
        return np.asarray(np.linalg.pinv(self.normal, hermitian=True) @ self.right)

    @property
    def rank(self) -> int:
        """Return the number of coefficients that are determined."""
        return int(np.linalg.matrix_rank(self.normal, hermitian=True)) if self.normal.any() else 0


@dataclass(frozen=True)
class Scatter:
    """Variance of a unit of typical weight [unit of y squared] and of a reading, with their df.

    typical = between + k_typical x within, k the multiple of a reading's variance.
    """

    typical: float
    df: float
    within: float = 0.0
    df_within: float = math.inf
    k_typical: float = 0.0

    def draw(self, rng: np.random.Generator, n: int) -> tuple[FloatArray, FloatArray]:
        """Return n draws of the typical variance and of the variance between specimens."""
        typical = self.typical * self.df / rng.chisquare(self.df, n)
        within = np.full(n, self.within)
        if math.isfinite(self.df_within) and self.within > 0:
            within = self.within * self.df_within / rng.chisquare(self.df_within, n)
        return typical, np.maximum(typical - self.k_typical * within, 0.05 * typical)

    def of_new(self, k: float) -> float:
        """Return the variance of a unit with k times the variance of a reading."""
        between = max(self.typical - self.k_typical * self.within, 0.05 * self.typical)
        return between + k * self.within

    def scaled(self, factor: float) -> Scatter:
        """Return the scatter with every standard deviation multiplied by `factor`."""
        return replace(self, typical=self.typical * factor**2, within=self.within * factor**2)


@dataclass(frozen=True)
class Rule:
    """What decides: the margins, the family of the contrasts and the error probability."""

    contrast_margin: float
    alpha: float
    family: Family = "single"
    slope_margin: float | None = None


@dataclass(frozen=True)
class Unknown:
    """An axis not measured so far: nothing or an effect is there, with even odds.

    size: least and largest effect [in units of the coefficients' effect]; direction (p,): the
    coefficients of an effect of one.
    """

    size: tuple[float, float]
    direction: FloatArray


@dataclass(frozen=True)
class Problem:
    """One axis of one response as it stands, and the new units that could be added.

    truth: the model the true values are drawn from; slope, levels: the models the decision is
    made from (slope None where the axis has none). rows_*: (slots, rows a cell, columns) of
    what one new cell adds; k: its multiple of the variance of a reading. units_per_cell: rows
    a cell that are not independent specimens. n_levels_now: number of levels the family of
    contrasts counts, 0: as many as there are.
    """

    truth: Linear
    levels: Linear
    scatter: Scatter
    rule: Rule
    rows_truth: FloatArray
    rows_levels: FloatArray
    k: float
    slope: Linear | None = None
    unknown: Unknown | None = None
    units_per_cell: int = 1
    n_levels_now: int = 0


@dataclass(frozen=True)
class Outlook:
    """What a set of new cells promises.

    chance: of a decision; responds, unresponsive: its parts; half_width: median half width of
    the telling interval at 1 - alpha; df: degrees of freedom then.
    """

    chance: float
    responds: float
    unresponsive: float
    half_width: float
    df: float


Kind = Literal["truth", "levels"]


def added(problem: Problem, slots: Sequence[int], which: Kind) -> FloatArray:
    """Return the rows (units, p) that new cells in `slots` add to a model."""
    rows = problem.rows_truth if which == "truth" else problem.rows_levels
    picked = rows[list(slots)]
    return np.asarray(picked.reshape(-1, rows.shape[-1]))


def outlook(
    problem: Problem,
    slots: Sequence[int],
    *,
    draws: int = DRAWS,
    seed: int = SEED,
    show: FloatArray | None = None,
) -> Outlook:
    """Return the outlook of building one cell in each of `slots` (a slot may be repeated).

    show: the contrast of the decision model whose interval is to be shown (default: the slope,
    else the first contrast).
    """
    rng = np.random.default_rng(seed)
    scatter = problem.scatter
    typical, between = scatter.draw(rng, draws)
    within = (typical - between) / scatter.k_typical if scatter.k_typical > 0 else 0.0 * typical
    new_variance = between + problem.k * within
    truth = _truths(problem, rng, typical, draws)
    new_T = added(problem, slots, "truth")
    noise = rng.standard_normal((draws, len(new_T)))
    # rows in units of the typical variance: a unit with less of it weighs more
    weight = math.sqrt(scatter.typical / scatter.of_new(problem.k))
    y = weight * (truth @ new_T.T + np.sqrt(new_variance)[:, None] * noise)
    levels = _combined(problem, problem.levels, weight * added(problem, slots, "levels"), y)
    slope = None
    if problem.slope is not None:
        slope = _combined(problem, problem.slope, weight * new_T, y)
    responds, flat = decided(problem.rule, slope, levels, problem.n_levels_now)
    shown = slope if slope is not None else levels
    position = 0 if show is None or slope is not None else _position(problem.levels, show, levels)
    width = _half_width(shown, position, problem.rule.alpha)
    yes, no = float(responds.mean()), float(flat.mean())
    return Outlook(yes + no, yes, no, width, shown.df)


def _truths(
    problem: Problem, rng: np.random.Generator, typical: FloatArray, draws: int
) -> FloatArray:
    """Return draws (draws, p) of the true coefficients."""
    values, vectors = np.linalg.eigh(problem.truth.normal)
    kept = values > _DUST * max(float(values[-1]), 1e-300)
    root = vectors[:, kept] / np.sqrt(values[kept])
    z = rng.standard_normal((draws, int(kept.sum())))
    truth = problem.truth.beta[None, :] + np.sqrt(typical)[:, None] * (z @ root.T)
    if problem.unknown is None:
        return np.asarray(truth)
    low, high = problem.unknown.size
    effect = np.where(rng.random(draws) < 0.5, 0.0, rng.uniform(low, high, draws))
    effect *= rng.choice([-1.0, 1.0], draws)
    return np.asarray(truth + effect[:, None] * problem.unknown.direction[None, :])


@dataclass(frozen=True)
class Estimates:
    """Estimates (draws, q) and standard errors (draws, q) of q contrasts, and their df.

    which: the contrasts of the model they are; correlation (q, q) of them.
    """

    value: FloatArray
    se: FloatArray
    df: float
    which: tuple[int, ...] = ()
    correlation: FloatArray | None = None


def _combined(problem: Problem, model: Linear, rows: FloatArray, y: FloatArray) -> Estimates:
    """Return the contrasts of present and new units together, those that can be estimated."""
    normal = model.normal + rows.T @ rows
    right = model.right[None, :] + y @ rows
    inverse = np.asarray(np.linalg.pinv(normal, hermitian=True), np.float64)
    beta = right @ inverse
    own = model.beta
    squares = model.sse + float(own @ model.normal @ own) + (y**2).sum(axis=1)
    sse = np.maximum(squares - (beta * right).sum(axis=1), 0.0)
    gained = int(np.linalg.matrix_rank(normal, hermitian=True)) - model.rank
    spare = model.df + len(rows) - gained
    which = _estimable(model.contrasts, normal, inverse)
    rows_of = model.contrasts[list(which)]
    if spare <= 0 or not which:
        nothing = np.full((len(y), len(which)), np.nan)
        return Estimates(nothing, nothing, 0.0, which)
    covariance = rows_of @ inverse @ rows_of.T
    scale = np.sqrt(covariance.diagonal())
    se = np.sqrt(sse / spare)[:, None] * scale[None, :]
    df = float(spare / problem.units_per_cell)
    return Estimates(beta @ rows_of.T, se, df, which, covariance / scale[:, None] / scale)


def _estimable(contrasts: FloatArray, normal: FloatArray, inverse: FloatArray) -> tuple[int, ...]:
    """Return which contrasts the data determine."""
    if not len(contrasts):
        return ()
    rest = np.abs(contrasts @ (normal @ inverse) - contrasts).max(axis=1)
    return tuple(np.flatnonzero(rest < 1e-6).tolist())


def decided(
    rule: Rule, slope: Estimates | None, levels: Estimates, n_levels: int = 0
) -> tuple[BoolArray, BoolArray]:
    """Return where the axis responds (either way) and where it is unresponsive, draw by draw.

    The rule of `statistics.equivalence.decide`, for many data sets at once.
    """
    from campaign.statistics.comparisons import critical

    count = levels.value.shape[1]
    flat = _inside(levels, rule.contrast_margin, rule.alpha)
    if slope is not None:
        if slope.df <= 0 or not slope.value.shape[1]:
            nothing = np.zeros(len(levels.value), np.bool_)
            return nothing, nothing
        value, se = slope.value[:, 0], slope.se[:, 0]
        margin = rule.slope_margin or 0.0
        responds = np.asarray(np.abs(value) - _t(slope.df, rule.alpha) * se > margin, np.bool_)
        level = np.abs(value) + _t(slope.df, 2 * rule.alpha) * se < margin
        return responds, np.asarray(~responds & level & flat)
    if levels.df <= 0 or not count:
        nothing = np.zeros(len(levels.value), np.bool_)
        return nothing, nothing
    k = n_levels or _levels_of(rule.family, count)
    related = levels.correlation if rule.family == "dunnett" else None
    factor = critical(rule.family, rule.alpha, levels.df, k, related, count)
    lower = np.abs(levels.value) - factor * levels.se
    responds = np.asarray((lower > rule.contrast_margin).any(axis=1), np.bool_)
    return responds, np.asarray(~responds & flat)


def _levels_of(family: Family, count: int) -> int:
    """Return the number of levels behind `count` contrasts."""
    if family == "dunnett":
        return count + 1
    return round((1 + math.sqrt(1 + 8 * count)) / 2)


def _inside(levels: Estimates, margin: float, alpha: float) -> BoolArray:
    if levels.df <= 0:
        return np.zeros(len(levels.value), np.bool_)
    upper = np.abs(levels.value) + _t(levels.df, 2 * alpha) * levels.se
    return np.asarray((upper < margin).all(axis=1))


def _t(df: float, alpha: float) -> float:
    """Return the two-sided t quantile at error probability alpha."""
    from scipy.special import stdtrit

    return float(stdtrit(min(df, 1e9), 1 - alpha / 2))


def _position(model: Linear, show: FloatArray, found: Estimates) -> int:
    """Return where the contrast `show` stands among those estimated, 0 if it does not."""
    for place, which in enumerate(found.which):
        if np.array_equal(model.contrasts[which], show):
            return place
    return 0


def _half_width(found: Estimates, position: int, alpha: float) -> float:
    if found.df <= 0 or not found.se.shape[1]:
        return math.nan
    return _t(found.df, alpha) * float(np.median(found.se[:, position]))


def falls_to(
    problem: Problem,
    slots: Sequence[int],
    target: float,
    *,
    draws: int = DRAWS,
    seed: int = SEED,
) -> float | None:
    """Return the factor to which all scatter would have to fall for `slots` to reach `target`.

    None where even a hundredth of it would not do: the estimate then lies at a margin.
    """

    def reached(factor: float) -> bool:
        # all scatter, that of the present cells too: the same campaign, better reproduced
        smaller = replace(
            problem,
            scatter=problem.scatter.scaled(factor),
            truth=_quieter(problem.truth, factor),
            levels=_quieter(problem.levels, factor),
            slope=None if problem.slope is None else _quieter(problem.slope, factor),
        )
        return outlook(smaller, slots, draws=draws, seed=seed).chance >= target

    if not reached(0.01):
        return None
    low, high = 0.01, 1.0
    for _ in range(7):
        middle = math.sqrt(low * high)
        low, high = (middle, high) if reached(middle) else (low, middle)
    return low


def _quieter(model: Linear, factor: float) -> Linear:
    return replace(model, sse=model.sse * factor**2)
