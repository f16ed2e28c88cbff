"""One diagnosis an electrode: budget, findings, candidates, verdict and what is missing."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any, Final

import numpy as np

from campaign.diagnosis.assignment import Check, assignment_checks, failed
from campaign.diagnosis.budget import RESPONSE_OF, TERMS, Budget, Crossing, budget, crossings
from campaign.diagnosis.engine import Assessment, Evidence, assess
from campaign.diagnosis.lazy import trend_evidence as trend_evidence
from campaign.diagnosis.signatures import AXES, candidates
from campaign.diagnosis.verdict import (
    Judged,
    Verdict,
    agree,
    confounded_axes,
    judge,
    limit,
    word_alone,
)
from campaign.diagnosis.wording import (
    Decider,
    contrast_interval,
    exponential,
    numbers,
    telling,
    why_open,
)
from campaign.errors import refused
from campaign.kinetics.constants import ZERO_CELSIUS_K
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import BoolArray, Readings, Snapshot
from campaign.trends.results import plain
from campaign.trends.strata import match

EvidenceSource = Callable[[Snapshot, Criteria, str, str], Mapping[str, Decider]]

GROUPINGS: Final = ("salt", "solvents", "temperature")


@dataclass(frozen=True)
class Diagnosis:
    """All that `summary` says of one electrode (or one group of its readings).

    group: what the readings were split by and the group's name. dominant: R_el, R_sl, R_ct,
    R_lat or diffusion, None where no term was fitted. evidence: findings on the dominant
    term by axis. candidates: the steps of the dominant term.
    """

    electrode: str
    group: Mapping[str, str]
    n_specimens: int
    n_measurements: int
    dominant: str | None
    share: float | None
    budget: Budget | None
    crossings: tuple[Crossing, ...]
    evidence: Evidence
    candidates: tuple[Assessment, ...]
    verdict: Verdict
    checks: tuple[Check, ...]
    warnings: tuple[str, ...]
    criteria: Criteria = field(default_factory=Criteria)


@dataclass(frozen=True)
class Outcome:
    """What the readings of one electrode say before strength is limited."""

    budget: Budget | None
    judged: Mapping[str, Judged]
    verdict: Verdict

    @property
    def dominant(self) -> Judged | None:
        """The candidates and findings of the dominant term."""
        return next(iter(self.judged.values()), None)


def diagnose(
    snapshot: Snapshot,
    criteria: Criteria,
    *,
    electrodes: Sequence[str] | None = None,
    terms: Sequence[str] | None = None,
    evidence: EvidenceSource | None = None,
    by: str | None = None,
    leave_one_out: bool = True,
) -> list[Diagnosis]:
    """Return a diagnosis for every electrode with readings, in alphabetical order.

    electrodes: only these. terms: only these of R_sl, R_ct, R_lat, diffusion share the
    budget. evidence: gives the findings of one electrode and response by axis (default: the
    trends). by: salt, solvents or temperature gives a row each. leave_one_out: test whether
    one specimen's removal changes the verdict, where it would be strong (slow); without that
    test a verdict can still be called strong.
    Raises Refused for an unknown grouping.
    """
    source = evidence or trend_evidence
    chosen = sorted(set(snapshot.readings.electrode.tolist()))
    if electrodes is not None:
        chosen = [label for label in chosen if label in set(electrodes)]
    scope = tuple(terms or TERMS)
    return [
        _diagnose(part, criteria, label, group, source, scope, leave_one_out)
        for label in chosen
        for group, part in split(of_electrode(snapshot, label), criteria, by)
    ]


def of_electrode(snapshot: Snapshot, electrode: str) -> Snapshot:
    """Return the snapshot with one electrode's readings only."""
    return keep(snapshot, snapshot.readings.electrode == electrode)


def part_of(snapshot: Snapshot, criteria: Criteria, diagnosis: Diagnosis) -> Snapshot:
    """Return the readings that a diagnosis rests on: its electrode's, or those of its group."""
    whole = of_electrode(snapshot, diagnosis.electrode)
    by = next(iter(diagnosis.group), None)
    return next(
        part for group, part in split(whole, criteria, by) if group == dict(diagnosis.group)
    )


