"""Points, lines and bands behind a trend: the same estimates as its table, ready to be drawn.

A trend holds everything else fixed, so its readings are shown with the other conditions taken
out: concentration readings are brought to one stratum by the stratum effects of the mixed
model; along temperature, potential and age the level of every specimen is taken out, because
only changes within specimens carry the estimate there.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from importlib import import_module

import numpy as np

from campaign.kinetics.constants import GAS_CONSTANT, ZERO_CELSIUS_K
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import FloatArray, IntArray, Snapshot
from campaign.trends import age, between, concentration, potential
from campaign.trends.barriers import usable
from campaign.trends.bases import in_activity
from campaign.trends.between import BetweenFit, NoContrast
from campaign.trends.conditions import DAY_s
from campaign.trends.findings import Contrast
from campaign.trends.reading import FilterSource, look
from campaign.trends.results import (
    AgeEstimate,
    AxisResult,
    BarrierEstimate,
    Interval,
    OrderEstimate,
    PotentialEstimate,
    SeriesEstimate,
)
from campaign.trends.sample import SERIES, Sample, attempt, draw, series, source
from campaign.trends.strata import combine, means

AXES = ("concentration", "temperature", "potential", "age")
"""Axes with a curve; solvents and additives are compared in pairs and have none."""

GRID = 60


@dataclass(frozen=True)
class Line:
    """A fitted line: x and y (m,), its band low and high (m,), None where there is none."""

    x: FloatArray
    y: FloatArray
    low: FloatArray | None = None
    high: FloatArray | None = None
    name: str = ""


@dataclass(frozen=True)
class Levels:
    """Level means (k,) with the ends of their 95 % intervals, NaN at the level all refer to."""

    x: FloatArray
    y: FloatArray
    low: FloatArray
    high: FloatArray


@dataclass(frozen=True)
class Curve:
    """One series of a trend.

    x (n,): mol/L or mol/kg, K, V or d; y (n,): the response [its unit], for age relative to
    new [1]. specimen (n,), measurement (n,). lines: empty where nothing was fitted. levels:
    along potential. held: the condition the readings are shown at, in words.
    """

    estimate: SeriesEstimate
    x: FloatArray
    y: FloatArray
    specimen: tuple[str, ...]
    measurement: IntArray
    lines: tuple[Line, ...]
    held: str = ""
    levels: Levels | None = None


def curves(
    axis: str,
    snapshot: Snapshot,
    criteria: Criteria,
    response: str = "R_ct",
    *,
    porous: bool = True,
    scale: str | None = None,
    more: Mapping[str, bool] | None = None,
) -> tuple[AxisResult, tuple[Curve, ...]]:
    """Return the estimates of an axis, and a curve for each that can be drawn.

    more: what an axis alone offers, as `reading.MORE` lists it.
    Raises Refused for an unknown response, ValueError for an axis that is not in AXES.
    """
    if axis not in AXES:
        raise ValueError(f"no curves along {axis}")
    module = import_module(f"campaign.trends.{axis}")
    chosen = {name: True for name, wanted in (more or {}).items() if wanted}
    result: AxisResult = module.estimate(
        snapshot, criteria, response, porous=porous, scale=scale, **chosen
    )
    build = _BUILD[axis]
    found = []
    by = _series_by(axis, together="together" in chosen)
    for estimate, part in _parts(result, snapshot, criteria, porous, scale, by):
        try:
            found.append(build(estimate, part, criteria))
        except NoContrast:  # cannot happen where the table has an estimate; then no curve
            continue
    return result, tuple(_merged(found))


def _parts(
    result: AxisResult, snapshot: Snapshot, criteria: Criteria, porous: bool, scale: str | None,
    by: tuple[str, ...],
) -> Iterator[tuple[SeriesEstimate, Sample]]:
    """Yield every estimate with the sample of its series, as the trend itself draws it."""
    electrodes = dict.fromkeys(one.electrode for one in result.estimates)
    for electrode in electrodes:
        origin = source(snapshot, criteria, electrode, scale)
        whole = draw(snapshot, origin, result.response, porous)
        own = [one for one in result.estimates if one.electrode == electrode]
        for _, part in series(whole, by):
            used = set(part.c.measurement.tolist())
            yield from ((one, part) for one in own if one.rows and set(one.rows) <= used)


def _series_by(axis: str, *, together: bool) -> tuple[str, ...]:
    if axis != "potential":
        return SERIES
    return ("scale",) if together else (*SERIES, "scale")


def _merged(found: Sequence[Curve]) -> Iterator[Curve]:
    """Yield curves; two laws fitted to the same readings are two lines of one curve."""
    waiting: Curve | None = None
    for one in found:
        if waiting is not None and waiting.estimate.rows == one.estimate.rows:
            waiting = Curve(
                waiting.estimate, waiting.x, waiting.y, waiting.specimen, waiting.measurement,
                (*waiting.lines, *one.lines), waiting.held, waiting.levels,
            )  # fmt: skip
            continue
        if waiting is not None:
            yield waiting
        waiting = one
    if waiting is not None:
        yield waiting


def _names(s: Sample) -> tuple[str, ...]:
    return tuple(s.c.name("specimen", int(code)) for code in s.c.specimen)


def _grid(x: FloatArray, *, log: bool = False) -> FloatArray:
    low, high = float(x.min()), float(x.max())
    return np.asarray(np.geomspace(low, high, GRID) if log else np.linspace(low, high, GRID))


# Concentration ---------------------------------------------------------------------------


def _order(estimate: SeriesEstimate, part: Sample, criteria: Criteria) -> Curve:
    assert isinstance(estimate, OrderEstimate)
    activity = estimate.in_activity
    fitted = attempt(part, lambda s: concentration.order(s, criteria, (), activity))
    s = fitted.sample
    stratum = combine(s.c.temperature, s.state)
    shown = _fullest(s, stratum)
    c = np.exp(in_activity(s)[1]) if activity else s.c.concentration
    x = _grid(c, log=True)
    y, at = _to_stratum(s, stratum, shown, fitted.fit)
    line = _order_line(x, at, fitted.fit, 1.0 - criteria.error_probability)
    held = _condition(s, stratum == shown)
    return Curve(estimate, c, np.exp(y), _names(s), s.c.measurement, (line,), held)


def _fullest(s: Sample, stratum: IntArray) -> int:
    """Return the stratum with most specimens, of these the one nearest 25 degC."""

    def rank(code: int) -> tuple[int, float, int]:
        rows = stratum == code
        distance = abs(float(np.mean(s.c.temperature_K[rows])) - 25.0 - ZERO_CELSIUS_K)
        return -len(np.unique(s.c.specimen[rows])), round(distance, 1), code

    return min(range(int(stratum.max()) + 1), key=rank)


@dataclass(frozen=True)
class _At:
    """Where the line is drawn: the strata part of a contrast, and what is added to it."""

    strata: FloatArray
    offset: float


def _to_stratum(
    s: Sample, stratum: IntArray, shown: int, fit: BetweenFit
) -> tuple[FloatArray, _At]:
    """Return ln R of the readings brought to one stratum, and where the line stands there."""
    effects = np.asarray(fit.mixed.strata, np.float64)
    unit = np.zeros(len(effects))
    if not fit.by_cell:
        unit[shown] = 1.0
        return s.y - effects[stratum] + effects[shown], _At(unit, 0.0)
    r = between.reduced(s, stratum)
    own = means(s.y - r.sample.y[r.cell], stratum)
    component = r.component[r.cell]
    home = int(component[stratum == shown][0])
    unit[home] = 1.0
    y = s.y - own[stratum] - effects[component] + own[shown] + effects[home]
    return y, _At(unit, float(own[shown]))


def _order_line(c: FloatArray, at: _At, fit: BetweenFit, level: float) -> Line:
    values, low, high = [], [], []
    for x in np.log(c):
        e = fit.contrast(np.concatenate([[x], at.strata]))
        interval = e.interval(level)
        values.append(e.value + at.offset)
        low.append(math.nan if interval is None else interval[0] + at.offset)
        high.append(math.nan if interval is None else interval[1] + at.offset)
    known = all(map(math.isfinite, low))
    return Line(c, np.exp(values), np.exp(low) if known else None, np.exp(high) if known else None)


def _condition(s: Sample, rows: FloatArray) -> str:
    """Return temperature and state of the electrode of some readings, in words."""
    part = s.take(np.flatnonzero(rows))
    words = [f"{np.median(part.c.temperature_K) - ZERO_CELSIUS_K:.0f} °C"]
    if np.isfinite(part.c.x_V).all():
        scale = part.c.name("scale", int(part.c.scale[0]))
        words.append(f"{np.median(part.c.x_V):.3g} V" + (f" vs {scale}" if scale else ""))
    return ", ".join(words)


# Temperature -----------------------------------------------------------------------------


def _arrhenius(estimate: SeriesEstimate, part: Sample, criteria: Criteria) -> Curve:
    assert isinstance(estimate, BarrierEstimate)
    s, inside = attempt(part, usable)
    x = 1000.0 / (GAS_CONSTANT * s.c.temperature_K)
    y, level = _without_levels(s, inside, estimate.Ea_kJ_mol * x)
    kelvin = _grid(s.c.temperature_K)
    at = 1000.0 / (GAS_CONSTANT * kelvin)
    line = _turning(kelvin, at, float(x.mean()), estimate.Ea_kJ_mol, estimate.Ea_ci, level)
    held = "" if len(np.unique(s.c.specimen)) == 1 else "levels of the specimens taken out"
    return Curve(estimate, s.c.temperature_K, np.exp(y), _names(s), s.c.measurement, (line,), held)


def _without_levels(s: Sample, inside: IntArray, shape: FloatArray) -> tuple[FloatArray, float]:
    """Return ln R with the level of each block replaced by the mean level of the specimens."""
    level = means(s.y - shape, inside)
    first = np.unique(inside, return_index=True)[1]
    common = float(np.mean(means(level, combine(s.c.specimen[first]))))
    return s.y - level[inside] + common, common


def _turning(
    shown: FloatArray, x: FloatArray, centre: float, slope: float, ci: Interval, level: float
) -> Line:
    """Return a line through its level at `centre`, with the band its slope's interval spans."""
    y = level + slope * x
    if ci is None:
        return Line(shown, np.exp(y))
    ends = np.stack([y + (end - slope) * (x - centre) for end in ci])
    return Line(shown, np.exp(y), np.exp(ends.min(axis=0)), np.exp(ends.max(axis=0)))


