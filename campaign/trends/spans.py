"""Differences of level means over the potential, by paired differences within specimens.

For every specimen the mean of ln R at each potential level is taken within temperature and
electrolyte; the difference of two levels is averaged over these, and its mean over
specimens has the scatter of the specimens' own differences, with one degree of freedom
less than there are specimens. No assumption is made on how slopes differ between specimens.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import BoolArray, FloatArray, IntArray
from campaign.statistics.estimate import Estimate
from campaign.trends import confounding
from campaign.trends.between import NoContrast, lone
from campaign.trends.findings import Contrast
from campaign.trends.levels import group_levels
from campaign.trends.results import Adjusted, ratio_of, ratios_of
from campaign.trends.sample import Sample
from campaign.trends.strata import centred, combine, means

__all__ = ["BoolArray", "Span", "span"]


@dataclass(frozen=True)
class Span:
    """Level differences of one or more scales: contrasts of ln R, and where they come from.

    levels [V]; window_V: largest distance of two compared levels; sigma_between: scatter of
    the specimens' differences for the widest pair; sigma_within: of readings; df of that pair.
    """

    contrasts: tuple[Contrast, ...]
    levels: tuple[float, ...]
    n_levels: int
    window_V: float
    n_specimens: int
    df: float
    sigma_between: float
    sigma_within: float
    confounders: tuple[confounding.Confounder, ...] = ()
    adjusted: Adjusted | None = None
    warnings: tuple[str, ...] = ()


def span(s: Sample, criteria: Criteria) -> tuple[Sample, Span]:
    """Return the sample used and its level differences, each reference scale apart.

    Raises NoContrast where no specimen was measured at two potentials.
    """
    inside = combine(s.c.specimen, s.c.cell, s.c.temperature, s.c.scale)
    alone = lone(inside, s.c.fixed)
    if alone.all():
        raise NoContrast("no specimen was measured at two potentials under equal conditions")
    s = s.leaving(alone, "cells without contrast in potential")
    inside = combine(inside[~alone])
    parts = [_of_scale(s, s.c.scale == code, criteria) for code in np.unique(s.c.scale)]
    confounders = confounding.within_cells(s, s.c.x_V, inside, criteria)
    spread = _within(s, inside)
    widest = max(parts, key=lambda part: part.window_V)
    return s, Span(
        contrasts=tuple(c for part in parts for c in part.contrasts),
        levels=tuple(level for part in parts for level in part.levels),
        n_levels=sum(len(part.levels) for part in parts),
        window_V=widest.window_V,
        n_specimens=s.n_specimens,
        df=widest.df,
        sigma_between=widest.sigma,
        sigma_within=spread,
        confounders=confounders,
        adjusted=_adjusted(s, inside, confounders[0], criteria) if confounders else None,
        warnings=tuple(one.warning("potential") for one in confounders),
    )


@dataclass(frozen=True)
class _Part:
    contrasts: tuple[Contrast, ...]
    levels: tuple[float, ...]
    window_V: float
    df: float
    sigma: float


def _of_scale(s: Sample, rows: BoolArray, criteria: Criteria) -> _Part:
    part = s.take(np.flatnonzero(rows))
    level, centres = group_levels(part.c.x_V, criteria.potential_tolerance_V)
    mean, square, count = _paired(part, level, len(centres))
    scale = part.c.name("scale", int(part.c.scale[0])) if len(np.unique(s.c.scale)) > 1 else ""
    names = [f"{centre:.4g} V {scale}".rstrip() for centre in centres]
    contrasts = []
    window, df, sigma = 0.0, math.nan, math.nan
    for b in range(len(centres)):
        for a in range(b):
            n = int(count[b, a])
            if n == 0:
                continue
            scatter = math.sqrt(square[b, a] / (n - 1)) if n > 1 else math.nan
            se = scatter / math.sqrt(n) if n > 1 else math.nan
            estimate = Estimate(float(mean[b, a]), se, float(max(n - 1, 0)))
            contrasts.append(Contrast(names[b], names[a], estimate))
            if centres[b] - centres[a] > window:
                window = float(centres[b] - centres[a])
                df, sigma = (float(n - 1), scatter) if n > 1 else (math.nan, math.nan)
    return _Part(tuple(contrasts), tuple(centres.tolist()), window, df, sigma)


def _paired(s: Sample, level: IntArray, n_levels: int) -> tuple[FloatArray, FloatArray, IntArray]:
    """Return mean, sum of squares and count over specimens of all level differences.

    Each (k, k), entry [b, a] for level b minus level a.
    """
    specimen = combine(s.c.specimen)
    block = combine(specimen, s.c.cell, s.c.temperature)
    n_blocks = int(block.max()) + 1
    table = np.full((n_blocks, n_levels), np.nan)
    key = block * n_levels + level
    table.flat[np.unique(key)] = means(s.y, key)[np.unique(key)]
    owner = np.zeros(n_blocks, np.int64)
    owner[block] = specimen
    n_specimens = int(specimen.max()) + 1
    difference = table[:, :, None] - table[:, None, :]
    has = np.isfinite(difference)
    sums = np.zeros((n_specimens, n_levels, n_levels))
    counts = np.zeros((n_specimens, n_levels, n_levels))
    np.add.at(sums, owner, np.where(has, difference, 0.0))
    np.add.at(counts, owner, has)
    seen = counts > 0
    own = np.where(seen, sums / np.where(seen, counts, 1.0), 0.0)
    count = seen.sum(axis=0)
    mean = own.sum(axis=0) / np.maximum(count, 1)
    square = (np.where(seen, own - mean, 0.0) ** 2).sum(axis=0)
    return mean, square, count.astype(np.int64)


def _within(s: Sample, inside: IntArray) -> float:
    """Return the scatter of repeated readings at one level of one specimen [1]."""
    code = combine(inside, s.c.fixed)
    free = len(s) - int(code.max()) - 1
    rest = centred(s.y, code)
    return math.sqrt(float(rest @ rest) / free) if free > 0 else math.nan


def _adjusted(
    s: Sample, inside: IntArray, confounder: confounding.Confounder, criteria: Criteria
) -> Adjusted:
    """Return the span of the first scale with the drift along the confounder taken out."""
    corrected = confounding.without_drift(s, confounder, inside, combine(s.c.scale, s.c.fixed))
    if corrected is None:
        return Adjusted(confounder.name, math.nan, None)
    part = _of_scale(corrected, s.c.scale == s.c.scale[0], criteria)
    largest = max(part.contrasts, key=lambda c: abs(c.estimate.value)).estimate
    interval = largest.interval(1.0 - criteria.error_probability)
    if interval is not None and largest.value < 0:
        interval = (-interval[1], -interval[0])
    return Adjusted(confounder.name, ratio_of(abs(largest.value)), ratios_of(interval))
