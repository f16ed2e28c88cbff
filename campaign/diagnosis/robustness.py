"""What changes the verdict: a specimen, a level of the conditions, a criterion."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Final, Literal

import numpy as np

from campaign.diagnosis.budget import TERMS
from campaign.diagnosis.signatures import AXES
from campaign.diagnosis.summary import EvidenceSource, keep, levels, settle, settle_word
from campaign.diagnosis.verdict import Judged
from campaign.diagnosis.wording import Decider, is_testable, largest
from campaign.ledger.criteria import LIMITS, Criteria
from campaign.ledger.readings import BoolArray, Readings, Snapshot
from campaign.statistics.estimate import Estimate
from campaign.trends.strata import match

Kind = Literal["specimen", "stratum", "criterion"]

STEP: Final = 0.25
"""How much tighter and looser each criterion is tried [1]."""

RATIOS: Final = ("ratio_margin",)
"""Criteria that are factors: a quarter is taken of their logarithm."""

ALPHA: Final = "error_probability"
LARGEST_ALPHA: Final = 0.49
"""Error probability below which a decision is defined [1]: unresponsive needs 1 - 2 alpha > 0."""

TRIED: Final = (
    "order_margin", "ratio_margin", "barrier_margin_kJ_mol", "error_probability",
    "potential_window_V", "working_time_s", "temperature_tolerance_K", "potential_tolerance_V",
    "content_tolerance", "confounding_r", "heterogeneity_p",
)  # fmt: skip


@dataclass(frozen=True)
class Change:
    """The verdict after one thing was left out or one criterion was moved."""

    kind: Kind
    what: str
    verdict: str
    changed: bool


@dataclass(frozen=True)
class Influence:
    """How far one specimen moves an estimate of the dominant term, in its standard errors."""

    specimen: str
    axis: str
    shift: float
    measurements: tuple[int, ...]


@dataclass(frozen=True)
class Robustness:
    """All that was tried, and the specimens that carry the decisions, strongest first."""

    verdict: str
    changes: tuple[Change, ...]
    influences: tuple[Influence, ...]

    @property
    def changing(self) -> tuple[Change, ...]:
        """Those that change the verdict."""
        return tuple(one for one in self.changes if one.changed)


def robustness(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    source: EvidenceSource,
    terms: Sequence[str] = TERMS,
) -> Robustness:
    """Leave out one specimen, one stratum level, and move each criterion by a quarter.

    snapshot holds one electrode's readings. Slow: one diagnosis for each trial. Influence is
    told of the axes that carry the verdict.
    """
    base = settle(snapshot, criteria, electrode, source, terms)
    word = base.verdict.word
    changes: list[Change] = []
    influences: list[Influence] = []
    readings = snapshot.readings

    def tried(kind: Kind, what: str, part: Snapshot, moved: Criteria) -> None:
        after = settle_word(part, moved, electrode, source, terms)
        changes.append(Change(kind, what, after, after != word))

    axes = carrying(base.dominant, criteria.error_probability) if base.dominant else ()
    for specimen in sorted(set(readings.specimen.tolist())):
        mine = readings.specimen == specimen
        if mine.all():
            continue
        part = keep(snapshot, ~mine)
        tried("specimen", specimen, part, criteria)
        if base.dominant is not None:
            found = source(part, criteria, electrode, base.dominant.response)
            influences += _influences(specimen, axes, base.dominant, found, readings, mine)
    for name, rows in strata(readings, criteria):
        if not rows.all():
            tried("stratum", name, keep(snapshot, ~rows), criteria)
    for name, moved in criteria_tried(criteria):
        tried("criterion", name, snapshot, moved)
    influences.sort(key=lambda one: -one.shift)
    return Robustness(word, tuple(changes), tuple(influences))


def carrying(judged: Judged, alpha: float) -> tuple[str, ...]:
    """Return the axes that carry a verdict, in the order of the table.

    Those of required predictions that were decided, and those on which a step that stands
    was confirmed; where nothing was decided, all that required predictions ask for.
    """
    asked = {axis for one in judged.assessments for p in one.step.required for axis in p.axes}
    confirmed = {
        axis
        for one in judged.assessments
        if one.status != "eliminated"
        for axis in one.discriminating
    }
    tested = [axis for axis in AXES if is_testable(judged.evidence.get(axis))]
    decided = [
        axis
        for axis in tested
        if axis in asked | confirmed and judged.evidence[axis].decision(alpha) != "open"
    ]
    return tuple(decided or [axis for axis in tested if axis in asked])


def strata(readings: Readings, criteria: Criteria) -> Iterator[tuple[str, BoolArray]]:
    """Yield every salt in a blend, temperature and potential level with the mask of its rows."""
    blends = list(zip(readings.salt, readings.solvents, readings.additives, strict=True))
    for blend in sorted(set(blends)):
        salt, solvents, additives = blend
        name = f"{salt} in {solvents}" + (f" + {additives}" if additives != "none" else "")
        yield name, np.array([one == blend for one in blends], dtype=bool)
    yield from levels(readings, criteria, "temperature")
    codes = match(readings.potential_V, criteria.potential_tolerance_V).codes
    for code in np.unique(codes[codes >= 0]):
        for reference in sorted(set(readings.reference[codes == code].tolist())):
            rows = (codes == code) & (readings.reference == reference)
            yield f"{readings.potential_V[rows].mean():.3f} V vs {reference}", rows


def criteria_tried(criteria: Criteria) -> Iterator[tuple[str, Criteria]]:
    """Yield the criteria with each threshold a quarter lower and higher, inside its limits."""
    for name in TRIED:
        value = float(getattr(criteria, name))
        low, high = LIMITS[name]
        for sign, word in ((-1, "lower"), (1, "higher")):
            if name in RATIOS:
                moved = math.exp(math.log(value) * (1 + sign * STEP))
            else:
                moved = value * (1 + sign * STEP)
            moved = min(max(moved, low), high, LARGEST_ALPHA if name == ALPHA else high)
            if moved != value:
                label = f"{name} a quarter {word} ({moved:.3g})"
                yield label, replace(criteria, **{name: moved})


def _influences(
    specimen: str,
    axes: Sequence[str],
    before: Judged,
    after: Mapping[str, Decider],
    readings: Readings,
    mine: BoolArray,
) -> Iterator[Influence]:
    measurements = tuple(int(one) for one in readings.measurement[mine])
    for axis in axes:
        shift = _shift(before.evidence.get(axis), after.get(axis))
        if shift is not None:
            yield Influence(specimen, axis, shift, measurements)


def _shift(before: Decider | None, after: Decider | None) -> float | None:
    """Return |after - before| in standard errors of the estimate before, None without one."""
    first = _leading(before)
    if first is None or after is None:
        return None
    name, estimate = first
    same = _named(after, name)
    if same is None or not (math.isfinite(estimate.se) and estimate.se > 0):
        return None
    shift = abs(same.value - estimate.value) / estimate.se
    return shift if math.isfinite(shift) else None


def _leading(finding: Decider | None) -> tuple[tuple[str, str] | None, Estimate] | None:
    slope: Estimate | None = getattr(finding, "slope", None)
    if slope is not None:
        return None, slope
    contrast = largest(finding)
    return None if contrast is None else ((contrast.a, contrast.b), contrast.estimate)


def _named(finding: Decider, name: tuple[str, str] | None) -> Estimate | None:
    if name is None:
        slope: Estimate | None = getattr(finding, "slope", None)
        return slope
    for contrast in getattr(finding, "contrasts", ()):
        if (contrast.a, contrast.b) == name:
            found: Estimate = contrast.estimate
            return found
    return None
