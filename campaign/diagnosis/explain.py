"""Everything behind one electrode's verdict: the data of `explain`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Final

from campaign.diagnosis.budget import RESPONSE_OF, TERMS, Budget, budgets
from campaign.diagnosis.engine import Assessment
from campaign.diagnosis.lazy import trend_evidence
from campaign.diagnosis.robustness import Robustness, robustness
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
SHOWN_INFLUENCES: Final = 8


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
        would_change=would_change(diagnosis),
    )


def _fitted_terms(snapshot: Snapshot, terms: Sequence[str]) -> list[str]:
    readings = snapshot.readings
    return [
        term
        for term in ("R_el", *terms)
        if (readings.values[RESPONSE_OF[term]] > 0).any()
        or (RESPONSE_OF[term] in readings.absent and readings.absent[RESPONSE_OF[term]].any())
    ]


def would_change(diagnosis: Diagnosis) -> tuple[str, ...]:
    """Return which decisions would make a step fall or stand again, in sentences."""
    alpha = diagnosis.criteria.error_probability
    said = []
    for one in diagnosis.candidates:
        if one.status == "eliminated":
            said.append(_would_return(one))
        else:
            said += [_would_fall(one, p, diagnosis, alpha) for p in one.step.required]
    if diagnosis.budget is not None and diagnosis.budget.next_term is not None:
        other = diagnosis.budget.next_term
        said.append(f"the answer would be that of {other} if {other} were shown to be the largest")
    return tuple(said)


def _would_return(one: Assessment) -> str:
    return f"{one.step.name} would stand again if this were withdrawn: {'; '.join(one.opposing)}"


def _would_fall(one: Assessment, prediction: Prediction, diagnosis: Diagnosis, alpha: float) -> str:
    contrary = "unresponsive" if prediction.outcome == "responds" else "responsive"
    axes = listed(list(prediction.axes))
    verb = "were both shown" if len(prediction.axes) > 1 else "were shown"
    found = [
        f"{axis} is now {diagnosis.evidence[axis].decision(alpha)}"
        if is_testable(diagnosis.evidence.get(axis))
        else f"{axis} is not tested"
        for axis in prediction.axes
    ]
    return f"{one.step.name} would fall if {axes} {verb} {contrary} ({listed(found)})"


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
            "influences": [one.__dict__ for one in tried.influences[:SHOWN_INFLUENCES]],
        }
    )
    converted: dict[str, Any] = plain(row)
    return converted
