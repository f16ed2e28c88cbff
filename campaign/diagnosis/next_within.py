"""Planning problems of what is followed within cells: potential, age, and the largest term."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from campaign.diagnosis.budget import ENOUGH, Budget
from campaign.diagnosis.next_axes import Scene, Unplannable, held_open
from campaign.diagnosis.next_cells import Condition, condition_of, like
from campaign.diagnosis.next_layouts import EFFECT, EVEN_ODDS, Layout, Slot, pairs
from campaign.diagnosis.next_power import Linear, Problem, Rule, Scatter, Unknown
from campaign.ledger.readings import FloatArray, IntArray
from campaign.statistics.estimate import Estimate
from campaign.trends import age, potential
from campaign.trends.between import NoContrast
from campaign.trends.findings import Finding
from campaign.trends.levels import group_levels
from campaign.trends.sample import Sample
from campaign.trends.strata import combine

FEWEST_LEVELS = 3
FIRST_AGE_d = 28.0
"""Span of age proposed where none was followed so far [d]."""

MOST_POTENTIALS = 5


def potential_layout(where: Scene, finding: Finding, alpha: float) -> Layout:
    """Return the problem of the potential: further cells at the levels in use.

    Each cell gives the differences of its level means (Helmert contrasts, as many as levels
    less one, of one variance). Raises Unplannable.
    """
    narrow = finding.open_because == "window too narrow"
    if finding.tested and finding.open_because is not None and not narrow:
        raise Unplannable(held_open(finding.open_because))
    s = potential.prepare(where.whole)
    if not len(s):
        raise Unplannable("no reading with a potential outside a plateau")
    block = _main_block(s)
    s = s.take(block)
    level, centres = group_levels(s.c.x_V, where.criteria.potential_tolerance_V)
    table = _table(s, level, len(centres))
    kept, used = _complete(table)
    wide = len(used) > 1 and centres[used[-1]] - centres[used[0]] >= _window(where)
    if narrow or not finding.tested or not wide:
        return _first_potentials(where, s, alpha)
    H = _helmert(len(used))
    y = (kept @ H.T).ravel()
    n = len(kept)
    X = np.tile(H, (n, 1))
    names = [f"{centres[one]:.4g} V" for one in used]
    contrasts = pairs(len(used), len(used))
    normal, right = X.T @ X, X.T @ y
    beta = np.linalg.pinv(normal, hermitian=True) @ right
    rest = y - X @ beta
    df = float((n - 1) * (len(used) - 1))
    if df <= 0 or not float(rest @ rest) > 0:
        return _first_potentials(where, s, alpha)
    model = Linear(normal, right, float(rest @ rest), df, contrasts)
    rule = Rule(math.log(where.criteria.ratio_margin), alpha, "tukey")
    rows = _rows_at(where, s, level, used)
    slots = _slots(where, s, [condition_of(where.readings, one.tolist()) for one in rows])
    problem = Problem(
        model, model, Scatter(model.sse / df, df), rule, np.tile(H, (len(slots), 1, 1)),
        np.tile(H, (len(slots), 1, 1)), 0.0, units_per_cell=len(used) - 1,
    )  # fmt: skip
    values = contrasts @ beta
    place = int(np.argmax(np.abs(values)))
    one = contrasts[place]
    se = math.sqrt(model.sse / df * float(one @ np.linalg.pinv(normal) @ one))
    a, b = int(np.argmax(one)), int(np.argmin(one))
    return Layout(
        problem, tuple(slots), "factor", one, Estimate(float(values[place]), se, n - 1.0),
        (names[a], names[b]),
    )  # fmt: skip


def _window(where: Scene) -> float:
    return where.criteria.potential_window_V - 1e-9


def _main_block(s: Sample) -> IntArray:
    """Return the rows of the reference scale that most cells were measured on."""
    codes = np.unique(s.c.scale)
    cells = [len(np.unique(s.c.cell[s.c.scale == code])) for code in codes]
    return np.flatnonzero(s.c.scale == codes[int(np.argmax(cells))])


def _table(s: Sample, level: IntArray, n_levels: int) -> FloatArray:
    """Return level means (specimens, levels), block effects of temperature taken out."""
    specimen = combine(s.c.specimen)
    block = combine(specimen, s.c.cell, s.c.temperature)
    # the temperature of a specimen with most potentials speaks for it
    table = np.full((int(specimen.max()) + 1, n_levels), np.nan)
    seen = np.zeros(len(table), np.int64)
    for code in range(int(block.max()) + 1):
        rows = block == code
        one = int(specimen[rows][0])
        distinct = len(np.unique(level[rows]))
        if distinct <= seen[one]:
            continue
        seen[one] = distinct
        table[one] = np.nan
        sums = np.bincount(level[rows], s.y[rows], n_levels)
        number = np.bincount(level[rows], minlength=n_levels)
        table[one, number > 0] = sums[number > 0] / number[number > 0]
    return table


def _complete(table: FloatArray) -> tuple[FloatArray, list[int]]:
    """Return the rows that hold every used level: those levels most specimens share."""
    has = np.isfinite(table)
    several = has.sum(axis=1) > 1
    if not several.any():
        return np.zeros((0, 0)), []
    share = has[several].mean(axis=0)
    used = np.flatnonzero(share >= 0.5 * share.max()).tolist()
    rows = has[:, used].all(axis=1)
    return np.asarray(table[rows][:, used]), used


def _helmert(k: int) -> FloatArray:
    """Return k - 1 orthonormal contrasts (k - 1, k)."""
    rows = np.zeros((k - 1, k))
    for i in range(1, k):
        rows[i - 1, :i] = 1.0
        rows[i - 1, i] = -i
        rows[i - 1] /= math.sqrt(i * (i + 1))
    return rows


def _rows_at(where: Scene, s: Sample, level: IntArray, used: list[int]) -> list[IntArray]:
    """Return the campaign's rows at each used level, at the temperature most of them share."""
    rows = where.rows(s)
    code = np.bincount(s.c.temperature).argmax()
    found = []
    for one in used:
        mine = np.flatnonzero((level == one) & (s.c.temperature == code))
        found.append(rows[mine if len(mine) else np.flatnonzero(level == one)])
    return found


