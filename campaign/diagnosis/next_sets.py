"""Sets of new cells worth considering: nested, so that the fewest that decide can be found."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from campaign.diagnosis.next_layouts import Layout
from campaign.diagnosis.next_power import Linear
from campaign.ledger.readings import FloatArray

MOST_CELLS = 40
_RIDGE = 1e-6


def sequences(layout: Layout, most: int = MOST_CELLS) -> list[tuple[int, ...]]:
    """Return sequences of slots; the first n of each are a set of n cells.

    Each takes the cell that sharpens one thing most: the order, the contrast told, the worst
    known contrast. Slots that bring the same are taken in their order.
    """
    problem = layout.problem
    if len(layout.slots) == 1:
        return [(0,) * most]
    found: list[tuple[int, ...]] = []
    if problem.slope is not None:
        found.append(_greedy(problem.slope, problem.rows_truth, problem.slope.contrasts, most))
    elif layout.show is not None:
        found.append(_greedy(problem.levels, problem.rows_levels, layout.show[None, :], most))
    if problem.units_per_cell == 1:
        contrasts = problem.levels.contrasts
        found.append(_greedy(problem.levels, problem.rows_levels, contrasts, most))
    else:
        found.append(tuple(i % len(layout.slots) for i in range(most)))
    return list(dict.fromkeys(found))


def _greedy(
    model: Linear, rows: FloatArray, contrasts: FloatArray, most: int
) -> tuple[int, ...]:
    """Return the slots that one after the other lower the largest variance of the contrasts."""
    normal = model.normal + _RIDGE * np.eye(len(model.normal))
    gains = np.einsum("sup,suq->spq", rows, rows)
    chosen = []
    for _ in range(most):
        inverse = np.linalg.inv(normal[None] + gains)
        variance = np.einsum("qp,spr,qr->sq", contrasts, inverse, contrasts)
        # the sum breaks ties between slots that leave the worst contrast as it is
        merit = variance.max(axis=1) + 1e-3 * variance.mean(axis=1)
        best = int(np.argmin(np.round(merit / merit.min(), 9)))
        chosen.append(best)
        normal = normal + gains[best]
    return tuple(chosen)


def sizes(most: int) -> Iterator[int]:
    """Yield numbers of cells to try: every one up to 8, then in steps of a fifth."""
    n = 1
    while n <= most:
        yield n
        n = n + 1 if n < 8 else max(n + 1, round(1.2 * n))
