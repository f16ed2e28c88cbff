"""One axis as a planning problem: the units measured so far and the cells that could be added.

Everything here is bookkeeping: which level and which group of held conditions a cell belongs
to. The numbers are made in `next_power`.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import combinations

import numpy as np

from campaign.diagnosis.next_cells import NewCell
from campaign.diagnosis.next_power import Linear, Problem, Rule, Scatter, Unknown
from campaign.ledger.readings import FloatArray, IntArray
from campaign.statistics.estimate import Estimate
from campaign.trends.findings import Finding

EFFECT = (1.5, 3.0)
"""The effects, in margins, that an axis never measured is taken to have, if it has one."""

EVEN_ODDS = (
    "nothing is known of this axis yet: no effect, and one of "
    f"{EFFECT[0]:g} to {EFFECT[1]:g} margins, are given even odds"
)


@dataclass(frozen=True)
class Slot:
    """A cell that can be built: its level, its group of held conditions, and what to build.

    new: the level was not measured so far in its group.
    """

    cell: NewCell
    level: int
    group: int
    new: bool = False


@dataclass(frozen=True)
class Layout:
    """A planning problem with its slots.

    show: the contrast whose interval is told; shown_now: its present estimate, with `between`
    the levels it compares ('' for an order). unit: 'order', 'factor' or 'kJ/mol'.
    assumed: what had to be taken for granted.
    """

    problem: Problem
    slots: tuple[Slot, ...]
    unit: str
    show: FloatArray | None = None
    shown_now: Estimate | None = None
    between: tuple[str, str] | None = None
    assumed: tuple[str, ...] = ()


@dataclass(frozen=True)
class Units:
    """One value a unit: y (n,), k (n,) multiples of the variance of a reading, level and group
    codes (n,), and the variance of a reading with its degrees of freedom."""

    y: FloatArray
    k: FloatArray
    level: IntArray
    group: IntArray
    within: float = 0.0
    df_within: float = math.inf

    def __len__(self) -> int:
        return len(self.y)


def columns(level: IntArray, group: IntArray, n_levels: int, n_groups: int) -> FloatArray:
    """Return indicator rows (n, n_levels + n_groups); contrasts of levels are estimable."""
    left = np.asarray(level)[:, None] == np.arange(n_levels)[None, :]
    right = np.asarray(group)[:, None] == np.arange(n_groups)[None, :]
    return np.hstack([left, right]).astype(np.float64)


def pairs(n_levels: int, width: int, base: int | None = None) -> FloatArray:
    """Return the contrasts (q, width): every pair, later less earlier, or each less `base`."""
    chosen = (
        [(b, a) for a, b in combinations(range(n_levels), 2)]
        if base is None
        else [(one, base) for one in range(n_levels) if one != base]
    )
    rows = np.zeros((len(chosen), width))
    for row, (a, b) in zip(rows, chosen, strict=True):
        row[a], row[b] = 1.0, -1.0
    return rows


def linear(X: FloatArray, y: FloatArray, weight: FloatArray, contrasts: FloatArray) -> Linear:
    """Return the model of units with rows X (n, p) and weights (n,) [of the typical unit]."""
    if not len(y):
        p = X.shape[1]
        return Linear(np.zeros((p, p)), np.zeros(p), 0.0, 0.0, contrasts)
    rows, values = X * np.sqrt(weight)[:, None], y * np.sqrt(weight)
    normal, right = rows.T @ rows, rows.T @ values
    beta = np.linalg.pinv(normal, hermitian=True) @ right
    rest = values - rows @ beta
    df = len(y) - int(np.linalg.matrix_rank(normal, hermitian=True))
    return Linear(normal, right, float(rest @ rest), float(df), contrasts)


def weights(units: Units, X: FloatArray) -> tuple[FloatArray, float]:
    """Return weights (n,) of the units and the typical k; a unit of it weighs one."""
    if not len(units):
        return np.zeros(0), 1.0
    k = float(np.median(units.k))
    plain = linear(X, units.y, np.ones(len(units)), np.zeros((0, X.shape[1])))
    mean_square = plain.sse / plain.df if plain.df > 0 else math.nan
    if not mean_square > 0 or units.within <= 0:
        return np.ones(len(units)), k
    between = max(mean_square - float(units.k.mean()) * units.within, 0.05 * mean_square)
    return (between + k * units.within) / (between + units.k * units.within), k


@dataclass(frozen=True)
class Known:
    """What is known of the scatter beside the axis's own units.

    own: between cells of one electrolyte of the electrode (may hold the same cells as the
    axis). others: of the campaign's other electrodes, at few degrees of freedom, because
    electrodes differ in it.
    """

    own: Scatter | None = None
    others: Scatter | None = None


def build(
    units: Units,
    slots: Sequence[Slot],
    *,
    rule: Rule,
    n_levels: int,
    n_groups: int,
    finding: Finding,
    names: Sequence[str],
    unit: str,
    known: Known,
    x: FloatArray | None = None,
    base: int | None = None,
    k_new: float = 1.0,
    assumed: tuple[str, ...] = (),
) -> Layout | None:
    """Return the layout of a between-specimen axis.

    x (n_levels,): ln c of the levels, for an order; base: the level all are compared with.
    None where no scatter at all is known.
    """
    width = n_levels + n_groups
    L = columns(units.level, units.group, n_levels, n_groups)
    if x is not None and len(units):
        x = x - float(x[units.level].mean())
    S = None if x is None else np.hstack([x[units.level][:, None], L[:, n_levels:]])
    w, k = weights(units, L if S is None else S)
    levels = linear(L, units.y, w, pairs(n_levels, width, base))
    slope = None
    if S is not None:
        order = np.zeros((1, S.shape[1]))
        order[0, 0] = -1.0
        slope = linear(S, units.y, w, order)
    place, shown, between = told(finding, names, (slope or levels).contrasts)
    if shown is not None:
        slope, levels = _anchored(slope, levels, place, shown)
    truth = levels if slope is None else slope
    scatter = _scatter(truth, units, k, known)
    if scatter is None:
        return None
    level_of = np.array([one.level for one in slots], np.int64)
    rows_L = columns(level_of, np.array([one.group for one in slots], np.int64), n_levels, n_groups)
    rows_T = rows_L if x is None else np.hstack([x[level_of][:, None], rows_L[:, n_levels:]])
    problem = Problem(
        truth, levels, scatter, rule, rows_T[:, None, :], rows_L[:, None, :], k_new, slope
    )
    if not finding.tested:
        problem = _unmeasured(problem, units, x, n_levels)
        assumed = (*assumed, EVEN_ODDS)
    show = None if slope is not None or shown is None else levels.contrasts[place]
    return Layout(problem, tuple(slots), unit, show, shown, between, assumed)


def _scatter(truth: Linear, units: Units, k: float, known: Known) -> Scatter | None:
    """Return the scatter of a typical unit: the axis's own or the electrode's, whichever rests
    on more cells, with that of the other electrodes as prior knowledge."""
    own: Scatter | None = None
    if truth.df > 0 and truth.sse > 0:
        k_typical = k if units.within > 0 else 0.0
        own = Scatter(truth.sse / truth.df, truth.df, units.within, units.df_within, k_typical)
    if known.own is not None and (own is None or known.own.df > own.df):
        own = known.own
    if known.others is None:
        return own
    if own is None:
        return known.others
    df = own.df + known.others.df
    together = (own.typical * own.df + known.others.typical * known.others.df) / df
    return replace(own, typical=together, df=df)


def _unmeasured(
    problem: Problem, units: Units, x: FloatArray | None, n_levels: int
) -> Problem:
    """Return the problem with even odds of nothing and of an effect, for an untested axis.

    The present units count as being where they are, at zero; an effect moves the other level.
    """
    direction = np.zeros(problem.truth.normal.shape[0])
    if x is not None:
        direction[0] = 1.0
        margin = problem.rule.slope_margin or 0.0
    else:
        present = set(units.level.tolist()) or {0}
        direction[[one for one in range(n_levels) if one not in present]] = 1.0
        margin = problem.rule.contrast_margin
    unknown = Unknown((EFFECT[0] * margin, EFFECT[1] * margin), direction)
    return replace(
        problem,
        unknown=unknown,
        truth=_blank(problem.truth),
        levels=_blank(problem.levels),
        slope=None if problem.slope is None else _blank(problem.slope),
    )


def _blank(model: Linear) -> Linear:
    """Return a model whose present units are all at zero; their scatter is kept."""
    return replace(model, right=np.zeros_like(model.right))


def _anchored(
    slope: Linear | None, levels: Linear, place: int, e: Estimate
) -> tuple[Linear | None, Linear]:
    """Scale the residual squares so that the present standard error is that of the finding."""
    model = slope or levels
    if model.df <= 0 or not (math.isfinite(e.se) and e.se > 0 and e.df > 0):
        return slope, levels
    inverse = np.linalg.pinv(model.normal, hermitian=True)
    c = model.contrasts[place]
    own = model.sse / model.df * float(c @ inverse @ c)
    if not own > 0:
        return slope, levels
    factor = min(max(e.se**2 / own, 0.25), 4.0)
    lost = max(model.df - e.df, 0.0)
    scaled = _scaled(levels, factor, lost)
    return (None if slope is None else _scaled(slope, factor, lost)), scaled


def _scaled(model: Linear, factor: float, lost: float) -> Linear:
    """Return the model with its mean square multiplied by `factor`, at `lost` fewer df."""
    df = max(model.df - lost, 0.5)
    if model.df <= 0:
        return model
    return replace(model, sse=model.sse / model.df * factor * df, df=df)


def told(
    finding: Finding, names: Sequence[str], contrasts: FloatArray
) -> tuple[int, Estimate | None, tuple[str, str] | None]:
    """Return which contrast is told of a finding, its estimate and the levels it compares.

    The order where there is one; else the difference nearest to being decided as a response.
    """
    if finding.slope is not None:
        return 0, finding.slope, None
    best: tuple[float, int, Estimate, tuple[str, str]] | None = None
    position = {name: place for place, name in enumerate(names)}
    for one in finding.contrasts:
        if one.a not in position or one.b not in position:
            continue
        wanted = np.zeros(contrasts.shape[1])
        wanted[position[one.a]], wanted[position[one.b]] = 1.0, -1.0
        for place, c in enumerate(contrasts):
            sign = 1.0 if np.array_equal(c, wanted) else -1.0 if np.array_equal(c, -wanted) else 0
            if not sign:
                continue
            e = one.estimate
            size = abs(e.value) / e.se if math.isfinite(e.se) and e.se > 0 else abs(e.value) * 1e-9
            ordered = (one.a, one.b) if sign > 0 else (one.b, one.a)
            signed = Estimate(sign * e.value, e.se, e.df)
            if best is None or size > best[0]:
                best = (size, place, signed, ordered)
    return (0, None, None) if best is None else best[1:]