def _slots(where: Scene, s: Sample, conditions: list[Condition]) -> list[Slot]:
    """Return one slot for each electrolyte measured on this scale, the commonest first."""
    codes, counts = np.unique(s.c.electrolyte, return_counts=True)
    rows = where.rows(s)
    slots = []
    for code in codes[np.argsort(-counts, kind="stable")]:
        mine = rows[s.c.electrolyte == code]
        text = s.c.name("electrolyte", int(code))
        if all(where.limits.allows(text, one) for one in conditions):
            cell = like(where.readings, mine.tolist(), where.electrode, text, conditions)
            slots.append(Slot(cell, 0, 0))
    if not slots:
        raise Unplannable("no condition that may be proposed lies inside the limits")
    return slots


def _first_potentials(where: Scene, s: Sample, alpha: float) -> Layout:
    """Return the problem where no sufficient window was measured: levels across the one allowed."""
    pool = where.scatter
    if pool is None:
        raise Unplannable("the scatter of readings is not known")
    rows = where.rows(s)
    here = condition_of(where.readings, rows.tolist())
    low, high = where.limits.potentials(here.reference)
    if not (math.isfinite(low) and math.isfinite(high) and high - low >= _window(where)):
        raise Unplannable(
            "no potential window is declared and less than "
            f"{where.criteria.potential_window_V:g} V was measured; declare the electrode's window"
        )
    values = np.linspace(low, high, FEWEST_LEVELS)
    conditions = [
        replace(here, potential_V=round(float(v), 3), ion_content=math.nan) for v in values
    ]
    k = len(conditions)
    H = _helmert(k)
    within = pool.within if pool.within > 0 else pool.typical * 0.1
    scatter = Scatter(within + 0.05**2, 6.0)
    empty = Linear(np.zeros((k, k)), np.zeros(k), 0.0, 0.0, pairs(k, k))
    margin = math.log(where.criteria.ratio_margin)
    unknown = Unknown((EFFECT[0] * margin, EFFECT[1] * margin), np.linspace(-0.5, 0.5, k))
    slots = _slots(where, s, conditions)
    rows_of = np.tile(H, (len(slots), 1, 1))
    problem = Problem(
        empty, empty, scatter, Rule(margin, alpha, "tukey"), rows_of, rows_of, 0.0,
        unknown=unknown, units_per_cell=k - 1,
    )  # fmt: skip
    note = "how much cells differ along the potential is not known yet: 5 % is taken"
    return Layout(problem, tuple(slots), "factor", assumed=(EVEN_ODDS, note))


def _mean_problem(
    value: float, n: float, typical: float, df: float, rule: Rule, n_slots: int,
    unknown: Unknown | None = None, own_df: float | None = None,
) -> Problem:  # fmt: skip
    """Return the problem of one mean over n specimens with scatter `typical` at `df`."""
    held = df if own_df is None else own_df
    model = Linear(np.array([[n]]), np.array([n * value]), typical * held, held, np.eye(1))
    rows = np.ones((n_slots, 1, 1))
    return Problem(model, model, Scatter(typical, df), rule, rows, rows, 0.0, unknown=unknown)


