"""Matching of conditions: which readings were taken under the same held conditions.

Numbers are matched by the gaps between their sorted values, so that a set temperature of
25 C measured as 24.8 and 25.3 is one temperature; nothing is ever rounded to a grid.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from campaign.ledger.readings import FloatArray, IntArray, TextArray

WIDEST_CHAIN = 3.0
"""A chain of values wider than this many tolerances is split."""

_SLACK = 1.0 + 1e-9


@dataclass(frozen=True)
class Factor:
    """A coded column: `codes` [n] index `names`; equal texts share a code."""

    codes: IntArray
    names: tuple[str, ...]


@dataclass(frozen=True)
class Matched:
    """Matched numbers: `codes` [n] in rising order of value, -1 where not recorded.

    chains: (low, high) of every chain that had to be split, in the unit of the values.
    """

    codes: IntArray
    chains: tuple[tuple[float, float], ...] = ()


def factor(values: TextArray) -> Factor:
    """Code a text column; names are in alphabetical order."""
    if not len(values):
        return Factor(np.zeros(0, np.int64), ())
    # readings come sorted by cell, so most texts are the one before
    begins = np.concatenate([[True], values[1:] != values[:-1]]).astype(np.bool_)
    starts = np.flatnonzero(begins)
    firsts = values[starts].tolist()
    names = tuple(sorted(set(firsts)))
    position = {name: code for code, name in enumerate(names)}
    codes = np.fromiter((position[value] for value in firsts), np.int64, len(firsts))
    return Factor(np.repeat(codes, np.diff(np.append(starts, len(values)))), names)


def match(values: FloatArray, tolerance: float) -> Matched:
    """Match numbers whose neighbours in sorted order lie within `tolerance` (same unit).

    A chain wider than three tolerances is cut at its wide gaps until no piece is wider.
    Values that are not finite get the code -1.
    """
    codes = np.full(len(values), -1, np.int64)
    known = np.isfinite(values)
    if not known.any():
        return Matched(codes)
    distinct, where = np.unique(values[known], return_inverse=True)
    breaks = np.diff(distinct) > tolerance * _SLACK
    starts = np.concatenate([[0], np.flatnonzero(breaks) + 1, [len(distinct)]])
    widths = distinct[starts[1:] - 1] - distinct[starts[:-1]]
    wide = np.flatnonzero(widths > WIDEST_CHAIN * tolerance * _SLACK)
    cuts = [starts]
    chains = []
    for piece in wide:
        low, high = int(starts[piece]), int(starts[piece + 1])
        cuts.append(np.asarray(_split(distinct, low, high, WIDEST_CHAIN * tolerance), np.int64))
        chains.append((float(distinct[low]), float(distinct[high - 1])))
    edges = np.unique(np.concatenate(cuts))
    codes[known] = (np.searchsorted(edges, np.arange(len(distinct)), side="right") - 1)[where]
    return Matched(codes, tuple(chains))


def _split(distinct: FloatArray, low: int, high: int, widest: float) -> list[int]:
    """Return the positions at which the chain distinct[low:high] is cut.

    The cut goes to a gap of at least half the widest one, nearest the middle: tight
    clusters stay together and an even chain is halved.
    """
    cuts: list[int] = []
    pending = [(low, high)]
    while pending:
        low, high = pending.pop()
        if distinct[high - 1] - distinct[low] <= widest * _SLACK:
            continue
        gaps = np.diff(distinct[low:high])
        middles = 0.5 * (distinct[low : high - 1] + distinct[low + 1 : high])
        centre = 0.5 * (distinct[low] + distinct[high - 1])
        distance = np.where(gaps >= 0.5 * gaps.max(), np.abs(middles - centre), np.inf)
        cut = low + int(np.argmin(distance)) + 1
        cuts.append(cut)
        pending += [(low, cut), (cut, high)]
    return cuts


def combine(*columns: npt.NDArray[np.int64]) -> IntArray:
    """Return one code [n] a row, equal where all `columns` (integer codes >= -1) are equal.

    Codes run from 0 without gaps.
    """
    total = np.zeros(len(columns[0]), np.int64)
    if not len(total):
        return total
    size = 1
    for column in columns:
        more = int(column.max()) + 2
        if size * more > _LARGEST_CODE:
            total = _compress(total)
            size = int(total.max()) + 1
        total = total * more + column + 1
        size *= more
    return _compress(total)


_LARGEST_CODE = 2**40


def _compress(codes: IntArray) -> IntArray:
    size = int(codes.max()) + 1
    if size <= 16 * len(codes) + 1024:
        present = np.zeros(size, np.bool_)
        present[codes] = True
        return (np.cumsum(present) - 1)[codes]
    return np.unique(codes, return_inverse=True)[1].astype(np.int64)


def levels_per_stratum(stratum: IntArray, level: IntArray) -> IntArray:
    """Return for every row [n] the number of distinct levels its stratum holds."""
    if not len(stratum):
        return np.zeros(0, np.int64)
    first = np.unique(combine(stratum, level), return_index=True)[1]
    counts = np.bincount(stratum[first], minlength=int(stratum.max()) + 1)
    return counts[stratum].astype(np.int64)


def means(values: FloatArray, codes: IntArray) -> FloatArray:
    """Return the mean of `values` in each code 0..max (NaN for an unused code)."""
    counts = np.bincount(codes)
    sums = np.bincount(codes, weights=values)
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(sums / counts, np.float64)


def centred(values: FloatArray, codes: IntArray) -> FloatArray:
    """Return `values` [n] less the mean of their code."""
    if not len(values):
        return values
    return values - means(values, codes)[codes]


def components(pairs: Iterable[tuple[int, int]], n_levels: int) -> list[list[int]]:
    """Return the levels linked to one another by strata that hold more than one of them.

    pairs: (stratum, level) combinations that occur. Levels in different components were
    never compared under equal conditions, not even through a third one.
    """
    parent = list(range(n_levels))

    def root(level: int) -> int:
        while parent[level] != level:
            parent[level] = parent[parent[level]]
            level = parent[level]
        return level

    first: dict[int, int] = {}
    seen: set[int] = set()
    for stratum, level in pairs:
        seen.add(level)
        if stratum in first:
            parent[root(level)] = root(first[stratum])
        else:
            first[stratum] = level
    groups: dict[int, list[int]] = {}
    for level in sorted(seen):
        groups.setdefault(root(level), []).append(level)
    return sorted(groups.values())
