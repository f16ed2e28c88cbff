"""Everything behind one electrode's verdict: the data of `explain`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Final

from campaign.diagnosis.budget import RESPONSE_OF, TERMS, Budget, budgets
from campaign.diagnosis.engine import Assessment, falls
from campaign.diagnosis.lazy import trend_evidence
from campaign.diagnosis.robustness import Influence, Robustness, robustness
from campaign.diagnosis.signatures import AXES, Prediction
from campaign.diagnosis.summary import (
    Diagnosis,
    EvidenceSource,
    budget_row,
    candidate_row,
    diagnose,
    diagnostic,
    judge_term,
    of_electrode,
    to_row,
)
from campaign.diagnosis.verdict import Judged, judge
from campaign.diagnosis.wording import is_testable, listed
from campaign.errors import refused
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends.results import plain

TIMES_s: Final = (0.1, 1.0, 10.0, 100.0)
SHOWN_INFLUENCES: Final = 3
"""Specimens shown for each axis."""


@dataclass(frozen=True)
class Explanation:
    """One electrode's diagnosis taken apart.

    by_time: budgets at several times. terms: every term that was fitted, with its findings
    and candidates. robustness: None where it was not asked for. would_change: what decision
    would change the verdict, in sentences.
    """

    diagnosis: Diagnosis
    by_time: tuple[Budget, ...]
    terms: Mapping[str, Judged]
    robustness: Robustness | None
    would_change: tuple[str, ...]


def explain(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    *,
    evidence: EvidenceSource | None = None,
    times_s: Sequence[float] = TIMES_s,
    robust: bool = True,
    terms: Sequence[str] | None = None,
) -> Explanation:
    """Return the explanation of one electrode. robust=False leaves out the slow trials.

    Raises Refused when the electrode has no readings.
    """
    part = of_electrode(snapshot, electrode)
    if not len(part.readings):
        known = sorted(set(snapshot.readings.electrode.tolist()))
        raise refused(
            f"There are no measurements of electrode {electrode!r}.",
            value=electrode,
            expected="one of " + ", ".join(known) if known else "an electrode with measurements",
        )
    source = evidence or trend_evidence
    scope = tuple(terms or TERMS)
    diagnosis = diagnose(part, criteria, evidence=source, terms=scope)[0]
    fitted = _fitted_terms(part, scope)
    judged = {
        term: judge_term(part, criteria, electrode, term, source, diagnosis.budget)
        for term in fitted
    }
    facts = part.electrodes.get(electrode)
    return Explanation(
        diagnosis=diagnosis,
        by_time=budgets(part.readings, criteria, facts, times_s, scope),
        terms=judged,
        robustness=robustness(part, criteria, electrode, source, scope) if robust else None,
        would_change=would_change(
            diagnosis,
            {term: judge(one, criteria.error_probability).word for term, one in judged.items()},
        ),
    )


def _fitted_terms(snapshot: Snapshot, terms: Sequence[str]) -> list[str]:
    readings = snapshot.readings
    return [
        term
        for term in ("R_el", *terms)
        if (readings.values[RESPONSE_OF[term]] > 0).any()
        or (RESPONSE_OF[term] in readings.absent and readings.absent[RESPONSE_OF[term]].any())
    ]


def would_change(diagnosis: Diagnosis, answers: Mapping[str, str] | None = None) -> tuple[str, ...]:
    """Return which decisions would make a step fall or stand again, in sentences.

    answers: the verdict of each term alone.
    """
    alpha = diagnosis.criteria.error_probability
    said = []
    for one in diagnosis.candidates:
        if one.status == "eliminated":
            said.append(_would_return(one, diagnosis, alpha))
        else:
            said += [_would_fall(one, p, diagnosis, alpha) for p in one.step.required]
    if diagnosis.budget is not None and diagnosis.budget.next_term is not None:
        other = diagnosis.budget.next_term
        answer = (answers or {}).get(other)
        said.append(
            f"the answer would be that of {other}{f' ({answer})' if answer else ''} if {other} "
            "were shown to be the largest term"
        )
    return tuple(said)


def _would_return(one: Assessment, diagnosis: Diagnosis, alpha: float) -> str:
    strict = alpha / max(1, len(one.step.required))
    shown = [
        f"{axis} were no longer shown to "
        + ("be unresponsive" if prediction.outcome == "responds" and _flat(decision) else "respond")
        for prediction in one.step.required
        if falls(prediction, diagnosis.evidence, alpha, strict)
        for axis in prediction.axes
        if is_testable(diagnosis.evidence.get(axis))
        for decision in (diagnosis.evidence[axis].decision(alpha),)
    ]
    if not shown:
        return f"{one.step.name} would stand again if the {one.step.needs_arc} arc were found"
    return f"{one.step.name} would stand again if {listed(shown)}"


def _flat(decision: str) -> bool:
    return decision == "unresponsive"


def _would_fall(one: Assessment, prediction: Prediction, diagnosis: Diagnosis, alpha: float) -> str:
    contrary = "unresponsive" if prediction.outcome == "responds" else "responsive"
    axes = listed(list(prediction.axes))
    verb = "were both shown" if len(prediction.axes) > 1 else "were shown"
    found = [
        f"{axis}: {diagnosis.evidence[axis].decision(alpha)}"
        if is_testable(diagnosis.evidence.get(axis))
        else f"{axis}: not tested"
        for axis in prediction.axes
    ]
    return f"{one.step.name} would fall if {axes} {verb} {contrary} (now {', '.join(found)})"


def _carrying(influences: Sequence[Influence]) -> list[dict[str, Any]]:
    """Return the specimens that move each axis most, in the order of the axes."""
    return [
        one.__dict__
        for axis in AXES
        for one in [found for found in influences if found.axis == axis][:SHOWN_INFLUENCES]
    ]


def to_dict(explanation: Explanation) -> dict[str, Any]:
    """Return an explanation as JSON-ready data: the summary row and what is behind it."""
    diagnosis, tried = explanation.diagnosis, explanation.robustness
    alpha = diagnosis.criteria.error_probability
    row = to_row(diagnosis)
    row["budget_by_time"] = [budget_row(one) for one in explanation.by_time]
    row["terms"] = {
        term: {
            "response": one.response,
            "verdict": judge(one, alpha).word,
            "diagnostics": {axis: diagnostic(axis, one.evidence.get(axis), alpha) for axis in AXES},
            "candidates": [candidate_row(candidate) for candidate in one.assessments],
        }
        for term, one in explanation.terms.items()
    }
    row["would_change"] = list(explanation.would_change)
    row["robustness"] = (
        None
        if tried is None
        else {
            "verdict": tried.verdict,
            "tried": [one.__dict__ for one in tried.changes],
            "changing": [one.__dict__ for one in tried.changing],
            "influences": _carrying(tried.influences),
        }
    )
    converted: dict[str, Any] = plain(row)
    return converted
