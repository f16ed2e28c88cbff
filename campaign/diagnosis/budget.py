"""How much of the resistance each term makes up at a time after a current step.

The shares are those of R_sl, R_ct, R_lat and diffusion at one reference condition; R_el is
carried beside them because it belongs to the geometry of the cell. Everything is per
interface and area [ohm cm2].
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from campaign.diagnosis.reference import Condition, peers, reference_condition
from campaign.kinetics.step_response import arc_response
from campaign.kinetics.warburg import capped_step_resistance
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrodeFacts, FloatArray, Readings
from campaign.statistics.estimate import Estimate
from campaign.trends.response import per_interface

TERMS: Final = ("R_sl", "R_ct", "R_lat", "diffusion")
ARCS: Final = {"R_sl": ("Q_sl", "n_sl"), "R_ct": ("Q_ct", "n_ct"), "R_lat": ("Q_lat", "n_lat")}
RESPONSE_OF: Final = {
    "R_el": "R_el", "R_sl": "R_sl", "R_ct": "R_ct", "R_lat": "R_lat", "diffusion": "sigma_w",
}  # fmt: skip

ENOUGH: Final = 6
"""Specimens at the reference condition from which their own differences are used alone."""

FEWEST_ELECTROLYTES: Final = 3
"""Electrolytes with one specimen each from which their spread stands for the scatter."""

TIMES_s: Final = np.geomspace(1e-4, 1e6, 121)
"""Times at which crossings are looked for [s]."""


@dataclass(frozen=True)
class Terms:
    """Area-specific values of n readings, each array [n]; NaN where not fitted, 0 if absent.

    values: R_el, R_sl, R_ct, R_lat [ohm cm2], diffusion = sigma_w [ohm cm2 s^-1/2].
    cpe, exponent: Q [S s^n cm^-2] and n [1] of the three arcs.
    """

    values: Mapping[str, FloatArray]
    cpe: Mapping[str, FloatArray]
    exponent: Mapping[str, FloatArray]

    def at(self, term: str, time_s: float | FloatArray, facts: ElectrodeFacts | None) -> FloatArray:
        """Return the contribution of one term [ohm cm2] at `time_s` [s].

        Shape [n]; times of shape [m, 1] give [m, n].
        """
        if term == "R_el":
            return self.values[term]
        if term == "diffusion":
            length = facts.diffusion_length_cm if facts else None
            diffusivity = facts.diffusivity_cm2_s if facts else None
            return capped_step_resistance(self.values[term], time_s, length, diffusivity)
        return arc_response(self.values[term], self.cpe[term], self.exponent[term], time_s)


@dataclass(frozen=True)
class Share:
    """Contribution [ohm cm2] of a term, its share [1] and the share's 95 % interval."""

    contribution: float
    share: float
    interval: tuple[float, float] | None


@dataclass(frozen=True)
class Crossing:
    """At `time_s` [s] the contribution of `after` overtakes that of `before`.

    leading: `before` was the largest term until then.
    """

    time_s: float
    before: str
    after: str
    leading: bool


@dataclass(frozen=True)
class Budget:
    """Shares at one time and what they rest on.

    dominant: the largest term (R_el where `cell_limited`). rivals: terms not shown to be
    smaller than it. difference: share of the largest less that of the next, with interval.
    scatter: where the interval's scatter was taken from. missing_terms: terms no reading of
    the condition fits.
    """

    time_s: float
    condition: Condition
    n_specimens: int
    R_el: float
    shares: Mapping[str, Share]
    cell_limited: bool
    dominant: str
    next_term: str | None
    difference: float
    difference_interval: tuple[float, float] | None
    rivals: tuple[str, ...]
    scatter: str
    missing_terms: tuple[str, ...]
    warnings: tuple[str, ...]

    @property
    def share(self) -> float:
        """Share of the dominant term; that of R_el is among all five."""
        if self.dominant != "R_el":
            return self.shares[self.dominant].share
        return self.R_el / (self.R_el + sum(one.contribution for one in self.shares.values()))


