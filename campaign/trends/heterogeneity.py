"""Do the strata agree? Interaction of the axis with what is held, and lack of fit.

A significant interaction alone changes nothing; only when strata fall on different sides
of a margin is the electrode's decision left open and the split named.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import combinations

import numpy as np

from campaign.ledger.readings import FloatArray, IntArray
from campaign.trends import between, levels
from campaign.trends.between import NoContrast, Reduced
from campaign.trends.findings import Contrast
from campaign.trends.sample import Sample
from campaign.trends.strata import centred, combine, means

Named = Callable[[int], str]


@dataclass(frozen=True)
class Split:
    """A significant difference between strata: its p value and what it says.

    apart: the strata fall on different sides of the margin.
    """

    p: float
    apart: bool
    text: str


def zone(value: float, margin: float) -> int:
    """Return on which side of +-margin a value lies: -1, 0 or 1."""
    return int(value > margin) - int(value < -margin)


def wald(estimates: FloatArray, cov: FloatArray, df: float) -> float:
    """Return the p value of all `estimates` (k,) being zero, by F with k and df.

    cov (k, k) is their covariance. NaN where there are no degrees of freedom.
    """
    from scipy.special import fdtrc

    rank = int(np.linalg.matrix_rank(cov)) if np.isfinite(cov).all() else 0
    if rank == 0 or not df > 0:
        return math.nan
    statistic = float(estimates @ np.linalg.pinv(cov, hermitian=True) @ estimates) / rank
    return float(fdtrc(rank, df, max(statistic, 0.0)))


def _equal(fit: between.BetweenFit, rows: FloatArray) -> tuple[float, list[float]]:
    """Return p of the contrasts `rows` (k, p) being equal, and the k estimates."""
    mixed = fit.mixed
    values = rows @ mixed.beta
    apart = rows[1:] - rows[0]
    ends = [mixed.contrast(row) for row in (apart[0], apart[-1])]
    if not all(math.isfinite(e.se) for e in ends):
        return math.nan, values.tolist()
    df = min(e.df for e in ends)
    return wald(apart @ mixed.beta, apart @ mixed.cov @ apart.T, df), values.tolist()


def order_by_group(
    s: Sample, x: FloatArray, stratum: IntArray, group: IntArray, margin: float, name: Named,
    cells: Reduced | None = None,
) -> Split | None:  # fmt: skip
    """Test whether the slope -d ln R/dx [1] is the same in every group of strata.

    cells: the sample brought to one effect a cell, where it is at hand.
    """
    inside = centred(x, stratum)
    spread = np.bincount(group, inside**2)
    groups = np.flatnonzero(spread > 1e-12)
    if len(groups) < 2:
        return None
    keep = np.isin(group, groups)
    r = cells
    if r is None or not keep.all():
        r = between.reduced(s.take(keep), combine(stratum[keep]))
    codes = combine(group[keep])[r.first]
    X = (codes[:, None] == np.arange(len(groups))[None, :]) * x[keep][r.first, None]
    try:
        fit = between.fit(r.sample, X, r.component)
        p, slopes = _equal(fit, -np.eye(len(groups)))
    except NoContrast:
        return None
    return _split(p, slopes, margin, [name(int(g)) for g in groups], "order {:.2f}")


def differences_by_group(
    s: Sample, level: IntArray, stratum: IntArray, group: IntArray, margin: float, name: Named,
    text: Callable[[int, int], str], shown: Callable[[float], float],
    cells: Reduced | None = None,
) -> Split | None:  # fmt: skip
    """Test whether level differences of y are the same in every group of strata.

    cells: the sample brought to one effect a cell, where it is at hand.
    """
    if int(group.max()) == 0:
        return None
    n_levels = int(level.max()) + 1
    r = between.reduced(s, combine(stratum)) if cells is None else cells
    both = (group * n_levels + level)[r.first]
    try:
        fitted = levels.fit_levels(r.sample, both, r.component)
    except NoContrast:
        return None
    pairs: dict[tuple[int, int], list[tuple[int, FloatArray]]] = {}
    for linked in fitted.groups:
        base = linked[0]
        for one in linked[1:]:
            key = (base % n_levels, one % n_levels)
            pairs.setdefault(key, []).append((one // n_levels, fitted.row(one, base)))
    worst: Split | None = None
    apart = opposed(list(_effects(fitted, n_levels).values()), margin)
    for (a, b), found in pairs.items():
        if len(found) < 2:
            continue
        p, values = _equal(fitted.fit, np.array([row for _, row in found]))
        split = _split(
            min(1.0, p * len(pairs)), values, margin,
            [name(g) for g, _ in found], text(b, a), shown,
        )  # fmt: skip
        if split and (worst is None or split.p < worst.p):
            worst = replace(split, apart=apart)
    return worst


def _effects(fitted: levels.LevelFit, n_levels: int) -> dict[int, dict[int, float]]:
    """Return by group of strata the effect of each level, less that of its first level."""
    effects: dict[int, dict[int, float]] = {}
    beta = fitted.fit.mixed.beta
    for linked in fitted.groups:
        if len(linked) > 1:
            base = linked[0]
            effects[base // n_levels] = {
                one % n_levels: float(fitted.row(one, base) @ beta) for one in linked
            }
    return effects


def opposed(effects: Sequence[Mapping[int, float]], margin: float) -> bool:
    """Return True where strata lead to different decisions about the levels.

    effects: the level effects of each stratum. Either some stratum has a pair of levels
    beyond the margin and another has none, or one pair is beyond it on opposite sides.
    """
    zones = [
        {(a, b): zone(one[a] - one[b], margin) for a, b in combinations(sorted(one), 2)}
        for one in effects
    ]
    if len({any(found.values()) for found in zones}) > 1:
        return True
    signs: dict[tuple[int, int], set[int]] = {}
    for found in zones:
        for pair, side in found.items():
            signs.setdefault(pair, set()).add(side)
    return any({-1, 1} <= sides for sides in signs.values())


def _split(
    p: float, values: list[float], margin: float, names: list[str], text: str,
    shown: Callable[[float], float] = float,
) -> Split:  # fmt: skip
    low, high = int(np.argmin(values)), int(np.argmax(values))
    apart = len({zone(value, margin) for value in values}) > 1
    said = " and ".join(f"{text.format(shown(values[i]))} at {names[i]}" for i in (low, high))
    return Split(p, apart, f"{said} (p = {p:.2g})")


def along(
    s: Sample, columns: FloatArray, held: IntArray, z: FloatArray, other: IntArray
) -> tuple[FloatArray, FloatArray, float] | None:
    """Return how the effect of the axis columns (n, k) changes along z within specimens.

    Each specimen's own slope on z (within `other` strata) is compared between specimens, so
    that repeated readings cannot make a difference significant. Returns the change per unit
    of z (k,), its covariance and degrees of freedom; None where it cannot be told.
    """
    unit = combine(s.c.specimen, s.c.cell)
    inside = combine(unit, other)
    dz, dy = centred(z, inside), centred(s.y, inside)
    square = np.bincount(unit, dz**2)
    usable = square > 1e-3 * float(square.max(initial=0.0))
    if usable.sum() < columns.shape[1] + 2:
        return None
    slope = np.bincount(unit, dz * dy)[usable] / square[usable]
    first = np.unique(unit, return_index=True)[1][usable]
    groups = combine(held[first])
    X = np.stack([centred(column[first], groups) for column in columns.T], axis=1)
    slope = centred(slope, groups)
    df = len(slope) - int(groups.max()) - 1 - X.shape[1]
    if df < 1 or np.linalg.matrix_rank(X) < X.shape[1]:
        return None
    inverse = np.linalg.inv(X.T @ X)
    change = inverse @ (X.T @ slope)
    rest = slope - X @ change
    return change, inverse * float(rest @ rest) / df, float(df)


def within_axes(
    s: Sample, columns: FloatArray, held: IntArray, effects: FloatArray, margin: float,
    texts: Sequence[str], shown: Callable[[float], float] = float,
) -> list[Split]:  # fmt: skip
    """Test whether the axis effects (k,) change along temperature and along potential.

    columns (n, k): the axis; held [n]: series; texts (k,): how an effect is written.
    """
    found = []
    for z, other, unit in _held_numbers(s):
        change = along(s, columns, held, z, other)
        if change is not None:
            found.append(_changed(change, z, effects, margin, unit, texts, shown))
    return found


def _held_numbers(s: Sample) -> Iterator[tuple[FloatArray, IntArray, str]]:
    """Yield temperature and potential where they vary, with what else to hold inside."""
    if len(np.unique(s.c.temperature)) > 1 and np.isfinite(s.c.temperature_K).all():
        yield s.c.temperature_K, s.state, "K"
    if len(np.unique(s.state)) > 1:
        for z in (s.c.offset_V, s.c.x_V):
            if np.isfinite(z).all():
                yield z, combine(s.c.temperature, s.c.scale), "V"
                return


def _changed(
    change: tuple[FloatArray, FloatArray, float], z: FloatArray, effects: FloatArray,
    margin: float, unit: str, texts: Sequence[str], shown: Callable[[float], float],
) -> Split:  # fmt: skip
    per_unit, cov, df = change
    ends = float(z.min()), float(z.max())
    at = [effects + per_unit * (end - float(z.mean())) for end in ends]
    worst = int(np.argmax(np.abs(per_unit)))
    # an order is a difference from zero, an effect one from the first level
    apart = opposed([dict(enumerate((0.0, *effect.tolist()))) for effect in at], margin)
    p = wald(per_unit, cov, df)
    said = " and ".join(
        f"{texts[worst].format(shown(float(effect[worst])))} at {end:.4g} {unit}"
        for effect, end in zip(at, ends, strict=True)
    )
    return Split(p, apart, f"{said} (p = {p:.2g})")


def between_groups(
    values: FloatArray, group: IntArray, margin: float, names: Sequence[str], text: str,
    shown: Callable[[float], float] = float,
) -> Split | None:  # fmt: skip
    """Test whether one value a specimen has the same mean in every group (one-way F)."""
    from scipy.special import fdtrc

    k = int(group.max()) + 1
    df = len(values) - k
    if k < 2 or df < 1:
        return None
    average = means(values, group)
    inside = float(((values - average[group]) ** 2).sum()) / df
    across = float(((average[group] - values.mean()) ** 2).sum()) / (k - 1)
    p = float(fdtrc(k - 1, df, across / inside)) if inside > 0 else math.nan
    return _split(p, average.tolist(), margin, list(names), text, shown)


def lack_of_fit(
    fitted: levels.LevelFit, contrasts: Sequence[Contrast], values: FloatArray
) -> float | None:
    """Return p of the level effects lying on a straight line over `values`, None if untestable."""
    if len(fitted.groups) != 1 or len(fitted.groups[0]) < 3:
        return None
    group = fitted.groups[0]
    base = group[0]
    rows = np.array([fitted.row(one, base) for one in group[1:]])
    mixed = fitted.fit.mixed
    cov = rows @ mixed.cov @ rows.T
    x = values[list(group[1:])] - values[base]
    # directions orthogonal to the line through the base level
    rest = np.linalg.svd(x[:, None])[0][:, 1:].T
    df = min((c.estimate.df for c in contrasts if math.isfinite(c.estimate.se)), default=0.0)
    return wald(rest @ rows @ mixed.beta, rest @ cov @ rest.T, df)
