"""Which open diagnostics can change the verdict.

An axis is open while its decision is, at the error probability that eliminates a step: a step
with r required predictions falls at alpha/r only. It can change the verdict when some answer
to it does, with the other open axes as they are or answered as well.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from collections.abc import Set as AbstractSet
from dataclasses import dataclass
from itertools import product
from typing import Final

from campaign.diagnosis.engine import Evidence, assess
from campaign.diagnosis.signatures import AXES, candidates
from campaign.diagnosis.verdict import Judged, judge
from campaign.diagnosis.wording import Decider, is_testable

ANSWERS: Final = ("responds", "unresponsive")

ALONE, TOGETHER, STRENGTH = range(3)
"""What an answer changes: the verdict; the verdict with other answers; its strength only."""


@dataclass(frozen=True)
class Answered:
    """A finding as it would read once decided, at any error probability."""

    word: str
    slope: None = None
    contrasts: tuple[()] = ()
    tested: bool = True

    def decision(self, alpha: float = 0.05) -> str:
        """Return the answer."""
        return self.word


@dataclass(frozen=True)
class Question:
    """One open diagnostic: axis, response, the error probability it has to be decided at.

    changes: ALONE, TOGETHER or STRENGTH. outcomes: the verdict each answer would lead to with
    all else as it is.
    """

    axis: str
    response: str
    alpha: float
    changes: int
    outcomes: Mapping[str, str]


def needed_alpha(response: str, axis: str, alpha: float) -> float:
    """Return the error probability at which `axis` eliminates every step that requires it."""
    strict = [
        alpha / len(step.required)
        for step in candidates(response)
        for prediction in step.required
        if axis in prediction.axes
    ]
    return min(strict, default=alpha)


def predicted(response: str) -> tuple[str, ...]:
    """Return the axes some candidate step of the response predicts something for."""
    steps = candidates(response)
    named = {axis for step in steps for one in step.predictions for axis in one.axes}
    return tuple(axis for axis in AXES if axis in named)


def open_axes(response: str, evidence: Evidence, alpha: float) -> tuple[str, ...]:
    """Return the axes that are predicted and not decided at the level they are needed at."""
    return tuple(
        axis
        for axis in predicted(response)
        if not is_testable(evidence.get(axis))
        or evidence[axis].decision(needed_alpha(response, axis, alpha)) == "open"
    )


def questions(
    judged: Judged, alpha: float, absent: AbstractSet[str] = frozenset()
) -> tuple[Question, ...]:
    """Return the open diagnostics that can change the verdict on one response."""
    unsettled = open_axes(judged.response, judged.evidence, alpha)
    if not unsettled:
        return ()
    verdicts = dict(_verdicts(judged, unsettled, alpha, absent))
    found = []
    for place, axis in enumerate(unsettled):
        changes = _changes(verdicts, place, len(unsettled))
        if changes is None:
            continue
        asked = {word: verdicts[_only(place, word, len(unsettled))][0] for word in ANSWERS}
        level = needed_alpha(judged.response, axis, alpha)
        found.append(Question(axis, judged.response, level, changes, asked))
    return tuple(found)


Key = tuple[str, ...]


def _only(place: int, word: str, n: int) -> Key:
    return tuple(word if i == place else "" for i in range(n))


def _verdicts(
    judged: Judged, unsettled: tuple[str, ...], alpha: float, absent: AbstractSet[str]
) -> Iterator[tuple[Key, tuple[str, str]]]:
    """Yield word and strength for every combination of answers ('' = left as it is)."""
    steps = candidates(judged.response)
    for answers in product(("", *ANSWERS), repeat=len(unsettled)):
        evidence: dict[str, Decider] = dict(judged.evidence)
        for axis, word in zip(unsettled, answers, strict=True):
            if word:
                evidence[axis] = Answered(word)
        weighed = assess(steps, evidence, absent=absent, alpha=alpha)
        verdict = judge(Judged(judged.response, evidence, weighed), alpha)
        yield answers, (verdict.word, verdict.strength or "")


def _changes(verdicts: Mapping[Key, tuple[str, str]], place: int, n: int) -> int | None:
    """Return what an answer on one axis changes at most, None for nothing."""
    now = verdicts[("",) * n]
    alone = [verdicts[_only(place, word, n)] for word in ANSWERS]
    if any(one[0] != now[0] for one in alone):
        return ALONE
    together = False
    for key, found in verdicts.items():
        if not key[place]:
            others = [verdicts[(*key[:place], word, *key[place + 1 :])] for word in ANSWERS]
            together |= any(one[0] != found[0] for one in others)
    if together:
        return TOGETHER
    return STRENGTH if any(one != now for one in alone) else None