def keep(snapshot: Snapshot, rows: BoolArray) -> Snapshot:
    """Return the snapshot with the readings of a boolean mask only."""
    return replace(snapshot, readings=snapshot.readings.take(np.asarray(rows, dtype=bool)))


def split(
    snapshot: Snapshot, criteria: Criteria, by: str | None
) -> Iterator[tuple[dict[str, str], Snapshot]]:
    """Yield the groups of a grouping with their snapshots; one group without a grouping."""
    if by is None:
        yield {}, snapshot
        return
    for name, rows in levels(snapshot.readings, criteria, by):
        yield {by: name}, keep(snapshot, rows)


def levels(readings: Readings, criteria: Criteria, by: str) -> Iterator[tuple[str, BoolArray]]:
    """Yield the levels of salt, solvents or temperature: a name and the mask of its rows."""
    if by == "temperature":
        codes = match(readings.temperature_K, criteria.temperature_tolerance_K).codes
        for code in np.unique(codes):
            rows = codes == code
            celsius = float(readings.temperature_K[rows].mean()) - ZERO_CELSIUS_K
            yield f"{celsius:.1f} °C", rows
        return
    if by not in GROUPINGS:
        raise refused(
            f"There is no grouping {by!r}.", value=by, expected="one of " + ", ".join(GROUPINGS)
        )
    column = getattr(readings, by)
    for name in sorted(set(column.tolist())):
        yield str(name), column == name


def settle(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    source: EvidenceSource,
    terms: Sequence[str] = TERMS,
) -> Outcome:
    """Return budget and verdict of a snapshot that holds one electrode's readings only.

    The dominant term is judged, and with it every term not shown to be smaller.
    """
    facts = snapshot.electrodes.get(electrode)
    weighed = budget(snapshot.readings, criteria, facts, terms=terms)
    if weighed is None:
        verdict = Verdict(
            "undetermined", None, missing=("no reading has a fitted resistance of the electrode",)
        )
        return Outcome(None, {}, verdict)
    judged = {
        term: judge_term(snapshot, criteria, electrode, term, source, weighed)
        for term in (weighed.dominant, *weighed.rivals)
    }
    alpha = criteria.error_probability
    verdicts = {term: judge(one, alpha) for term, one in judged.items()}
    return Outcome(weighed, judged, agree(verdicts))


def settle_word(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    source: EvidenceSource,
    terms: Sequence[str] = TERMS,
) -> str:
    """Return the word of `settle` alone, with no more findings estimated than it takes."""
    readings = snapshot.readings
    weighed = budget(readings, criteria, snapshot.electrodes.get(electrode), terms=terms)
    if weighed is None:
        return "undetermined"
    gone = absent_responses(readings, weighed)
    first = ""
    for term in (weighed.dominant, *weighed.rivals):
        response = RESPONSE_OF[term]
        found = source(snapshot, criteria, electrode, response)
        word = word_alone(response, found, absent=gone, alpha=criteria.error_probability)
        without_control = word in ("undetermined", "conflicting")
        if (first and word != first) or (weighed.rivals and without_control):
            return "undetermined"
        first = word
    return first


def judge_term(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    term: str,
    source: EvidenceSource,
    weighed: Budget | None,
) -> Judged:
    """Return the candidates of one term held against its findings."""
    response = RESPONSE_OF[term]
    found = source(snapshot, criteria, electrode, response)
    gone = absent_responses(snapshot.readings, weighed)
    steps = candidates(response)
    return Judged(
        response, found, assess(steps, found, absent=gone, alpha=criteria.error_probability)
    )


def absent_responses(readings: Readings, weighed: Budget | None) -> frozenset[str]:
    """Return the arcs that every reading which states them calls absent.

    In the electrolyte of the reference condition, where there is one.
    """
    rows = np.ones(len(readings), dtype=bool)
    if weighed is not None:
        rows = np.asarray(readings.electrolyte == weighed.condition.electrolyte, dtype=bool)
    return frozenset(
        name
        for name, gone in readings.absent.items()
        if np.any(gone & rows) and not np.any(np.isfinite(readings.values[name]) & rows)
    )