# Potential -------------------------------------------------------------------------------


def _potential(estimate: SeriesEstimate, part: Sample, criteria: Criteria) -> Curve:
    assert isinstance(estimate, PotentialEstimate)
    s, finding, _ = potential.finding(part, criteria)
    base, effects = _effects(estimate, finding.contrasts)
    at = np.array(sorted(effects))
    values = np.array([effects[v][0] for v in at])
    kelvin = float(np.median(s.c.temperature_K))
    law = _law(estimate, kelvin, max(1, abs(s.c.facts.charge)))

    def shape(x: FloatArray) -> FloatArray:
        return np.interp(x, at, values) if law is None else law(x)

    inside = combine(s.c.specimen, s.c.cell, s.c.temperature)
    y, level = _without_levels(s, inside, shape(s.c.x_V))
    # level means are differences from `base`; the law, or their own line, places it
    placed = level + float(shape(np.array([base]))[0]) - effects[base][0]
    levels = Levels(
        at, np.exp(placed + values),
        np.exp(placed + np.array([effects[v][1] for v in at])),
        np.exp(placed + np.array([effects[v][2] for v in at])),
    )  # fmt: skip
    x = _grid(s.c.x_V)
    line = Line(x, np.exp(level + shape(x)), name="" if law else "open")
    return Curve(
        estimate, s.c.x_V, np.exp(y), _names(s), s.c.measurement, (line,),
        f"{kelvin - ZERO_CELSIUS_K:.0f} °C", levels,
    )  # fmt: skip