def terms_of(readings: Readings) -> Terms:
    """Return the area-specific values of the readings.

    A symmetric cell has two interfaces in series: per interface its arcs and sigma_w are
    halved and its Q doubled, R_el stays. An absent arc is 0.
    """
    values = {}
    for term, quantity in RESPONSE_OF.items():
        value, _ = per_interface(readings, quantity)
        absent = readings.absent.get(quantity)
        values[term] = value if absent is None else np.where(absent, 0.0, value)
    interfaces = np.where(readings.configuration == "symmetric", 2.0, 1.0)
    return Terms(
        values,
        {arc: readings.values[q] * interfaces / readings.area_cm2 for arc, (q, _) in ARCS.items()},
        {arc: readings.values[n] for arc, (_, n) in ARCS.items()},
    )


def budget(
    readings: Readings,
    criteria: Criteria,
    facts: ElectrodeFacts | None = None,
    *,
    time_s: float | None = None,
    terms: Sequence[str] = TERMS,
) -> Budget | None:
    """Return the budget of one electrode at `time_s` [s] (default: the working time).

    None where no reading has any of `terms`. Raises nothing for thin data: an interval that
    cannot be had is None and then nothing is shown to be smaller than the largest term.
    """
    time = criteria.working_time_s if time_s is None else time_s
    found = budgets(readings, criteria, facts, (time,), terms)
    return found[0] if found else None


@dataclass(frozen=True)
class _Grounds:
    """What budgets at all times rest on: the condition, and one row a specimen there.

    specimens: at the condition and, where it has few, at its peers.
    """

    values: Terms
    condition: Condition
    specimens: tuple[Terms, ...]


def _grounds(readings: Readings, criteria: Criteria, terms: Sequence[str]) -> _Grounds | None:
    values = terms_of(readings)
    fitted = np.any([np.isfinite(values.values[term]) for term in terms], axis=0)
    condition = reference_condition(readings, criteria, fitted)
    if condition is None:
        return None
    alike = [condition]
    if condition.n_specimens < ENOUGH:
        alike += peers(condition)
    specimens = tuple(_specimens(readings, values, one) for one in alike)
    return _Grounds(values, condition, specimens)


def _specimens(readings: Readings, values: Terms, condition: Condition) -> Terms:
    """Return one row a specimen: the mean R, sigma_w and n and the geometric mean Q of its
    spectra at the condition. What a specimen lacks stays NaN.
    """
    rows = np.array(condition.rows)
    names = readings.specimen[rows].astype(str)
    groups = [rows[names == name] for name in np.unique(names)]

    def average(columns: Mapping[str, FloatArray]) -> dict[str, FloatArray]:
        return {
            name: np.array([_column_means(column[group]) for group in groups])
            for name, column in columns.items()
        }

    logs = {name: np.log(column) for name, column in values.cpe.items()}
    cpe = {name: np.exp(column) for name, column in average(logs).items()}
    return Terms(average(values.values), cpe, average(values.exponent))


def _table(
    values: Terms, time_s: float, facts: ElectrodeFacts | None, terms: Sequence[str]
) -> FloatArray:
    """Return contributions [specimens, 1 + terms], R_el first.

    A term that a specimen lacks takes the mean of the others; one that all lack is NaN.
    """
    table = np.stack([values.at(term, time_s, facts) for term in ("R_el", *terms)], axis=1)
    return np.where(np.isnan(table), _column_means(table), table)


def _column_means(columns: FloatArray) -> FloatArray:
    known = np.isfinite(columns)
    counts = known.sum(axis=0)
    sums = np.where(known, columns, 0.0).sum(axis=0)
    return np.where(counts > 0, sums / np.maximum(counts, 1), np.nan)


