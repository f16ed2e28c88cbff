"""What to build and measure next: the least bench work for every open diagnostic that matters."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np

from campaign.chemistry.species import Species
from campaign.diagnosis.budget import RESPONSE_OF
from campaign.diagnosis.lazy import trend_evidence
from campaign.diagnosis.next_axes import Scene, Unplannable, layout, scene
from campaign.diagnosis.next_cells import NewCell, as_dicts, described, hours_of
from campaign.diagnosis.next_layouts import Layout
from campaign.diagnosis.next_limits import cautions_of
from campaign.diagnosis.next_power import DRAWS, SEED, Outlook, falls_to, outlook
from campaign.diagnosis.next_questions import (
    ALONE,
    STRENGTH,
    Question,
    questions,
)
from campaign.diagnosis.next_sets import MOST_CELLS, sequences, sizes
from campaign.diagnosis.next_within import age_layout, largest_layout, potential_layout
from campaign.diagnosis.summary import (
    Outcome,
    absent_responses,
    of_electrode,
    settle,
)
from campaign.diagnosis.verdict import Judged
from campaign.diagnosis.wording import exponential
from campaign.ledger.costs import Costs
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends.findings import Finding
from campaign.trends.results import plain
from campaign.trends.sample import Sample, draw, source

CHANCE = 0.8
"""The chance of a decision a proposal is made for."""

AFFORDABLE_h = 120.0
"""Bench hours a single proposal may take unless a budget says otherwise [h]."""

LEAST_CHANCE = 0.3
"""Work with less chance than this is not worth filling a budget with."""

LEFT_OPEN = 0.4
"""What an answer counts that leaves the verdict open, beside one that settles it [1]."""

UNDETERMINED = "undetermined"

LARGEST = "largest term"
"""The axis name under which more cells at the reference condition are proposed."""


@dataclass(frozen=True)
class Plan:
    """How proposals are to be made.

    chance: of a decision, to be reached at least. affordable_h [h]: of one proposal.
    """

    costs: Costs = field(default_factory=Costs)
    chance: float = CHANCE
    affordable_h: float = AFFORDABLE_h
    draws: int = DRAWS
    seed: int = SEED
    species: tuple[Species, ...] = ()


@dataclass(frozen=True)
class Option:
    """A set of new cells: bench hours [h], chance of a decision and of `responds` [1].

    promise: chance of an answer that settles the verdict, and LEFT_OPEN times that of another.
    """

    hours: float
    chance: float
    responds: float
    promise: float
    cells: tuple[NewCell, ...]

    @property
    def price(self) -> float:
        """Return the bench hours for each promised answer [h]."""
        return self.hours / self.promise if self.promise > 1e-3 else math.inf


@dataclass(frozen=True)
class Proposal:
    """One line of `next`: cells that decide one axis of one response, and what they promise.

    settles: the chance asked for is reached at an affordable cost. changes: ALONE, TOGETHER
    or STRENGTH. price: bench hours for each answer to be expected. frontier: every affordable
    set considered, cheapest first.
    """

    electrode: str
    axis: str
    response: str
    cells: tuple[NewCell, ...]
    hours: float | None
    interval_now: tuple[float, float] | None
    interval_expected: tuple[float, float] | None
    chance: float | None
    responds: float | None
    settles: bool
    changes: int
    alpha: float
    why: str
    cautions: tuple[str, ...] = ()
    outcomes: Mapping[str, str] = field(default_factory=dict)
    between: tuple[str, str] | None = None
    unit: str = ""
    assumed: tuple[str, ...] = ()
    price: float = math.inf
    frontier: tuple[Option, ...] = ()

    def as_dict(self) -> dict[str, Any]:
        """Return the proposal with the keys of the fixed interface, and a few more."""
        row: dict[str, Any] = plain(
            {
                "electrode": self.electrode,
                "axis": self.axis,
                "response": self.response,
                "add": as_dicts(self.cells),
                "specimens": len(self.cells),
                "hours": self.hours,
                "interval_now": self.interval_now,
                "interval_expected": self.interval_expected,
                "interval_of": self.unit,
                "between": list(self.between) if self.between else None,
                "chance": self.chance,
                "chance_responds": self.responds,
                "error_probability": self.alpha,
                "settles": self.settles,
                "changes": ("verdict", "verdict with other answers", "strength")[self.changes],
                "outcomes": dict(self.outcomes),
                "why": self.why,
                "assumed": list(self.assumed),
                "cautions": list(self.cautions),
            }
        )
        return row


@dataclass(frozen=True)
class Planned:
    """One electrode: its verdict as it stands, and a proposal for every open question."""

    electrode: str
    verdict: str
    strength: str | None
    proposals: tuple[Proposal, ...]


def propose(
    snapshot: Snapshot,
    criteria: Criteria,
    plan: Plan | None = None,
    *,
    electrodes: Sequence[str] | None = None,
    axes: Sequence[str] | None = None,
) -> list[Planned]:
    """Return the proposals of every electrode, in alphabetical order; `ranked` puts them in one.

    electrodes, axes: only these.
    """
    how = plan or Plan()
    labels = sorted(set(snapshot.readings.electrode.tolist()))
    return [
        of_one(snapshot, criteria, label, how, axes)
        for label in labels
        if electrodes is None or label in electrodes
    ]


def ranked(proposals: Sequence[Proposal]) -> list[Proposal]:
    """Return proposals best first: by the bench hours for each answer to be expected.

    An answer that leaves the verdict open counts LEFT_OPEN; what only changes the strength of a
    verdict comes after everything else.
    """
    return sorted(proposals, key=lambda one: (one.changes == STRENGTH, one.price, one.axis))


def of_one(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    plan: Plan,
    axes: Sequence[str] | None = None,
    outcome: Outcome | None = None,
) -> Planned:
    """Return the proposals of one electrode, one a question; none where the verdict is strong.

    outcome: of `settle`, where it is at hand.
    """
    if outcome is None:
        part = of_electrode(snapshot, electrode)
        outcome = settle(part, criteria, electrode, trend_evidence)
    verdict = outcome.verdict
    found: list[Proposal] = []
    if verdict.strength != "strong":
        for judged in outcome.judged.values():
            found += _of_term(snapshot, criteria, electrode, outcome, judged, plan, axes)
        if axes is None or LARGEST in axes:
            found += _largest(snapshot, criteria, electrode, outcome, plan)
    return Planned(electrode, verdict.word, verdict.strength, tuple(ranked(found)))


def _of_term(
    snapshot: Snapshot, criteria: Criteria, electrode: str, outcome: Outcome, judged: Judged,
    plan: Plan, axes: Sequence[str] | None,
) -> list[Proposal]:  # fmt: skip
    part = of_electrode(snapshot, electrode)
    absent = absent_responses(part.readings, outcome.budget)
    asked = [
        one
        for one in questions(judged, criteria.error_probability, absent)
        if axes is None or one.axis in axes
    ]
    if not asked:
        return []
    peers = [one for one in sorted(set(snapshot.readings.electrode.tolist())) if one != electrode]
    others = [_drawn(snapshot, criteria, peer, judged.response) for peer in peers]
    whole = _drawn(snapshot, criteria, electrode, judged.response)
    where = scene(snapshot, criteria, electrode, whole, others)
    found = []
    for one in asked:
        finding = judged.evidence[one.axis]
        assert isinstance(finding, Finding)
        found.append(_proposal(where, one, finding, plan))
    return found


def _drawn(snapshot: Snapshot, criteria: Criteria, electrode: str, response: str) -> Sample:
    part = of_electrode(snapshot, electrode)
    return draw(part, source(part, criteria, electrode), response)


def _largest(
    snapshot: Snapshot, criteria: Criteria, electrode: str, outcome: Outcome, plan: Plan
) -> list[Proposal]:
    weighed = outcome.budget
    if weighed is None or not weighed.rivals or outcome.verdict.word != "undetermined":
        return []
    response = RESPONSE_OF[weighed.dominant]
    where = scene(
        snapshot, criteria, electrode, _drawn(snapshot, criteria, electrode, response)
    )
    asked = Question(LARGEST, response, criteria.error_probability, ALONE, {})
    try:
        made = largest_layout(where, weighed, criteria.error_probability)
    except Unplannable as reason:
        return [_without(where, asked, str(reason))]
    return [_best(where, asked, made, plan)]


def _proposal(where: Scene, asked: Question, finding: Finding, plan: Plan) -> Proposal:
    """Return the proposal for one question: existing levels first, then new ones."""
    try:
        if asked.axis == "potential":
            made = potential_layout(where, finding, asked.alpha)
        elif asked.axis == "age":
            made = age_layout(where, finding, asked.alpha)
        else:
            made = layout(where, asked.axis, finding, asked.alpha, new=False)
    except Unplannable as reason:
        return _without(where, asked, str(reason))
    best = _best(where, asked, made, plan)
    if best.settles or asked.axis in ("potential", "age") or not finding.tested:
        return best
    try:
        wider = layout(where, asked.axis, finding, asked.alpha, new=True)
    except Unplannable:
        return best
    if len(wider.slots) == len(made.slots):
        return best
    other = _best(where, asked, wider, plan)
    return other if (not other.settles, other.price) < (not best.settles, best.price) else best


def _without(where: Scene, asked: Question, why: str) -> Proposal:
    """Return a line that says why nothing can be proposed."""
    return Proposal(
        where.electrode, asked.axis, asked.response, (), None, None, None, None, None,
        settles=False, changes=asked.changes, alpha=asked.alpha,
        why=f"nothing to propose: {why}", outcomes=asked.outcomes,
    )  # fmt: skip


@dataclass(frozen=True)
class _Tried:
    slots: tuple[int, ...]
    option: Option
    outlook: Outlook


def _best(where: Scene, asked: Question, made: Layout, plan: Plan) -> Proposal:
    """Return the cheapest set that reaches the chance, else the one that promises most an hour."""
    pool = _tried(made, asked, plan)
    within = [one for one in pool if one.option.hours <= plan.affordable_h + 1e-9]
    enough = [one for one in within if one.outlook.chance >= plan.chance]
    if enough:
        chosen = min(enough, key=lambda one: (one.option.hours, -one.outlook.chance))
        return _told(where, asked, made, chosen, plan, within, "")
    chosen = min(within or pool[:1], key=lambda one: (one.option.price, one.option.hours))
    return _told(where, asked, made, chosen, plan, within, _shortfall(made, pool, within, plan))


def _tried(made: Layout, asked: Question, plan: Plan) -> list[_Tried]:
    """Return the outlook of growing sets until one is sure enough, or too large."""
    found = []
    for sequence in sequences(made):
        for n in sizes(MOST_CELLS):
            slots = sequence[:n]
            cells = tuple(made.slots[one].cell for one in slots)
            hours = round(hours_of(cells, plan.costs), 6)
            seen = outlook(
                made.problem, slots, draws=plan.draws, seed=plan.seed, show=made.show
            )
            promise = _promise(asked, seen)
            option = Option(hours, seen.chance, seen.responds, promise, cells)
            found.append(_Tried(slots, option, seen))
            if seen.chance >= max(plan.chance, 0.5) or hours > 4 * plan.affordable_h:
                break
    return found


def _promise(asked: Question, seen: Outlook) -> float:
    """Return what a set promises: an answer that settles the verdict counts fully."""
    if not asked.outcomes:
        return seen.chance
    parts = (("responds", seen.responds), ("unresponsive", seen.unresponsive))
    return sum(
        chance * (LEFT_OPEN if asked.outcomes.get(word) == UNDETERMINED else 1.0)
        for word, chance in parts
    )


def _shortfall(
    made: Layout, pool: Sequence[_Tried], within: Sequence[_Tried], plan: Plan
) -> str:
    """Return by how much scatter or cost would have to fall, in a sentence."""
    most = max(within or pool[:1], key=lambda one: one.outlook.chance)
    parts = []
    if most.option.hours <= plan.affordable_h:
        parts.append(
            f"{len(most.option.cells)} cells ({most.option.hours:.3g} h) reach "
            f"{most.outlook.chance:.2f}"
        )
    dearer = [one.option for one in pool if one.outlook.chance >= plan.chance]
    if dearer:
        cheapest = min(dearer, key=lambda one: one.hours)
        parts.append(
            f"{len(cheapest.cells)} cells would do at {cheapest.hours:.0f} h, so the cost of a "
            f"cell would have to fall to {plan.affordable_h / cheapest.hours:.0%}"
        )
    factor = falls_to(made.problem, most.slots, plan.chance, draws=500, seed=plan.seed)
    if factor is not None and factor < 1:
        now = math.sqrt(made.problem.scatter.typical)
        parts.append(
            f"or the scatter between cells from {_scatter(now, made.unit)} to "
            f"{_scatter(now * factor, made.unit)}"
            if dearer
            else f"the scatter between cells would have to fall from {_scatter(now, made.unit)} "
            f"to {_scatter(now * factor, made.unit)}"
        )
    elif factor is None:
        parts.append("less scatter alone would not do: the estimate lies at a margin")
    limit = f"no work of up to {plan.affordable_h:g} h reaches {plan.chance:g}"
    return f"{limit}: " + ", ".join(parts)


def _scatter(value: float, unit: str) -> str:
    return f"{value:.2g} kJ/mol" if unit == "kJ/mol" else f"{100 * value:.2g} %"


def _told(
    where: Scene, asked: Question, made: Layout, chosen: _Tried, plan: Plan,
    tried: Sequence[_Tried], shortfall: str,
) -> Proposal:  # fmt: skip
    e, seen, option = made.shown_now, chosen.outlook, chosen.option
    level = 1 - where.criteria.error_probability
    now = None if e is None else _shown(e.interval(level), made.unit)
    expected = _expected(made, seen, asked.alpha, level)
    return Proposal(
        electrode=where.electrode,
        axis=asked.axis,
        response=asked.response,
        cells=option.cells,
        hours=option.hours,
        interval_now=now,
        interval_expected=expected,
        chance=seen.chance,
        responds=seen.responds,
        settles=not shortfall,
        changes=asked.changes,
        alpha=asked.alpha,
        why=_why(asked, made, option, now, expected, shortfall),
        cautions=cautions_of(option.cells, plan.species),
        outcomes=asked.outcomes,
        between=made.between,
        unit=made.unit,
        assumed=made.assumed,
        price=option.price,
        frontier=tuple(sorted((one.option for one in tried), key=lambda one: one.hours)),
    )


def _expected(
    made: Layout, seen: Outlook, alpha: float, level: float
) -> tuple[float, float] | None:
    """Return the interval expected about the present estimate, at the level it is told at."""
    from scipy.special import stdtrit

    e = made.shown_now
    if e is None or not math.isfinite(seen.half_width) or seen.df <= 0:
        return None
    ratio = stdtrit(seen.df, 0.5 + level / 2) / stdtrit(seen.df, 1 - alpha / 2)
    half = seen.half_width * float(ratio)
    return _shown((e.value - half, e.value + half), made.unit)


def _shown(interval: tuple[float, float] | None, unit: str) -> tuple[float, float] | None:
    if interval is None or unit != "factor":
        return interval
    return exponential(interval[0]), exponential(interval[1])


_OF = {"order": "the order", "factor": "the factor", "kJ/mol": "the difference of barriers",
       "share": "the difference of shares"}  # fmt: skip


def _why(
    asked: Question, made: Layout, option: Option, now: tuple[float, float] | None,
    expected: tuple[float, float] | None, shortfall: str,
) -> str:  # fmt: skip
    pair = f" {made.between[0]} against {made.between[1]}" if made.between else ""
    what = _OF[made.unit] + pair
    unit = " kJ/mol" if made.unit == "kJ/mol" else ""
    if made.shown_now is None:
        moved = f"first measure of {asked.axis}"
    else:
        start = "none" if now is None else _range(now)
        moved = f"interval of {what} from {start} to about {_range(expected)}{unit}"
    text = (
        f"{described(option.cells)}: {moved}; decides with chance {option.chance:.2f}; "
        f"{option.hours:.3g} h"
    )
    return f"{text}; {shortfall}" if shortfall else text


def _range(interval: tuple[float, float] | None) -> str:
    if interval is None:
        return "none"
    low, high = interval
    width = high - low
    digits = max(0, min(4, 1 - math.floor(math.log10(width)))) if 0 < width < math.inf else 2
    if not np.isfinite([low, high]).all() or high >= 1e4:
        return f"{low:.2g} to {high:.2g}"
    return f"{low:.{digits}f} to {high:.{digits}f}"


def within_budget(proposals: Sequence[Proposal], hours: float) -> list[Proposal]:
    """Return the set of proposals, at most one size each, that promises most inside `hours`.

    Promises are added, those that change a strength only for a fraction. Solved exactly over
    half hours.
    """
    steps = math.floor(hours * 2 + 1e-9)
    best: list[tuple[float, tuple[tuple[int, int], ...]]] = [(0.0, ())] * (steps + 1)
    for place, one in enumerate(proposals):
        grown = list(best)
        for size, option in enumerate(one.frontier):
            if option.chance < LEAST_CHANCE:
                continue
            cost, value = math.ceil(option.hours * 2 - 1e-9), worth(one, option)
            for spent in range(cost, steps + 1):
                before = best[spent - cost]
                if before[0] + value > grown[spent][0] + 1e-12:
                    grown[spent] = (before[0] + value, (*before[1], (place, size)))
        best = grown
    chosen = [_resized(proposals[place], size, hours) for place, size in best[steps][1]]
    return ranked(chosen)


def worth(one: Proposal, option: Option) -> float:
    """Return what a set of a proposal is worth in a budget."""
    return option.promise * (LEFT_OPEN if one.changes == STRENGTH else 1.0)


def _resized(one: Proposal, size: int, hours: float) -> Proposal:
    """Return the proposal with another of its sets."""
    option = one.frontier[size]
    if option.cells == one.cells:
        return one
    why = (
        f"{described(option.cells)}: what pays best inside {hours:g} h; decides with chance "
        f"{option.chance:.2f}; {option.hours:.3g} h"
    )
    return replace(
        one, cells=option.cells, hours=option.hours, chance=option.chance, why=why,
        settles=False, responds=option.responds, price=option.price, interval_expected=None,
    )  # fmt: skip
