"""Hold candidate steps against findings. Nothing here knows electrochemistry.

Rules: a decisive result against a required prediction eliminates a step, at error
probability alpha/r for a step with r required predictions, so that a true step is lost with
probability alpha at most. An either-or prediction falls only when all of its parts that the
campaign's levels allow to be tested are decisively against it. A result against a typical
prediction counts against the step and no more. An open result says nothing.

`responds, inverse` confirms nothing. It is decisively against both outcomes: against
`unresponsive`, because a response beyond the margin was shown, and against `responds`,
because that predicts a fall where a rise was shown. Counting it for either would be
dishonest; when it eliminates every step, the readings contradict every candidate, which is
what `conflicting` says.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from collections.abc import Set as AbstractSet
from dataclasses import dataclass
from typing import Literal

from campaign.diagnosis.signatures import Prediction, Step
from campaign.diagnosis.wording import Decider, is_testable, listed, numbers

Status = Literal["stands", "eliminated", "untested"]
Standing = Literal["confirmed", "against", "open"]

Evidence = Mapping[str, Decider]


@dataclass(frozen=True)
class Assessment:
    """What the findings say of one step.

    supporting, opposing: sentences. confirmed: axes on which a prediction came true;
    discriminating: those of them on which not all candidates predict the same.
    required_confirmed, required_testable, required_total: counts of required predictions.
    open_axes: axes of predictions that are neither confirmed nor contradicted.
    """

    step: Step
    status: Status
    supporting: tuple[str, ...]
    opposing: tuple[str, ...]
    confirmed: tuple[str, ...]
    discriminating: tuple[str, ...]
    required_confirmed: int
    required_testable: int
    required_total: int
    open_axes: tuple[str, ...]


@dataclass(frozen=True)
class _Result:
    """One prediction held against its findings."""

    prediction: Prediction
    standing: Standing
    confirmed: tuple[str, ...]
    against: tuple[str, ...]
    testable: bool
    falls: bool


def assess(
    steps: Sequence[Step],
    evidence: Evidence,
    *,
    absent: AbstractSet[str] = frozenset(),
    alpha: float = 0.05,
) -> tuple[Assessment, ...]:
    """Return one assessment a step, in the order of `steps` (all candidates of one response).

    evidence: findings by axis; an axis that is missing was not measured. absent: responses
    that were looked for and are not there. alpha: error probability of a decision.
    """
    return tuple(_assess(step, steps, evidence, absent, alpha) for step in steps)


def _assess(
    step: Step,
    steps: Sequence[Step],
    evidence: Evidence,
    absent: AbstractSet[str],
    alpha: float,
) -> Assessment:
    strict = alpha / max(1, len(step.required))
    results = [_hold(one, evidence, alpha, strict) for one in step.predictions]
    missing_arc = bool(step.needs_arc) and step.needs_arc in absent
    opposing = [_sentence(one, evidence, alpha, "against") for one in results if one.against]
    if missing_arc:
        opposing.insert(0, f"the {step.needs_arc} arc was looked for and is absent")
    required = [one for one in results if one.prediction.required]
    confirmed = _unique(axis for one in results for axis in one.confirmed)
    return Assessment(
        step=step,
        status=_status(results, missing_arc),
        supporting=tuple(
            _sentence(one, evidence, alpha, "for") for one in results if one.confirmed
        ),
        opposing=tuple(opposing),
        confirmed=confirmed,
        discriminating=tuple(
            axis for axis in confirmed if not _shared(axis, _outcome(step, axis), steps)
        ),
        required_confirmed=sum(one.standing == "confirmed" for one in required),
        required_testable=sum(one.testable for one in required),
        required_total=len(required),
        open_axes=_unique(
            axis for one in results if one.standing == "open" for axis in one.prediction.axes
        ),
    )


def _unique(axes: Iterable[str]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(axes))


def _status(results: Sequence[_Result], missing_arc: bool) -> Status:
    if missing_arc or any(one.falls for one in results):
        return "eliminated"
    if any(one.confirmed or one.against for one in results):
        return "stands"
    return "untested"


def _hold(prediction: Prediction, evidence: Evidence, alpha: float, strict: float) -> _Result:
    testable = [axis for axis in prediction.axes if is_testable(evidence.get(axis))]
    decided = {axis: evidence[axis].decision(alpha) for axis in testable}
    confirmed = tuple(axis for axis, found in decided.items() if found == prediction.outcome)
    against = tuple(
        axis for axis, found in decided.items() if found not in ("open", prediction.outcome)
    )
    beaten = bool(testable) and set(against) == set(testable)
    standing: Standing = "confirmed" if confirmed else "against" if beaten else "open"
    return _Result(
        prediction,
        standing,
        confirmed,
        against,
        bool(testable),
        prediction.required and beaten and falls(prediction, evidence, alpha, strict),
    )


def falls(prediction: Prediction, evidence: Evidence, alpha: float, strict: float) -> bool:
    """Return whether a requirement is decisively contradicted in all its testable parts.

    At alpha and at the `strict` level that eliminates: alpha over the number of requirements.
    """
    tested = False
    for axis in prediction.axes:
        finding = evidence.get(axis)
        if finding is None or not is_testable(finding):
            continue
        tested = True
        for level in (strict, alpha):
            if finding.decision(level) in ("open", prediction.outcome):
                return False
    return tested


def stands(
    step: Step, evidence: Evidence, absent: AbstractSet[str] = frozenset(), alpha: float = 0.05
) -> bool:
    """Return whether a step is not eliminated, looking at no more findings than it takes."""
    if step.needs_arc and step.needs_arc in absent:
        return False
    strict = alpha / max(1, len(step.required))
    return not any(falls(one, evidence, alpha, strict) for one in step.required)


def told_apart(step: Step, steps: Sequence[Step], evidence: Evidence, alpha: float) -> bool:
    """Return whether a prediction came true on which not all `steps` predict the same."""
    predictions = sorted(step.predictions, key=lambda one: not one.required)
    return any(
        not _shared(axis, one.outcome, steps)
        and is_testable(evidence.get(axis))
        and evidence[axis].decision(alpha) == one.outcome
        for one in predictions
        for axis in one.axes
    )


def _outcome(step: Step, axis: str) -> str | None:
    for prediction in step.predictions:
        if axis in prediction.axes:
            return prediction.outcome
    return None


def _shared(axis: str, outcome: str | None, steps: Sequence[Step]) -> bool:
    """Return whether every candidate predicts `outcome` on `axis`: then it tells none apart."""
    return all(_outcome(step, axis) == outcome for step in steps)


def _sentence(
    result: _Result,
    evidence: Evidence,
    alpha: float,
    side: Literal["for", "against"],
) -> str:
    axes = result.confirmed if side == "for" else result.against
    found = listed([_found(axis, evidence[axis], alpha) for axis in axes])
    prediction = result.prediction
    kind = "required" if prediction.required else "typical"
    wanted = f"{listed(list(prediction.axes), 'or')} {prediction.outcome}"
    if side == "for":
        return f"{found}; {kind}: {wanted}"
    ending = ""
    if prediction.required and not result.falls:
        ending = (
            ", but not at the stricter level that eliminates"
            if result.standing == "against"
            else ", but another part of the requirement is not against it"
        )
    return f"{found}; {kind}: {wanted}{ending}"


def _found(axis: str, finding: Decider, alpha: float) -> str:
    figure = numbers(axis, finding, alpha)
    return f"{axis} {finding.decision(alpha)}" + (f" ({figure})" if figure else "")
