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
from campaign.trends.heterogeneity import Split, between_groups
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
    splits: tuple[Split, ...] = ()
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
    every = [_of_scale(s, s.c.scale == code, criteria) for code in np.unique(s.c.scale)]
    parts = [part for part in every if part is not None]
    if not parts:
        raise NoContrast("the potentials lie too close together to be compared")
    confounders = confounding.within_cells(s, s.c.x_V, inside, criteria)
    widest = max(parts, key=lambda part: part.window_V)
    return s, Span(
        contrasts=tuple(c for part in parts for c in part.contrasts),
        levels=tuple(level for part in parts for level in part.levels),
        n_levels=sum(part.n_levels for part in parts),
        window_V=widest.window_V,
        n_specimens=s.n_specimens,
        df=widest.df,
        sigma_between=widest.sigma,
        sigma_within=_within(s, inside),
        confounders=confounders,
        adjusted=_adjusted(s, inside, confounders[0], criteria) if confounders else None,
        splits=tuple(part.split for part in parts if part.split is not None),
        warnings=(
            *(one.warning("potential") for one in confounders),
            *(text for part in parts for text in part.warnings),
        ),
    )


@dataclass(frozen=True)
class _Part:
    """Level differences on one reference scale; df and sigma of the widest pair."""

    contrasts: tuple[Contrast, ...]
    levels: tuple[float, ...]
    n_levels: int
    window_V: float
    df: float
    sigma: float
    split: Split | None
    warnings: tuple[str, ...]


def _of_scale(s: Sample, rows: BoolArray, criteria: Criteria) -> _Part | None:
    part = s.take(np.flatnonzero(rows))
    level, centres = group_levels(part.c.x_V, criteria.potential_tolerance_V)
    own = _paired(part, level, len(centres))
    count = np.isfinite(own).sum(axis=0)
    least = 2 if count.max() > 1 else 1
    several = len(np.unique(s.c.scale)) > 1
    scale = part.c.name("scale", int(part.c.scale[0])) if several else ""
    names = [f"{centre:.4g} V {scale}".rstrip() for centre in centres]
    pairs = [(b, a) for b in range(len(centres)) for a in range(b) if count[b, a] >= least]
    if not pairs:
        return None
    estimates = {(b, a): _mean(own[:, b, a]) for b, a in pairs}
    widest = max(pairs, key=lambda pair: float(centres[pair[0]] - centres[pair[1]]))
    largest = max(pairs, key=lambda pair: abs(estimates[pair].value))
    used = sorted({one for pair in pairs for one in pair})
    dropped = [names[i] for i in range(len(centres)) if i not in used]
    e = estimates[widest]
    n = int(count[widest])
    return _Part(
        contrasts=tuple(Contrast(names[b], names[a], estimates[b, a]) for b, a in pairs),
        levels=tuple(float(centres[i]) for i in used),
        n_levels=len(used),
        window_V=float(centres[widest[0]] - centres[widest[1]]),
        df=e.df if n > 1 else math.nan,
        sigma=e.se * math.sqrt(n),
        split=_split(part, own[(slice(None), *largest)], names, largest, criteria),
        warnings=(f"measured in one specimen only and not compared: {', '.join(dropped)}",)
        if dropped
        else (),
    )


def _mean(values: FloatArray) -> Estimate:
    """Return the mean of one value a specimen (NaN where it has none)."""
    known = values[np.isfinite(values)]
    n = len(known)
    mean = float(known.mean())
    if n < 2:
        return Estimate(mean, math.nan, 0.0)
    return Estimate(mean, float(known.std(ddof=1)) / math.sqrt(n), float(n - 1))


def _split(
    s: Sample, own: FloatArray, names: list[str], pair: tuple[int, int], criteria: Criteria
) -> Split | None:
    """Test whether the largest difference is the same in every series of electrolytes."""
    first = np.unique(s.c.specimen, return_index=True)[1]
    known = np.isfinite(own)
    columns = ("salt", "solvents", "additives")
    group = combine(*(getattr(s.c, column)[first[known]] for column in columns))
    at = first[known][np.unique(group, return_index=True)[1]]
    series = [
        " / ".join(s.c.name(column, int(getattr(s.c, column)[row])) for column in columns)
        for row in at
    ]
    text = f"R({names[pair[0]]})/R({names[pair[1]]}) " + "{:.2f}"
    return between_groups(
        own[known], group, math.log(criteria.ratio_margin), series, text, ratio_of
    )


def _paired(s: Sample, level: IntArray, n_levels: int) -> FloatArray:
    """Return the level differences of every specimen, NaN where it has none.

    (m, k, k): entry [i, b, a] for level b minus level a, averaged over the temperatures and
    cells of specimen i that hold both.
    """
    specimen = combine(s.c.specimen)
    block = combine(specimen, s.c.cell, s.c.temperature)
    n_blocks, n_specimens = int(block.max()) + 1, int(specimen.max()) + 1
    table = np.full((n_blocks, n_levels), np.nan)
    key = block * n_levels + level
    seen = np.unique(key)
    table.flat[seen] = means(s.y, key)[seen]
    owner = np.zeros(n_blocks, np.int64)
    owner[block] = specimen
    difference = table[:, :, None] - table[:, None, :]
    has = np.isfinite(difference)
    sums = np.zeros((n_specimens, n_levels, n_levels))
    counts = np.zeros((n_specimens, n_levels, n_levels))
    np.add.at(sums, owner, np.where(has, difference, 0.0))
    np.add.at(counts, owner, has)
    return np.where(counts > 0, sums / np.where(counts > 0, counts, 1.0), np.nan)


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
    if part is None:
        return Adjusted(confounder.name, math.nan, None)
    largest = max(part.contrasts, key=lambda c: abs(c.estimate.value)).estimate
    interval = largest.interval(1.0 - criteria.error_probability)
    if interval is not None and largest.value < 0:
        interval = (-interval[1], -interval[0])
    return Adjusted(confounder.name, ratio_of(abs(largest.value)), ratios_of(interval))