def _effects(
    estimate: PotentialEstimate, contrasts: Sequence[Contrast]
) -> tuple[float, dict[float, tuple[float, float, float]]]:
    """Return a base level [V] and ln R of each level against it: value, low, high."""
    potential_of = {f"{value:.4g} V": value for value in estimate.levels}
    count: dict[str, int] = {}
    for c in contrasts:
        for name in (c.a, c.b):
            count[name] = count.get(name, 0) + 1
    base = max(sorted(count, key=lambda n: potential_of[n]), key=lambda name: count[name])
    found = {potential_of[base]: (0.0, math.nan, math.nan)}
    for c in contrasts:
        if base not in (c.a, c.b):
            continue
        sign, other = (1.0, c.a) if c.b == base else (-1.0, c.b)
        ends = c.estimate.interval() or (math.nan, math.nan)
        low, high = sorted((sign * ends[0], sign * ends[1]))
        found[potential_of[other]] = (sign * c.estimate.value, low, high)
    return potential_of[base], found


def _law(
    estimate: PotentialEstimate, kelvin: float, charge: int
) -> Callable[[FloatArray], FloatArray] | None:
    """Return ln R of the chosen law up to a constant, None where the law is open."""
    if estimate.law == "flat":
        return lambda x: np.zeros_like(x)
    if estimate.law == "exponential" and estimate.slope_per_V is not None:
        slope = estimate.slope_per_V
        return lambda x: slope * x
    if estimate.law == "valley" and estimate.E0_V is not None and estimate.g is not None:
        from campaign.kinetics.frumkin import valley_resistance

        E0, g = estimate.E0_V, estimate.g
        return lambda x: np.log(valley_resistance(x, E0, g, 1.0, kelvin, charge))
    return None


