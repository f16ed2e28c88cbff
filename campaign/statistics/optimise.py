"""Scoring for variances that may be exactly zero.

Steps I^-1 s are projected on g_k >= 0: a variance driven below zero is set to zero exactly and
released again only if the likelihood rises away from zero. Steps are halved until the
likelihood rises. I is the expected information far from the top, which is always safe, and
near it the observed information, twice the average [2] less the expected, where positive.

[1] Harville, J. Am. Stat. Assoc. 72 (1977) 320 (scoring for variance components);
    Bertsekas, SIAM J. Control Optim. 20 (1982) 221 (projected Newton steps).
[2] Gilmour, Thompson & Cullis, Biometrics 51 (1995) 1440.
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
_NEAR = 2.0
_SHRINK = 0.05


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
    decrement = np.inf
    for _ in range(_STEPS):
        step, decrement = _step(point, _curvature(point, decrement), free, lowest)
        if decrement < _DECREMENT:
            break
        following = _search(likelihood, point, step, lowest)
        if following is None:
            break
        point = following
    return point


def _curvature(point: Point, decrement: float) -> Array:
    """Return the expected information, near the top the observed one where that is positive."""
    if decrement < _NEAR:
        observed = 2 * point.average - point.information
        if (observed.diagonal() > 0).all():
            unit = 1.0 / np.sqrt(observed.diagonal())
            if np.linalg.eigvalsh(unit[:, None] * observed * unit)[0] > 0.01:
                return observed
    return point.information


def _step(point: Point, information: Array, free: Mask, lowest: Array) -> tuple[Array, float]:
    """Return the step of what may move, and twice the gain it promises."""
    score = point.score
    held = (point.theta <= lowest) & (score <= 0)
    moving = np.flatnonzero(free & ~held)
    step = np.zeros(score.size)
    while moving.size:
        step[:] = 0.0
        step[moving] = solve(information[np.ix_(moving, moving)], score[moving])
        # one at its bound that the joint step would push out stays where it is
        out = (point.theta[moving] <= lowest[moving]) & (step[moving] < 0)
        if not out.any():
            return step, float(step[moving] @ score[moving])
        moving = moving[~out]
    return np.zeros(score.size), 0.0


def solve(information: Array, score: Array) -> Array:
    """Return information^-1 score; directions the data say nothing of are left alone."""
    diagonal = information.diagonal()
    seen = diagonal > 0  # rounding can leave it negative at extreme ratios of variances
    unit = np.zeros(diagonal.size)
    unit[seen] = 1.0 / np.sqrt(diagonal[seen])
    values, vectors = np.linalg.eigh(unit[:, None] * information * unit)
    usable = values > 1e-10
    part = vectors[:, usable]
    step: Array = unit * (part @ ((part.T @ (unit * score)) / values[usable]))
    return step


def _search(likelihood: Likelihood, point: Point, step: Array, lowest: Array) -> Point | None:
    """Return the first point along the step that is higher, or None."""
    size = 1.0
    for _ in range(_HALVINGS):
        theta = np.maximum(point.theta + size * step, lowest)
        theta[0] = max(theta[0], _SHRINK * point.theta[0])
        following = _try(likelihood, theta)
        if following is not None and following.loglik > point.loglik:
            return following
        size *= 0.5
    return None


def _try(likelihood: Likelihood, theta: Array) -> Point | None:
    try:
        return likelihood.at(theta)
    except np.linalg.LinAlgError:
        return None