def _diagnose(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    group: Mapping[str, str],
    source: EvidenceSource,
    terms: Sequence[str],
    leave_one_out: bool,
) -> Diagnosis:
    readings, facts = snapshot.readings, snapshot.electrodes.get(electrode)
    outcome = settle(snapshot, criteria, electrode, source, terms)
    checks = _checks(snapshot, criteria, electrode, source, outcome)
    specimens = sorted(set(readings.specimen.tolist()))

    def without(specimen: str) -> str:
        part = keep(snapshot, readings.specimen != specimen)
        return settle_word(part, criteria, electrode, source, terms)

    alpha = criteria.error_probability
    confounded = _unique(
        axis for one in outcome.judged.values() for axis in confounded_axes(one, alpha)
    )
    verdict = limit(
        outcome.verdict,
        confounded=confounded,
        two_electrode=bool((readings.configuration == "two-electrode").any()),
        failed_checks=failed(checks),
        specimens=specimens,
        without=without if leave_one_out else None,
    )
    weighed, dominant = outcome.budget, outcome.dominant
    return Diagnosis(
        electrode=electrode,
        group=dict(group),
        n_specimens=len(specimens),
        n_measurements=len(readings),
        dominant=weighed.dominant if weighed else None,
        share=weighed.share if weighed else None,
        budget=weighed,
        crossings=crossings(readings, weighed.condition, facts, terms) if weighed else (),
        evidence=dict(dominant.evidence) if dominant else {},
        candidates=dominant.assessments if dominant else (),
        verdict=replace(verdict, missing=(*verdict.missing, *_cell_limited(weighed))),
        checks=checks,
        warnings=_warnings(weighed, dominant, verdict, checks),
        criteria=criteria,
    )


def _checks(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    source: EvidenceSource,
    outcome: Outcome,
) -> tuple[Check, ...]:
    readings = snapshot.readings
    film: Decider | None = None
    if "R_sl" in outcome.judged:
        film = outcome.judged["R_sl"].evidence.get("potential")
    elif np.any(readings.values["R_sl"] > 0):
        film = source(snapshot, criteria, electrode, "R_sl").get("potential")
    facts = snapshot.electrodes.get(electrode)
    return assignment_checks(readings, facts, film, criteria.error_probability)


def _cell_limited(weighed: Budget | None) -> tuple[str, ...]:
    if weighed is None or not weighed.cell_limited:
        return ()
    return (
        "cell-limited: a cell with less ohmic resistance (reference electrode nearer, thinner "
        "separator, more conductive electrolyte), to see the electrode itself",
    )


def _warnings(
    weighed: Budget | None,
    dominant: Judged | None,
    verdict: Verdict,
    checks: Sequence[Check],
) -> tuple[str, ...]:
    said: list[str] = list(verdict.warnings)
    if weighed is not None:
        said += weighed.warnings
        if weighed.rivals:
            said.append(
                f"{weighed.dominant} is the largest term, but not shown to be larger than "
                + ", ".join(weighed.rivals)
            )
        if weighed.missing_terms:
            said.append("not fitted, so not in the budget: " + ", ".join(weighed.missing_terms))
    if dominant is not None:
        said += _of_findings(dominant.evidence)
    said += [
        f"{one.name}: {one.sentence} (measurements {_some(one.measurements)})"
        for one in checks
        if one.measurements
    ]
    return _unique(said)


def _of_findings(evidence: Evidence) -> list[str]:
    """Return the findings' warnings, each once, with the axes it concerns."""
    axes: dict[str, list[str]] = {}
    for axis, finding in evidence.items():
        for text in getattr(finding, "warnings", ()):
            axes.setdefault(text, []).append(axis)
    return [f"{', '.join(names)}: {text}" for text, names in axes.items()]


def _some(numbers_: Sequence[int], most: int = 10) -> str:
    shown = ", ".join(str(number) for number in numbers_[:most])
    return shown if len(numbers_) <= most else f"{shown} and {len(numbers_) - most} more"


def _unique(texts: Iterable[str]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(texts))