# Age -------------------------------------------------------------------------------------


def _age(estimate: SeriesEstimate, part: Sample, criteria: Criteria) -> Curve:
    assert isinstance(estimate, AgeEstimate)
    fitted = age.fit(part, criteria, estimate.law)
    s = fitted.sample
    days = np.maximum(s.c.age_s, 0.0) / DAY_s
    root = estimate.law == age.SQUARE_ROOT
    x = np.sqrt(days) if root else days
    inside = combine(s.c.cell, s.c.temperature, s.c.scale, s.c.fixed)
    level = means(s.y - estimate.rate * x, inside)
    grid = np.linspace(0.0, float(days.max()), GRID)
    at = np.sqrt(grid) if root else grid
    line = _turning(grid, at, 0.0, estimate.rate, estimate.rate_ci, 0.0)
    named = Line(line.x, line.y, line.low, line.high, estimate.law)
    return Curve(
        estimate, days, np.exp(s.y - level[inside]), _names(s), s.c.measurement, (named,),
        "relative to new, levels of the specimens taken out",
    )  # fmt: skip


_BUILD: dict[str, Callable[[SeriesEstimate, Sample, Criteria], Curve]] = {
    "concentration": _order,
    "temperature": _arrhenius,
    "potential": _potential,
    "age": _age,
}


def read_curves(
    axis: str,
    db: str | None,
    wanted: FilterSource | None = None,
    *,
    response: str = "R_ct",
    porous: bool = True,
    scale: str | None = None,
    without: Sequence[str] = (),
    more: Mapping[str, bool] | None = None,
) -> tuple[Curve, ...]:
    """Return the curves of one axis of a campaign; none along solvent and additive.

    Parameters as for `reading.rebuilt`.
    """
    if axis not in AXES:
        return ()
    looked = look(axis, db, wanted, scale=scale, without=without, more=more)
    return curves(
        axis,
        looked.taken,
        looked.criteria,
        response,
        porous=porous,
        scale=looked.scale,
        more=looked.more,
    )[1]
