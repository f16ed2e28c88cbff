"""Fits of what differs between specimens: concentration, solvent, additive.

One mixed model for all: stratum fixed effects, random specimen intercept. Where a specimen
was moved through several cells, each assembly adds its own scatter; the readings are then
first brought to one effect a cell, so that repeated readings of one assembly count once.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from campaign.ledger.readings import BoolArray, FloatArray, IntArray
from campaign.statistics.estimate import Estimate
from campaign.statistics.mixed import MixedFit, NoContrast, fit_mixed
from campaign.trends.sample import Sample
from campaign.trends.strata import combine, levels_per_stratum, means

__all__ = ["BetweenFit", "NoContrast", "fit", "lone"]

MANY_STRATA = 40
"""With more strata the fit works on one effect a cell."""

NO_STRATUM_CONTRAST = "strata without contrast"


@dataclass(frozen=True)
class BetweenFit:
    """A fit with columns X: the mixed model, and the scatter of readings [1]."""

    mixed: MixedFit
    sigma_within: float
    by_cell: bool

    @property
    def sigma_between(self) -> float:
        """Return the scatter between specimens [1], NaN where it cannot be told."""
        return float(self.mixed.sigma_between)

    def contrast(self, c: FloatArray) -> Estimate:
        """Return the estimate of c'beta."""
        return self.mixed.contrast(c)


def lone(stratum: IntArray, level: IntArray) -> BoolArray:
    """Return which readings [n] stand in a stratum that holds one level only."""
    return np.asarray(levels_per_stratum(stratum, level) < 2, np.bool_)


def fit(
    s: Sample, X: npt.ArrayLike, stratum: IntArray, by_cell: Reduced | None = None
) -> BetweenFit:
    """Fit ln R of the sample on the columns X (n, p). Raises NoContrast.

    by_cell: the sample brought to one effect a cell by `reduced`, which is quicker. So it is
    always with moved specimens or more strata than MANY_STRATA. Where all cells that share
    strata were measured under the same conditions the estimates are the same either way; else
    they differ by what cells tell of strata, a small part of the standard error.
    """
    if len(s) < 2:
        raise NoContrast("fewer than two readings")
    columns = np.asarray(X, np.float64).reshape(len(s), -1)
    codes = combine(stratum)
    r = by_cell
    if r is None and (moved(s) or int(codes.max()) >= MANY_STRATA) and not one_row_a_cell(s):
        r = reduced(s, codes)
    if r is None:
        mixed = _solved(s, columns, codes)
        return BetweenFit(mixed, float(mixed.sigma_within), False)
    averaged = np.stack([means(column, r.cell) for column in columns.T], axis=1)
    return BetweenFit(_solved(r.sample, averaged, r.component), r.sigma_within, True)


def _solved(s: Sample, X: FloatArray, stratum: IntArray) -> MixedFit:
    """Return the mixed model; with equal weights where the errors differ beyond arithmetic."""
    specimen = combine(s.c.specimen)
    try:
        return fit_mixed(s.y, X, specimen, stratum, known=s.known)
    except np.linalg.LinAlgError:
        return fit_mixed(s.y, X, specimen, stratum)


def one_row_a_cell(s: Sample) -> bool:
    """Return True where every cell has a single row, as after `reduced`."""
    return len(np.unique(s.c.cell)) == len(s)


def moved(s: Sample) -> bool:
    """Return True where a specimen was measured in more than one cell."""
    pair = np.unique(combine(s.c.specimen, s.c.cell), return_index=True)[1]
    return bool(s.n_specimens < len(pair))


@dataclass(frozen=True)
class Reduced:
    """One row for each cell and component of linked strata.

    sample: y the effect of the cell, known its variance from the readings; component: code
    of the linked strata a row belongs to; cell [n] and first: the row of each reading, and a
    reading of each row.
    """

    sample: Sample
    component: IntArray
    cell: IntArray
    first: IntArray
    sigma_within: float


def reduced(s: Sample, stratum: IntArray) -> Reduced:
    """Return least-squares cell effects with the strata taken out."""
    if one_row_a_cell(s):
        each = np.arange(len(s), dtype=np.int64)
        return Reduced(s, combine(stratum), each, each, math.nan)
    component = _linked(s.c.cell, stratum)
    cell = combine(component, s.c.cell)
    n_cells, n_strata = int(cell.max()) + 1, int(stratum.max()) + 1
    table = np.bincount(cell * n_strata + stratum, minlength=n_cells * n_strata)
    table = table.reshape(n_cells, n_strata).astype(np.float64)
    per_cell, per_stratum = table.sum(axis=1), table.sum(axis=0)
    # least squares with the strata eliminated; lstsq leaves the free level of a component
    left = np.diag(per_cell) - table / per_stratum @ table.T
    right = np.bincount(cell, s.y) - table @ means(s.y, stratum)
    effect, _, rank, _ = np.linalg.lstsq(left, right, rcond=1e-10)
    rest = s.y - effect[cell]
    rest = rest - means(rest, stratum)[stratum]
    free = len(s) - n_strata - int(rank)
    variance = float(rest @ rest) / free if free > 0 else 0.0
    first = np.unique(cell, return_index=True)[1]
    rows = replace(s.take(first), y=effect, known=variance / per_cell)
    # as in the mixed model: the scatter of readings beyond their known variance
    beyond = math.sqrt(max(variance - float(s.known.mean()), 0.0)) if free > 0 else math.nan
    return Reduced(rows, combine(component[first]), cell, first, beyond)


def _linked(cell: IntArray, stratum: IntArray) -> IntArray:
    """Return a code [n], equal for readings whose cells are linked by shared strata.

    Every cell takes the least label of the cells it shares a stratum with, and then the
    label's own label, until nothing changes.
    """
    first = np.unique(combine(cell, stratum), return_index=True)[1]
    cells, strata = cell[first], stratum[first]
    label = np.arange(int(cell.max()) + 1)
    while True:
        least = np.full(int(stratum.max()) + 1, len(label))
        np.minimum.at(least, strata, label[cells])
        new = label.copy()
        np.minimum.at(new, cells, least[strata])
        new = new[new]
        if (new == label).all():
            return combine(label[cell].astype(np.int64))
        label = new