def _weigh(
    readings: Readings,
    values: Terms,
    condition: Condition,
    groups: Sequence[FloatArray],
    criteria: Criteria,
    facts: ElectrodeFacts | None,
    time_s: float,
    terms: Sequence[str],
) -> Budget | None:
    table = groups[0]
    present = [i for i in range(len(terms)) if np.isfinite(table[:, 1 + i]).all()]
    means = np.nan_to_num(table.mean(axis=0))
    total = float(means[1:].sum())
    if not present or not total > 0:
        return None
    R_el = float(means[0])
    order = sorted(present, key=lambda i: -means[1 + i])
    cell_limited = R_el > means[1 + order[0]]
    level = 1 - criteria.error_probability
    ranked = ([0] if cell_limited else []) + [1 + i for i in order]
    names = ("R_el", *terms)
    lead, compared = ranked[0], ranked[1:]
    scope = list(range(len(names))) if cell_limited else list(range(1, len(names)))
    differences = {i: _difference(groups, scope, lead, i) for i in compared}
    rivals = tuple(
        names[i] for i in compared if means[i] > 0 and not _excludes_zero(differences[i], level)
    )
    of_the_electrode = list(range(1, len(names)))
    shares = {}
    for i in present:
        share = _difference(groups, of_the_electrode, 1 + i, None)
        shares[names[1 + i]] = Share(float(means[1 + i]), share.value, _clipped(share, level))
    top = differences[compared[0]] if compared else None
    return Budget(
        time_s=time_s,
        condition=condition,
        n_specimens=len(table),
        R_el=R_el,
        shares=shares,
        cell_limited=bool(cell_limited),
        dominant=names[lead],
        next_term=names[compared[0]] if compared else None,
        difference=top.value if top else 1.0,
        difference_interval=top.interval(level) if top else None,
        rivals=rivals,
        scatter=_scatter(groups),
        missing_terms=tuple(terms[i] for i in range(len(terms)) if i not in present),
        warnings=tuple(_said(readings, values, condition, shares, facts, time_s, R_el)),
    )


def _scatter(groups: Sequence[FloatArray]) -> str:
    """Return in words where the scatter of the intervals comes from."""
    if len(groups) == 1:
        return "specimens at the reference condition" if len(groups[0]) > 1 else "none"
    if any(len(group) > 1 for group in groups):
        return "specimens, pooled over electrolytes at this temperature and potential"
    if len(groups) >= FEWEST_ELECTROLYTES:
        return "the spread between electrolytes, one specimen each"
    return "none"


def _excludes_zero(estimate: Estimate, level: float) -> bool:
    interval = estimate.interval(level)
    return interval is not None and interval[0] > 0


def _clipped(estimate: Estimate, level: float) -> tuple[float, float] | None:
    interval = estimate.interval(level)
    return None if interval is None else (max(0.0, interval[0]), min(1.0, interval[1]))


def _difference(
    groups: Sequence[FloatArray], scope: Sequence[int], lead: int, other: int | None
) -> Estimate:
    """Return the share of column `lead` less that of `other` (None: the share alone).

    Shares are among the columns in `scope`; groups[0] is the reference condition, the others
    are peers whose scatter is pooled with it. With enough specimens their own differences are
    used. Pooled, each specimen's deviation of ln contribution from the mean of its condition
    is weighted with the sensitivity of the share at the reference condition: the relative
    scatter between cells is what conditions have in common, not the scatter of a share. With
    one specimen everywhere, the spread between electrolytes stands for the scatter: it holds
    the effect of the electrolyte as well, so the interval is too wide rather than too narrow.
    """
    table = np.nan_to_num(groups[0])
    own = _share_difference(table, scope, lead, other)
    n = len(table)
    if len(groups) == 1:
        se = float(own.std(ddof=1)) / math.sqrt(n) if n > 1 else math.nan
        return Estimate(float(own.mean()), se, n - 1)
    means = table.mean(axis=0)
    value = float(_share_difference(means[None, :], scope, lead, other)[0])
    gradient = np.zeros(table.shape[1])
    for column in scope:
        weight = (column == lead) - (column == other)
        gradient[column] = means[column] / means[list(scope)].sum() * (weight - value)
    square, freedom = 0.0, 0
    for group in groups:
        deviation = _log_deviation(np.nan_to_num(group)) @ gradient
        square += float(deviation @ deviation)
        freedom += len(group) - 1
    if freedom == 0 and len(groups) >= FEWEST_ELECTROLYTES:
        centres = np.stack([np.nan_to_num(group).mean(axis=0) for group in groups])
        deviation = _log_deviation(centres) @ gradient
        square, freedom = float(deviation @ deviation), len(groups) - 1
    if freedom == 0:
        return Estimate(value, math.nan, 0)
    return Estimate(value, math.sqrt(square / freedom / n), freedom)