def diagnostic(axis: str, finding: Decider | None, alpha: float) -> dict[str, Any]:
    """Return one axis as plain data: decision, estimate, interval [low, high] or null.

    The estimate is the order [1], or of the most telling pair of levels the factor [1] or the
    difference of barriers [kJ/mol], with an interval simultaneous over all pairs; an axis
    that was not measured is open.
    """
    if finding is None:
        return {"decision": "open", "estimate": None, "interval": None, "because": "not measured"}
    decision = finding.decision(alpha)
    reason = why_open(finding)
    value, interval, pair = _estimate(axis, finding, alpha)
    row: dict[str, Any] = {
        "decision": f"open: {reason}" if reason else decision,
        "estimate": value,
        "interval": interval,
        "between": pair,
        "because": numbers(axis, finding, alpha),
        "n_specimens": getattr(finding, "n_specimens", None),
        "n_measurements": getattr(finding, "n_measurements", None),
        "confounded": bool(getattr(finding, "confounded", False)),
        "warnings": list(getattr(finding, "warnings", ())),
    }
    return row


def _estimate(
    axis: str, finding: Decider, alpha: float
) -> tuple[float | None, tuple[float, float] | None, list[str] | None]:
    slope = getattr(finding, "slope", None)
    if slope is not None:
        return slope.value, slope.interval(1 - alpha), None
    contrast = telling(finding, alpha)
    if contrast is None:
        return None, None, None
    value, interval = contrast.estimate.value, contrast_interval(finding, contrast, alpha)
    if axis != "barrier":
        value = exponential(value)
        interval = interval and (exponential(interval[0]), exponential(interval[1]))
    return value, interval, [contrast.a, contrast.b]


def budget_row(weighed: Budget, crossed: Sequence[Crossing] = ()) -> dict[str, Any]:
    """Return a budget as plain data: a share for each term, and what stands beside them."""
    condition = weighed.condition
    row: dict[str, Any] = {term: one.share for term, one in weighed.shares.items()}
    row |= {
        "time_s": weighed.time_s,
        "share_ci": {term: one.interval for term, one in weighed.shares.items()},
        "contribution_ohm_cm2": {
            "R_el": weighed.R_el,
            **{term: one.contribution for term, one in weighed.shares.items()},
        },
        "R_el_ohm_cm2": weighed.R_el,
        "cell_limited": weighed.cell_limited,
        "next": weighed.next_term,
        "difference": weighed.difference,
        "difference_ci": weighed.difference_interval,
        "not_told_apart": list(weighed.rivals),
        "scatter_from": weighed.scatter,
        "n_specimens": weighed.n_specimens,
        "condition": {
            "electrolyte": condition.electrolyte,
            "temperature_C": condition.temperature_K - ZERO_CELSIUS_K,
            "potential_V": condition.potential_V,
            "reference": condition.reference,
        },
        "crossings": [one.__dict__ for one in crossed],
    }
    return row


def candidate_row(one: Assessment) -> dict[str, Any]:
    """Return one candidate with the keys of the fixed interface."""
    return {
        "step": one.step.name,
        "control": one.step.control,
        "status": one.status,
        "for": list(one.supporting),
        "against": list(one.opposing),
    }


def to_row(diagnosis: Diagnosis) -> dict[str, Any]:
    """Return a diagnosis as JSON-ready data with the keys of the fixed interface."""
    alpha = diagnosis.criteria.error_probability
    weighed, verdict = diagnosis.budget, diagnosis.verdict
    row = {
        "electrode": diagnosis.electrode,
        **diagnosis.group,
        "n_specimens": diagnosis.n_specimens,
        "n_measurements": diagnosis.n_measurements,
        "dominant": diagnosis.dominant,
        "share": diagnosis.share,
        "share_ci": (
            weighed.shares[weighed.dominant].interval
            if weighed and weighed.dominant in weighed.shares
            else None
        ),
        "cell_limited": bool(weighed and weighed.cell_limited),
        "budget": budget_row(weighed, diagnosis.crossings) if weighed else {},
        "diagnostics": {
            axis: diagnostic(axis, diagnosis.evidence.get(axis), alpha) for axis in AXES
        },
        "candidates": [candidate_row(one) for one in diagnosis.candidates],
        "verdict": verdict.word,
        "strength": verdict.strength,
        "text": verdict.text,
        "because": list(verdict.because),
        "missing": list(verdict.missing),
        "checks": [one.__dict__ for one in diagnosis.checks],
        "warnings": list(diagnosis.warnings),
    }
    converted: dict[str, Any] = plain(row)
    return converted
