"""Level-to-level differences of ln R within strata, by the mixed model."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np

from campaign.ledger.readings import FloatArray, IntArray
from campaign.trends import between
from campaign.trends.between import BetweenFit, Reduced
from campaign.trends.findings import Contrast
from campaign.trends.sample import Sample
from campaign.trends.strata import combine, components, match

MOST_LEVELS = 12
"""More levels of a number than this are compared in as many groups."""


@dataclass(frozen=True)
class LevelFit:
    """Level effects of ln R: `position` of a level's column in X, -1 for a base level.

    groups: the levels that are linked through strata; only those can be compared.
    """

    fit: BetweenFit
    position: IntArray
    groups: tuple[tuple[int, ...], ...]
    n_columns: int

    def row(self, a: int, b: int) -> FloatArray:
        """Return the contrast vector of level a minus level b."""
        row = np.zeros(self.n_columns)
        if self.position[a] >= 0:
            row[self.position[a]] += 1.0
        if self.position[b] >= 0:
            row[self.position[b]] -= 1.0
        return row

    def difference(self, a: int, b: int, names: Sequence[str]) -> Contrast:
        """Return the difference of ln R between levels a and b."""
        return Contrast(names[a], names[b], self.fit.contrast(self.row(a, b)))


def fit_levels(
    s: Sample,
    level: IntArray,
    stratum: IntArray,
    covariates: FloatArray | None = None,
    by_cell: Reduced | None = None,
) -> LevelFit:
    """Fit one effect a level (codes 0..k-1) within strata. Raises NoContrast.

    covariates (n, q): further columns held, such as the age. by_cell: see `between.fit`.
    """
    n_levels = int(level.max()) + 1
    groups = components(
        zip(*(pair.tolist() for pair in np.unique(np.stack([stratum, level]), axis=1)),
            strict=True),
        n_levels,
    )  # fmt: skip
    position = np.full(n_levels, -1, np.int64)
    free = [one for group in groups for one in group[1:]]
    position[free] = np.arange(len(free))
    X = (level[:, None] == np.asarray(free, np.int64)[None, :]).astype(np.float64)
    if covariates is not None:
        X = np.hstack([X, covariates])
    fitted = between.fit(s, X, stratum, by_cell)
    return LevelFit(fitted, position, tuple(tuple(g) for g in groups), X.shape[1])


def all_pairs(fitted: LevelFit, names: Sequence[str]) -> tuple[Contrast, ...]:
    """Return every difference between two linked levels, the later named first."""
    return tuple(
        fitted.difference(b, a, names) for group in fitted.groups for a, b in combinations(group, 2)
    )


def against(fitted: LevelFit, base: int, names: Sequence[str]) -> tuple[Contrast, ...]:
    """Return the difference of every level linked to `base` from it."""
    group = next(group for group in fitted.groups if base in group)
    return tuple(fitted.difference(one, base, names) for one in group if one != base)


def correlation(
    fitted: LevelFit, contrasts: Sequence[Contrast], names: Sequence[str]
) -> tuple[tuple[float, ...], ...] | None:
    """Return the correlation of contrasts, None where a contrast has no standard error."""
    if not all(math.isfinite(one.estimate.se) and one.estimate.se > 0 for one in contrasts):
        return None
    rows = np.array([fitted.row(names.index(one.a), names.index(one.b)) for one in contrasts])
    cov = fitted.fit.mixed.contrasts(rows)[1]
    scale = np.sqrt(cov.diagonal())
    return tuple(tuple(float(x) for x in row) for row in cov / scale[:, None] / scale)


def group_levels(values: FloatArray, tolerance: float) -> tuple[IntArray, FloatArray]:
    """Return level codes [n] of a number, rising, and the median value of each level.

    Values within `tolerance` are one level; more than MOST_LEVELS are grouped.
    """
    codes = match(values, tolerance).codes
    if int(codes.max()) + 1 > MOST_LEVELS:
        codes = combine(codes * MOST_LEVELS // (int(codes.max()) + 1))
    return codes, medians(values, codes)


def medians(values: FloatArray, codes: IntArray) -> FloatArray:
    """Return the median of `values` in each code 0..max, a value that occurs."""
    order = np.lexsort((values, codes))
    ends = np.cumsum(np.bincount(codes))
    starts = np.concatenate([[0], ends[:-1]])
    return values[order][(starts + ends - 1) // 2]