def _share_difference(
    table: FloatArray, scope: Sequence[int], lead: int, other: int | None
) -> FloatArray:
    total = table[:, list(scope)].sum(axis=1)
    less = 0.0 if other is None else table[:, other]
    # a specimen in which every arc is absent has no shares
    return np.asarray((table[:, lead] - less) / np.where(total > 0, total, np.inf))


def _log_deviation(table: FloatArray) -> FloatArray:
    """Return relative deviations from the column means; a column with a zero gives zeros."""
    positive = (table > 0).all(axis=0)
    logs = np.log(np.where(positive, table, 1.0))
    return np.asarray(logs - logs.mean(axis=0))


def _said(
    readings: Readings,
    values: Terms,
    condition: Condition,
    shares: Mapping[str, Share],
    facts: ElectrodeFacts | None,
    time_s: float,
    R_el: float,
) -> list[str]:
    rows = np.array(condition.rows)
    said = []
    for arc in ARCS:
        if arc not in shares:
            continue
        bare = (values.values[arc][rows] > 0) & ~(
            np.isfinite(values.cpe[arc][rows]) & np.isfinite(values.exponent[arc][rows])
        )
        if bare.any():
            said.append(f"{arc} without Q or n in {int(bare.sum())} readings counts fully")
    known = facts and facts.diffusion_length_cm and facts.diffusivity_cm2_s
    largest = max(shares, key=lambda term: shares[term].contribution)
    if largest == "diffusion" and not known:
        said.append(
            f"diffusion is the largest term at {time_s:g} s and grows without limit: record "
            "the diffusion length and the diffusivity of the electrode to cap it"
        )
    if shares and R_el > shares[largest].contribution:
        said.append(
            "cell-limited: R_el is larger than every term of the electrode; it belongs to the "
            "cell's geometry and electrolyte"
        )
    if (readings.configuration[rows] == "two-electrode").any():
        said.append("the reference condition holds two-electrode cells")
    return said


def crossings(
    readings: Readings,
    condition: Condition,
    facts: ElectrodeFacts | None = None,
    terms: Sequence[str] = TERMS,
) -> tuple[Crossing, ...]:
    """Return the times at which two terms' mean contributions cross, in order of time.

    Looked for from 1e-4 to 1e6 s; each is refined by linear interpolation of the
    logarithms.
    """
    values = _specimens(readings, terms_of(readings), condition)
    curves = {}
    for term in terms:
        if np.isfinite(values.values[term]).any():
            curve = _column_means(values.at(term, TIMES_s[:, None], facts).T)
            if (curve > 0).any():
                curves[term] = curve
    names = list(curves)
    found = [
        one
        for i, a in enumerate(names)
        for b in names[i + 1 :]
        for one in _pair_crossings(curves, a, b)
    ]
    return tuple(sorted(found, key=lambda one: one.time_s))


def _pair_crossings(curves: Mapping[str, FloatArray], a: str, b: str) -> list[Crossing]:
    both = (curves[a] > 0) & (curves[b] > 0)
    gap = np.log(np.where(both, curves[a], 1.0)) - np.log(np.where(both, curves[b], 1.0))
    logs = np.log(TIMES_s)
    found = []
    above = gap >= 0
    for k in np.flatnonzero((above[:-1] != above[1:]) & both[:-1] & both[1:]):
        at = logs[k] - gap[k] * (logs[k + 1] - logs[k]) / (gap[k + 1] - gap[k])
        before, after = (a, b) if above[k] else (b, a)
        leading = all(curves[before][k] >= curves[other][k] for other in curves)
        found.append(Crossing(float(np.exp(at)), before, after, leading))
    return found


def budgets(
    readings: Readings,
    criteria: Criteria,
    facts: ElectrodeFacts | None,
    times_s: Sequence[float],
    terms: Sequence[str] = TERMS,
) -> tuple[Budget, ...]:
    """Return the budget at several times [s], for a table over time."""
    grounds = _grounds(readings, criteria, terms)
    if grounds is None:
        return ()
    found = []
    for time in times_s:
        tables = [_table(one, time, facts, terms) for one in grounds.specimens]
        found.append(
            _weigh(
                readings, grounds.values, grounds.condition, tables, criteria, facts, time, terms
            )
        )
    return tuple(one for one in found if one is not None)
