"""From the steps that still stand to one of six words, and how firmly it is meant."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from collections.abc import Set as AbstractSet
from dataclasses import dataclass, replace
from typing import Final, Literal

from campaign.diagnosis.engine import Assessment, Evidence, stands, told_apart
from campaign.diagnosis.signatures import CONTRADICTIONS, UNEXPLAINED, WANTED, candidates
from campaign.diagnosis.wording import is_testable, listed, numbers, why_open

Word = Literal["ion transport", "electron transfer", "host", "mixed", "conflicting", "undetermined"]
Strength = Literal["strong", "moderate", "weak"]

WORDS: Final[tuple[Word, ...]] = (
    "ion transport", "electron transfer", "host", "mixed", "conflicting", "undetermined",
)  # fmt: skip
GRADES: Final[tuple[Strength, ...]] = ("weak", "moderate", "strong")


@dataclass(frozen=True)
class Verdict:
    """One of the six words and its strength (None for undetermined and conflicting).

    because: what carries it; missing: what to measure next; warnings: what limits it.
    """

    word: Word
    strength: Strength | None
    because: tuple[str, ...] = ()
    missing: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()

    @property
    def text(self) -> str:
        """The verdict for a person; a weak one 'leans to' its control."""
        if self.strength is None:
            return self.word
        return f"leans to {self.word}" if self.strength == "weak" else self.word


@dataclass(frozen=True)
class Judged:
    """The candidates of one response held against its findings."""

    response: str
    evidence: Evidence
    assessments: tuple[Assessment, ...]


def judge(judged: Judged, alpha: float = 0.05) -> Verdict:
    """Return the verdict of one response, graded by its predictions alone.

    `strong` is provisional: `limit` tests it against removals, confounding and cells.
    """
    survivors = [one for one in judged.assessments if one.status != "eliminated"]
    if not judged.assessments:
        return Verdict("undetermined", None, missing=("no candidate step is known for this term",))
    if not survivors:
        return Verdict(
            "conflicting",
            None,
            because=("every candidate step is contradicted by a required prediction",),
            missing=_explanations(judged, alpha),
        )
    controls = {one.step.control for one in survivors}
    settled = any(one.discriminating for one in survivors)
    if settled and len(controls) == 1:
        best = max(survivors, key=_merit)
        strength = _grade(best)
        missing = () if strength == "strong" else _missing(judged, survivors, alpha)
        return Verdict(best.step.control, strength, _because(best), missing)
    if settled and controls == {"ion transport", "mixed"}:
        return _not_excluded(judged, survivors, alpha)
    left = listed([one.step.name for one in survivors])
    return Verdict(
        "undetermined",
        None,
        because=(
            f"still possible: {left}"
            if len(survivors) > 1
            else f"only {left} is left, but nothing that tells it from the others is confirmed",
        ),
        missing=_missing(judged, survivors, alpha),
    )


def word_alone(
    response: str,
    evidence: Evidence,
    *,
    absent: AbstractSet[str] = frozenset(),
    alpha: float = 0.05,
) -> Word:
    """Return the word `judge` gives, looking at no more findings than it takes."""
    steps = candidates(response)
    survivors = [one for one in steps if stands(one, evidence, absent, alpha)]
    if not steps:
        return "undetermined"
    if not survivors:
        return "conflicting"
    controls = {one.control for one in survivors}
    if len(controls) > 1 and controls != {"ion transport", "mixed"}:
        return "undetermined"
    if not any(told_apart(one, steps, evidence, alpha) for one in survivors):
        return "undetermined"
    return survivors[0].control if len(controls) == 1 else "ion transport"


def _merit(one: Assessment) -> tuple[int, int]:
    return (one.required_confirmed, len(one.discriminating))


def _because(one: Assessment) -> tuple[str, ...]:
    return (one.step.name, *one.supporting)


def _grade(one: Assessment) -> Strength:
    if one.required_confirmed == one.required_total and len(one.discriminating) >= 2:
        return "strong"
    if one.required_confirmed == one.required_testable and one.required_confirmed >= 1:
        return "moderate"
    return "weak"


def _not_excluded(judged: Judged, survivors: Sequence[Assessment], alpha: float) -> Verdict:
    """Ion transport and mixed are both left: ion transport, weak."""
    ion = max((one for one in survivors if one.step.control == "ion transport"), key=_merit)
    mixed = [one for one in survivors if one.step.control == "mixed"]
    tests = _unique(
        axis
        for one in mixed
        for prediction in one.step.required
        for axis in prediction.axes
        if axis in one.open_axes
    )
    name = listed([one.step.name for one in mixed])
    return Verdict(
        "ion transport",
        "weak",
        because=_because(ion),
        missing=(
            f"{name} is not excluded",
            *(_wish(axis, judged.evidence, alpha) for axis in tests),
        ),
    )


def _missing(judged: Judged, survivors: Sequence[Assessment], alpha: float) -> tuple[str, ...]:
    """Return wishes for the open axes of survivors, required predictions first."""
    required = [
        axis
        for one in survivors
        for prediction in one.step.required
        for axis in prediction.axes
        if axis in one.open_axes
    ]
    others = [axis for one in survivors for axis in one.open_axes]
    wanted = _unique(required) or _unique(others)
    return tuple(_wish(axis, judged.evidence, alpha) for axis in wanted)


def _wish(axis: str, evidence: Evidence, alpha: float) -> str:
    finding = evidence.get(axis)
    if not is_testable(finding):
        return f"{axis} not tested: measure {WANTED[axis]}"
    reason = why_open(finding)
    if reason:
        return f"{axis} open: {reason}"
    figure = numbers(axis, finding, alpha)
    return f"{axis} open" + (f" ({figure})" if figure else "") + ": more cells decide it"


def _explanations(judged: Judged, alpha: float) -> tuple[str, ...]:
    decided = {axis: finding.decision(alpha) for axis, finding in judged.evidence.items()}
    fitting = tuple(
        one.reading
        for one in CONTRADICTIONS
        if judged.response in one.seen_in
        and all(decided.get(axis) in outcomes for axis, outcomes in one.when)
    )
    return fitting or (UNEXPLAINED,)


def _unique(axes: Iterable[str]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(axes))


def agree(verdicts: Mapping[str, Verdict]) -> Verdict:
    """Return the verdict of terms none of which is shown to dominate, largest first.

    Where all lead to one control, that control with the least of their strengths;
    otherwise undetermined.
    """
    first, *others = verdicts.values()
    if not others:
        return first
    words = {one.word for one in verdicts.values()}
    strengths = [one.strength for one in verdicts.values() if one.strength is not None]
    terms = listed(list(verdicts))
    if len(words) == 1 and len(strengths) == len(verdicts):
        return replace(
            first,
            strength=min(strengths, key=GRADES.index),
            because=(f"{terms} are not told apart in size, but all lead to it", *first.because),
        )
    named = listed([f"{term}: {one.text}" for term, one in verdicts.items()])
    differ = f"they differ ({named})" if len(words) > 1 else f"each alone is {first.text}"
    return Verdict(
        "undetermined",
        None,
        because=(f"which of {terms} is the largest is not settled, and {differ}",),
        missing=(
            f"more cells at the reference condition, to settle which of {terms} is the largest",
            *_missing_of_terms(verdicts),
        ),
    )


def _missing_of_terms(verdicts: Mapping[str, Verdict]) -> tuple[str, ...]:
    """Return what is missing, each once; with its term where not all terms miss it."""
    terms: dict[str, list[str]] = {}
    for term, one in verdicts.items():
        for text in one.missing:
            terms.setdefault(text, []).append(term)
    return tuple(
        text if len(of) == len(verdicts) else f"{listed(of)}: {text}" for text, of in terms.items()
    )


def confounded_axes(judged: Judged, alpha: float = 0.05) -> tuple[str, ...]:
    """Return the axes that a verdict on this response rests on and that are confounded."""
    used = {axis for one in judged.assessments for p in one.step.predictions for axis in p.axes}
    return tuple(
        axis
        for axis, finding in judged.evidence.items()
        if axis in used
        and bool(getattr(finding, "confounded", False))
        and finding.decision(alpha) != "open"
    )


def limit(
    verdict: Verdict,
    *,
    confounded: Sequence[str] = (),
    two_electrode: bool = False,
    failed_checks: Sequence[str] = (),
    specimens: Sequence[str] = (),
    without: Callable[[str], str] | None = None,
) -> Verdict:
    """Return the verdict with its strength lowered by everything that limits it.

    without: gives the verdict's word with one specimen left out; asked only where all else
    says strong; None skips that test. One specimen cannot be strong: nothing would be left.
    """
    if verdict.strength is None:
        return verdict
    if two_electrode:
        note = (
            "two-electrode cells: the counter electrode's impedance is contained in the "
            "results, the verdict is at most weak"
        )
        return replace(verdict, strength="weak", warnings=(*verdict.warnings, note))
    if verdict.strength == "strong":
        verdict = _tested(verdict, confounded, specimens, without)
    if failed_checks and verdict.strength is not None:
        lower = GRADES[max(0, GRADES.index(verdict.strength) - 1)]
        note = f"failed assignment checks lower the strength: {listed(list(failed_checks))}"
        verdict = replace(verdict, strength=lower, warnings=(*verdict.warnings, note))
    return verdict


def _tested(
    verdict: Verdict,
    confounded: Sequence[str],
    specimens: Sequence[str],
    without: Callable[[str], str] | None,
) -> Verdict:
    if confounded:
        axes = listed(list(confounded))
        note = f"confounded with age, date or batch: {axes}; not strong"
        wish = f"further cells in random order: so far {axes} and age, date or batch run together"
        return replace(
            verdict,
            strength="moderate",
            warnings=(*verdict.warnings, note),
            missing=(*verdict.missing, wish),
        )
    if without is None:
        return verdict
    if len(specimens) < 2:
        return _hangs(verdict, "one specimen carries everything; not strong")
    for specimen in specimens:
        word = without(specimen)
        if word != verdict.word:
            return _hangs(verdict, f"without specimen {specimen} the verdict is {word}; not strong")
    return verdict


def _hangs(verdict: Verdict, note: str) -> Verdict:
    return replace(
        verdict,
        strength="moderate",
        warnings=(*verdict.warnings, note),
        missing=(*verdict.missing, "more specimens, so that the verdict hangs on none of them"),
    )
