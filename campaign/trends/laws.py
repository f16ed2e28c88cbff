"""The law of the response over the potential: flat, exponential or valley.

    flat         ln R = a
    exponential  ln R = a + b E
    valley       ln R = ln R_min - 1/2 ln(4 theta(1 - theta)), theta(E; E0, g) by the Frumkin
                 isotherm (kinetics.frumkin)

Compared by AICc on maximum likelihood with a random slope for every specimen and n =
specimens; the level of every specimen at every temperature is free and the same in all three
laws, so it is taken out by centring and not counted. A difference under 2, or too few
specimens for the parameters, leaves the law open.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from campaign.kinetics.frumkin import log_valley_slopes, valley_resistance
from campaign.ledger.readings import FloatArray, IntArray
from campaign.statistics.estimate import Estimate
from campaign.statistics.information import aicc
from campaign.statistics.mixed import MixedFit, NoContrast, fit_mixed
from campaign.trends.results import Interval
from campaign.trends.sample import Sample
from campaign.trends.strata import centred, combine, means

LEAST_DIFFERENCE = 2.0
"""Laws whose AICc differs by less cannot be told apart (common practice, no source)."""

MANY_READINGS = 5000
"""More readings are first averaged at each potential of each specimen and temperature."""

VARIANCES = 2
_INTERACTIONS = (-3.0, -1.0, 0.0, 2.0, 5.0, 12.0)
_PLAIN_STEPS, _MIXED_STEPS = 12, 6
_LARGEST_LOG = math.log(104.0)


@dataclass(frozen=True)
class Law:
    """The chosen law with its parameters: E0_V [V], g [1], slope of ln R [1/V].

    aicc: by law, infinite where saturated.
    """

    name: str
    aicc: Mapping[str, float] = field(default_factory=dict)
    E0_V: float | None = None
    E0_ci: Interval = None
    g: float | None = None
    g_ci: Interval = None
    slope_per_V: float | None = None
    slope_ci: Interval = None
    warnings: tuple[str, ...] = ()


@dataclass(frozen=True)
class _Curves:
    """Readings centred within specimen, cell and temperature; x [V], charge z.

    pairs (2, k): the distinct potentials and temperatures; where [n] indexes them.
    """

    y: FloatArray
    x: FloatArray
    raw_V: FloatArray
    block: IntArray
    specimen: IntArray
    charge: int
    n_specimens: int
    pairs: FloatArray
    where: IntArray

    def fit(self, y: FloatArray, columns: list[FloatArray], method: str) -> MixedFit:
        X = np.stack([np.ones_like(y), *columns], axis=1)
        return fit_mixed(
            y, X, self.specimen, slopes=self.x[:, None],
            method="ML" if method == "ML" else "REML",
        )  # fmt: skip

    def shape(self, E0_V: float, log_g: float) -> FloatArray:
        """Return the centred valley -1/2 ln(4 theta(1 - theta)), g = exp(log_g) - 4."""
        curve = np.log(
            valley_resistance(
                self.pairs[0], E0_V, math.exp(log_g) - 4.0, 1.0, self.pairs[1], self.charge
            )
        )
        return centred(curve[self.where], self.block)

    def linearised(self, E0_V: float, log_g: float) -> tuple[FloatArray, FloatArray]:
        """Return the centred valley (n,) and its derivatives by E0 and log_g (n, 2)."""
        g_4 = math.exp(log_g)
        columns = log_valley_slopes(self.pairs[0], E0_V, g_4 - 4.0, self.pairs[1], self.charge)
        curve, by_E0, by_g = (centred(column[self.where], self.block) for column in columns)
        return curve, np.stack([by_E0, by_g * g_4], axis=1)

    def misfits(self, E0_V: FloatArray, g: float) -> FloatArray:
        """Return the sum of squares left by the valley at each E0_V (k,) and one g."""
        shifted = self.pairs[0][:, None] - E0_V[None, :]
        curve = np.log(valley_resistance(shifted, 0.0, g, 1.0, self.pairs[1][:, None], self.charge))
        return np.array(
            [
                float(((self.y - centred(column[self.where], self.block)) ** 2).sum())
                for column in curve.T
            ]
        )


def _curves(s: Sample) -> _Curves:
    block = combine(s.c.specimen, s.c.cell, s.c.temperature)
    y, x_V, T, specimen = s.y, s.c.x_V, s.c.temperature_K, combine(s.c.specimen)
    if len(s) > MANY_READINGS:
        point = combine(block, s.c.fixed)
        first = np.unique(point, return_index=True)[1]
        y, x_V, T = means(y, point), means(x_V, point), means(T, point)
        block, specimen = block[first], specimen[first]
    where = combine(*(np.unique(column, return_inverse=True)[1] for column in (x_V, T)))
    pairs = np.stack([x_V, T])[:, np.unique(where, return_index=True)[1]]
    return _Curves(
        centred(y, block), centred(x_V, block), x_V, block, specimen,
        max(1, abs(s.c.facts.charge)), s.n_specimens, pairs, where,
    )  # fmt: skip


def choose(s: Sample, alpha: float) -> Law:
    """Return the law of the readings of one series on one reference scale."""
    curves = _curves(s)
    n_levels = len(np.unique(s.c.fixed))
    try:
        flat = curves.fit(curves.y, [], "ML")
        line = curves.fit(curves.y, [curves.x], "ML")
    except NoContrast:
        return Law("open", warnings=("the law over potential cannot be told from these readings",))
    known = bool(np.isfinite(s.c.temperature_K).all())
    valley = _valley(curves) if n_levels > 2 and known else None
    scores = {
        "flat": aicc(flat.loglik, VARIANCES, curves.n_specimens),
        "exponential": aicc(line.loglik, VARIANCES + 1, curves.n_specimens),
        "valley": math.inf if valley is None or n_levels < 4
        else aicc(valley.loglik, VARIANCES + 2, curves.n_specimens),
    }  # fmt: skip
    return _chosen(scores, curves, valley, alpha, n_levels)


@dataclass(frozen=True)
class _Valley:
    E0_V: float
    log_g: float
    loglik: float


def _chosen(
    scores: dict[str, float], curves: _Curves, valley: _Valley | None, alpha: float, n_levels: int
) -> Law:
    ranked = sorted(scores, key=lambda name: scores[name])
    best, second = ranked[0], ranked[1]
    if not math.isfinite(scores[best]) or not math.isfinite(scores["exponential"]):
        text = f"{_specimens(curves)} too few to compare laws over the potential"
        return Law("open", scores, warnings=(text,))
    if n_levels > 3 and not math.isfinite(scores["valley"]):
        text = f"{_specimens(curves)} too few to test for a valley"
        return Law("open", scores, warnings=(text,))
    if scores[second] - scores[best] < LEAST_DIFFERENCE:
        text = f"{best} and {second} cannot be told apart (AICc differs by less than 2)"
        return Law("open", scores, warnings=(text,))
    if best == "exponential":
        slope = curves.fit(curves.y, [curves.x], "REML").contrast([0.0, 1.0])
        return Law(best, scores, slope_per_V=slope.value, slope_ci=slope.interval(1.0 - alpha))
    if best == "valley" and valley is not None:
        return _with_parameters(scores, curves, valley, alpha)
    return Law(best, scores)


def _specimens(curves: _Curves) -> str:
    n = curves.n_specimens
    return "one specimen is" if n == 1 else f"{n} specimens are"


def _valley(curves: _Curves) -> _Valley | None:
    """Fit E0 and ln(g + 4) by Gauss-Newton steps from the best grid point.

    The first steps are of plain least squares, the last ones of the mixed model.
    """
    at = _start(curves)
    for turn in range(_PLAIN_STEPS + _MIXED_STEPS):
        shape, jacobian = curves.linearised(*at)
        try:
            step = (
                np.linalg.lstsq(jacobian, curves.y - shape, rcond=None)[0]
                if turn < _PLAIN_STEPS
                else curves.fit(curves.y - shape, list(jacobian.T), "REML").beta[1:]
            )
        except NoContrast:
            return None
        move = np.clip(step, [-0.05, -0.7], [0.05, 0.7])
        at = (at[0] + float(move[0]), min(max(at[1] + float(move[1]), -3.0), _LARGEST_LOG))
        if turn >= _PLAIN_STEPS and abs(step[0]) < 1e-5 and abs(step[1]) < 1e-4:
            break
    fitted = curves.fit(curves.y - curves.shape(*at), [], "ML")
    return _Valley(at[0], at[1], float(fitted.loglik))


def _start(curves: _Curves) -> tuple[float, float]:
    """Return the best (E0, ln(g + 4)) of a coarse grid."""
    low, high = float(curves.raw_V.min()), float(curves.raw_V.max())
    width = high - low
    grid = np.linspace(low - 0.2 * width, high + 0.2 * width, 15)
    found = [(curves.misfits(grid, g), g) for g in _INTERACTIONS]
    best, g = min(found, key=lambda pair: float(pair[0].min()))
    return float(grid[int(best.argmin())]), math.log(g + 4.0)


def _with_parameters(
    scores: dict[str, float], curves: _Curves, valley: _Valley, alpha: float
) -> Law:
    """Return the valley with intervals of E0 and g from the mixed model linearised there."""
    shape, jacobian = curves.linearised(valley.E0_V, valley.log_g)
    try:
        fitted = curves.fit(curves.y - shape, list(jacobian.T), "REML")
    except NoContrast:
        return Law("valley", scores, E0_V=valley.E0_V, g=math.exp(valley.log_g) - 4.0)
    E0, u = fitted.contrast([0.0, 1.0, 0.0]), fitted.contrast([0.0, 0.0, 1.0])
    E0_ci = Estimate(valley.E0_V + E0.value, E0.se, E0.df).interval(1.0 - alpha)
    u_ci = Estimate(valley.log_g + u.value, u.se, u.df).interval(1.0 - alpha)
    return Law(
        "valley", scores, E0_V=valley.E0_V, E0_ci=E0_ci, g=math.exp(valley.log_g) - 4.0,
        g_ci=None if u_ci is None else (_interaction(u_ci[0]), _interaction(u_ci[1])),
    )  # fmt: skip


def _interaction(log_g: float) -> float:
    """Return g [1] from ln(g + 4), without overflow."""
    return math.exp(min(log_g, 700.0)) - 4.0
