"""Does the axis run along with age, calendar date or batch? Then it cannot be told from them.

The correlation is taken within strata and between cells; times that differ by less than a
day count as equal (common practice, no source).
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import FloatArray, IntArray
from campaign.trends.conditions import DAY_s
from campaign.trends.sample import Sample
from campaign.trends.strata import centred, combine, match, means

RESOLUTION_d = 1.0
"""Times closer than this [d] count as equal."""

BATCH_GAP_d = 3.0
"""Cells assembled within this many days of one another are one batch (common practice)."""


LEAST_REPEATED = 1e-3
"""Least share of the spread in time that repeated readings must show to correct a drift."""


@dataclass(frozen=True)
class Confounder:
    """What runs along with the axis: name, correlation r [1], its column [n] in days."""

    name: str
    r: float
    column: FloatArray

    def warning(self, axis: str) -> str:
        """Return the warning as a sentence."""
        return (
            f"confounded: {axis} and {self.name} run together within strata "
            f"(|r| = {abs(self.r):.2f})"
        )


def times(s: Sample) -> dict[str, FloatArray]:
    """Return age, date of measurement and date of assembly [d] of the readings."""
    return {
        "age": s.c.age_s / DAY_s,
        "date": s.c.day,
        "batch (assembly date)": s.c.assembled_day,
    }


def between_cells(
    s: Sample, columns: FloatArray, stratum: IntArray, criteria: Criteria
) -> tuple[Confounder, ...]:
    """Return what correlates with the axis columns (n, k) beyond the criterion.

    One column (a number) is judged by |r|; several (levels) by their multiple correlation,
    adjusted for the number of levels.
    """
    cell = combine(s.c.cell)
    count = int(cell.max()) + 1
    X = np.stack([means(centred(column, stratum), cell) for column in columns.T], axis=1)
    found = []
    for name, column in times(s).items():
        if not np.isfinite(column).all() or count < 3:
            continue
        inside = centred(column, stratum)
        if float(np.ptp(inside)) < RESOLUTION_d:
            continue
        r = _correlation(X, means(inside, cell))
        if r is not None and abs(r) > criteria.confounding_r:
            found.append(Confounder(name, r, column - column.mean()))
    batch = None if found else _by_batch(s, X, cell, criteria)
    return (*found, batch) if batch else tuple(found)


def requested(s: Sample) -> tuple[Confounder, ...]:
    """Return the age as a column to hold, whether it runs along with the axis or not."""
    column = times(s)["age"]
    if not np.isfinite(column).all() or float(np.ptp(column)) <= 0:
        return ()
    return (Confounder("age", math.nan, column - column.mean()),)


def within_cells(
    s: Sample, x: FloatArray, inside: IntArray, criteria: Criteria
) -> tuple[Confounder, ...]:
    """Return whether the axis x [n] runs with age inside the strata `inside` of one cell.

    Inside a cell age and date are one thing, and its batch is fixed.
    """
    day = s.c.day
    if len(day) < 3 or not np.isfinite(day).all():
        return ()
    dx, dz = centred(x, inside), centred(day, inside)
    if float(np.ptp(dz)) < RESOLUTION_d:
        return ()
    r = _correlation(dx[:, None], dz)
    if r is None or abs(r) <= criteria.confounding_r:
        return ()
    return (Confounder("age", r, day - day.mean()),)


def without_drift(
    s: Sample, confounder: Confounder, inside: IntArray, level: IntArray
) -> Sample | None:
    """Return the sample less its common drift along the confounder, None where it has none.

    The drift is taken from readings repeated at one level of the axis inside one specimen,
    where the axis itself cannot have changed anything.
    """
    same = combine(inside, level)
    dz, dy = centred(confounder.column, same), centred(s.y, same)
    whole = centred(confounder.column, inside)
    size = float(dz @ dz)
    if size < LEAST_REPEATED * float(whole @ whole):
        return None
    return replace(s, y=s.y - float(dz @ dy) / size * confounder.column)


def _correlation(X: FloatArray, z: FloatArray) -> float | None:
    """Return r of z with one column, or the adjusted multiple correlation with several."""
    total = float(z @ z)
    n, k = X.shape
    if total <= 0 or n - k - 1 < 1:
        return None
    if k == 1:
        size = float(X[:, 0] @ X[:, 0])
        return float(X[:, 0] @ z) / math.sqrt(size * total) if size > 0 else None
    fitted = X @ np.linalg.lstsq(X, z, rcond=None)[0]
    unexplained = float((z - fitted) @ (z - fitted)) / total
    return math.sqrt(max(0.0, 1.0 - unexplained * (n - 1) / (n - 1 - k)))


def _by_batch(s: Sample, X: FloatArray, cell: IntArray, criteria: Criteria) -> Confounder | None:
    """Return the batch as a confounder where it explains one axis column."""
    if X.shape[1] != 1 or not np.isfinite(s.c.assembled_day).all():
        return None
    day = means(s.c.assembled_day, cell)
    batch = match(day, BATCH_GAP_d).codes
    k = int(batch.max()) + 1
    n = len(day)
    if k < 2 or n - k < 3:
        return None
    x = X[:, 0] - X[:, 0].mean()
    total = float(x @ x)
    rest = centred(x, batch)
    if total <= 0:
        return None
    r = math.sqrt(max(0.0, 1.0 - float(rest @ rest) / total * (n - 1) / (n - k)))
    if r <= criteria.confounding_r:
        return None
    return Confounder("batch", r, means(day, batch)[batch][cell] - float(day.mean()))
