"""Fisher scoring for variances that may be exactly zero.

theta <- theta + I(theta)^-1 s(theta), with the expected information I and the score s, is
projected on theta_k >= 0: a variance driven below zero is set to zero exactly and released
again only if the likelihood rises away from zero. Steps are halved until the likelihood rises.

[1] Harville, J. Am. Stat. Assoc. 72 (1977) 320 (scoring for variance components);
    Bertsekas, SIAM J. Control Optim. 20 (1982) 221 (projected Newton steps).
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from campaign.statistics.likelihood import Likelihood, Point
from campaign.statistics.sums import Array

Mask = npt.NDArray[np.bool_]

_STEPS = 200
_HALVINGS = 30
_DECREMENT = 1e-13


def maximise(likelihood: Likelihood, starts: list[Array], free: Mask, floor: float) -> Point:
    """Return the highest point reached from `starts`.

    free (1 + q,): parameters that move, the others stay; floor: least sigma^2 allowed.
    A start that ends at a zero variance is followed by one away from it.
    """
    best = _climb(likelihood, starts[0], free, floor)
    for start in starts[1:]:
        if bool(np.all((best.theta > 0) | ~free)):
            break
        other = _climb(likelihood, start, free, floor)
        if other.loglik > best.loglik + 1e-9:
            best = other
    return best


def _climb(likelihood: Likelihood, start: Array, free: Mask, floor: float) -> Point:
    lowest = np.zeros(start.size)
    lowest[0] = floor
    point = likelihood.at(np.where(free, np.maximum(start, lowest), start))
    for _ in range(_STEPS):
        step, decrement = _step(point, free, lowest)
        if decrement < _DECREMENT:
            break
        following = _search(likelihood, point, step, lowest)
        if following is None:
            break
        point = following
    return point


def _step(point: Point, free: Mask, lowest: Array) -> tuple[Array, float]:
    """Return the scoring step of the parameters that may move, and the gain it promises."""
    held = (point.theta <= lowest) & (point.score <= 0)
    moving = np.flatnonzero(free & ~held)
    step = np.zeros(point.theta.size)
    while moving.size:
        unit = 1.0 / np.sqrt(np.maximum(point.information[moving, moving], 1e-300))
        scaled = point.information[np.ix_(moving, moving)] * unit[:, None] * unit
        score = point.score[moving]
        step[:] = 0.0
        step[moving] = unit * np.linalg.lstsq(scaled, unit * score, rcond=1e-12)[0]
        # one at its bound that the joint step would push out stays where it is
        out = (point.theta[moving] <= lowest[moving]) & (step[moving] < 0)
        if not out.any():
            return step, float(step[moving] @ score)
        moving = moving[~out]
    return np.zeros(point.theta.size), 0.0


def _search(likelihood: Likelihood, point: Point, step: Array, lowest: Array) -> Point | None:
    """Return the first point along the step that is higher, or None."""
    size = 1.0
    for _ in range(_HALVINGS):
        theta = np.maximum(point.theta + size * step, lowest)
        theta[0] = max(theta[0], 0.05 * point.theta[0])
        following = likelihood.at(theta)
        if following.loglik > point.loglik:
            return following
        size *= 0.5
    return None