def age_layout(where: Scene, finding: Finding, alpha: float) -> Layout:
    """Return the problem of the drift: cells measured again after the greatest age reached."""
    margin = math.log(where.criteria.ratio_margin)
    rule = Rule(margin, alpha)
    if finding.tested and finding.open_because is not None:
        raise Unplannable(held_open(finding.open_because))
    if not finding.tested:
        return _first_ages(where, rule)
    try:
        fitted = age.fit(where.whole, where.criteria)
    except NoContrast as reason:
        raise Unplannable(str(reason)) from reason
    e, n = fitted.drift, len(fitted.slopes.slope)
    if not (math.isfinite(e.se) and e.df >= 1):
        return _first_ages(where, rule)
    slots = _aged(where, fitted.sample, fitted.age_d)
    problem = _mean_problem(e.value, n, e.se**2 * n, e.df, rule, len(slots))
    between_ = (f"{fitted.age_d:.3g} d", "new")
    return Layout(problem, slots, "factor", np.ones(1), e, between_)


def _aged(where: Scene, s: Sample, age_d: float) -> tuple[Slot, ...]:
    rows = where.rows(s)
    code = np.bincount(combine(s.c.temperature, s.c.fixed)).argmax()
    mine = rows[combine(s.c.temperature, s.c.fixed) == code]
    first = condition_of(where.readings, mine.tolist())
    days = round(age_d, 1)
    conditions = [first, replace(first, after_d=round(days / 2, 1)), replace(first, after_d=days)]
    return tuple(_slots(where, s, conditions))


def _first_ages(where: Scene, rule: Rule) -> Layout:
    s = where.whole
    if not len(s) or where.scatter is None:
        raise Unplannable("no readings of this response")
    known = s.c.age_s[np.isfinite(s.c.age_s)]
    days = max(float(known.max()) / 86400.0 if len(known) else 0.0, FIRST_AGE_d)
    slots = _aged(where, s, days)
    within = where.scatter.within if where.scatter.within > 0 else where.scatter.typical * 0.1
    unknown = Unknown(
        (EFFECT[0] * rule.contrast_margin, EFFECT[1] * rule.contrast_margin), np.ones(1)
    )
    problem = _mean_problem(
        0.0, 0.0, 2 * within + 0.1**2, 6.0, rule, len(slots), unknown, own_df=0.0
    )
    note = "how much cells differ in their drift is not known yet: 10 % is taken"
    return Layout(problem, slots, "factor", assumed=(EVEN_ODDS, note))


def largest_layout(where: Scene, weighed: Budget, alpha: float) -> Layout:
    """Return the problem of which term is the largest: more cells at the reference condition."""
    condition = weighed.condition
    interval = weighed.difference_interval
    n = weighed.n_specimens
    df = float(n - 1)
    if n < ENOUGH:
        df += sum(one.n_specimens - 1 for one in condition.others)
    assumed: tuple[str, ...] = ()
    level = 1 - where.criteria.error_probability
    own_df = df
    if interval is None or df < 1:
        typical, df, own_df = (0.5 * math.sqrt(2) * 0.15) ** 2, 3.0, 0.0
        assumed = ("how much the shares of two cells differ is not known yet: 11 % is taken",)
        shown = Estimate(weighed.difference, math.nan, 0.0)
    else:
        unit = Estimate(0.0, 1.0, df).interval(level)
        assert unit is not None
        se = (interval[1] - interval[0]) / 2 / unit[1]
        typical = max(se**2 * n, 1e-8)
        shown = Estimate(weighed.difference, se, df)
    part = where.snapshot.readings
    mine = np.flatnonzero(part.electrode == where.electrode)[list(condition.rows)]
    at = condition_of(part, mine.tolist())
    if not where.limits.allows(condition.electrolyte, at):
        raise Unplannable("the reference condition lies outside the declared limits")
    cell = like(part, mine.tolist(), where.electrode, condition.electrolyte, [at])
    problem = _mean_problem(
        weighed.difference, float(n), typical, df, Rule(0.0, alpha), 1, own_df=own_df
    )
    return Layout(
        problem, (Slot(cell, 0, 0),), "share", np.ones(1), shown,
        (weighed.dominant, weighed.next_term or ""), assumed,
    )  # fmt: skip
