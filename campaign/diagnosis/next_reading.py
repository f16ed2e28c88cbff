"""From the ledger to proposals: one read transaction, one snapshot, one answer."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict, dataclass, replace
from typing import TYPE_CHECKING, Any

from campaign.diagnosis.next_proposals import (
    CHANCE,
    LARGEST,
    AFFORDABLE_h,
    Plan,
    Planned,
    Proposal,
    propose,
    ranked,
    within_budget,
)
from campaign.diagnosis.signatures import AXES
from campaign.errors import refused
from campaign.ledger.readings import Snapshot

if TYPE_CHECKING:
    from campaign.trends.reading import FilterSource

AXIS_NAMES = (*AXES, LARGEST)
LARGEST_BUDGET_h = 10_000.0


@dataclass(frozen=True)
class Asked:
    """What is asked of `next`: a budget [h], one axis, the chance to reach, the seed."""

    hours: float | None = None
    axis: str | None = None
    chance: float = CHANCE
    seed: int = 1


@dataclass(frozen=True)
class Answer:
    """Proposals in rank order, the electrodes they are of, and what they were made with."""

    asked: Asked
    plan: Plan
    planned: tuple[Planned, ...]
    proposals: tuple[Proposal, ...]
    snapshot: Snapshot

    def as_dict(self) -> dict[str, Any]:
        """Return the answer with the keys of the fixed interface, and a few more."""
        return {
            "rows": [one.as_dict() for one in self.proposals],
            "electrodes": [
                {"electrode": one.electrode, "verdict": one.verdict, "strength": one.strength,
                 "proposals": len(one.proposals)}
                for one in self.planned
            ],
            "costs": asdict(self.plan.costs),
            "chance_asked": self.plan.chance,
            "affordable_hours": self.plan.affordable_h,
            "hours_together": sum(one.hours or 0.0 for one in self.proposals),
            "seed": self.asked.seed,
        }  # fmt: skip


def check(asked: Asked) -> None:
    """Raise Refused for a budget, axis, chance or seed that means nothing."""
    if asked.hours is not None and not 0 < asked.hours <= LARGEST_BUDGET_h:
        raise refused(
            f"--hours is {asked.hours:g}; write bench hours above 0 up to {LARGEST_BUDGET_h:g}",
            column="hours", value=asked.hours, expected=f"above 0 up to {LARGEST_BUDGET_h:g}",
        )  # fmt: skip
    if not 0.5 <= asked.chance <= 0.99:
        raise refused(
            f"--chance is {asked.chance:g}; write a chance from 0.5 to 0.99",
            column="chance", value=asked.chance, expected="from 0.5 to 0.99",
        )  # fmt: skip
    if asked.axis is not None and asked.axis not in AXIS_NAMES:
        raise refused(
            f"there is no axis '{asked.axis}'; write one of {', '.join(AXIS_NAMES)}",
            column="axis", value=asked.axis, expected="one of " + ", ".join(AXIS_NAMES),
        )  # fmt: skip
    if not 0 <= asked.seed < 2**32:
        raise refused(
            f"--seed is {asked.seed}; write a whole number from 0 to 4294967295",
            column="seed", value=asked.seed, expected="from 0 to 4294967295",
        )  # fmt: skip


def next_steps(
    db: str | None,
    wanted: FilterSource | None,
    asked: Asked,
    electrodes: Sequence[str] | None = None,
) -> Answer:
    """Return what to build and measure next.

    The scatter and the recipes of the whole campaign count, whatever `electrodes` are asked
    for. Raises Refused for what means nothing or is not there.
    """
    from campaign.ledger.book import stored_species
    from campaign.ledger.costs import read_costs
    from campaign.ledger.database import open_database
    from campaign.ledger.filters import Filter
    from campaign.ledger.settings import criteria as stored_criteria
    from campaign.ledger.snapshot import snapshot as taken_at

    check(asked)
    with open_database(db).reading() as connection:
        filtered = wanted(connection) if wanted is not None else Filter()
        taken = taken_at(connection, replace(filtered, electrode=None))
        criteria = stored_criteria(connection, filtered.as_of)
        costs = read_costs(connection, filtered.as_of)
        species = stored_species(connection)
    affordable = AFFORDABLE_h if asked.hours is None else asked.hours
    plan = Plan(costs, asked.chance, affordable, seed=asked.seed, species=species)
    axes = None if asked.axis is None else [asked.axis]
    planned = propose(taken, criteria, plan, electrodes=electrodes, axes=axes)
    proposals = ranked([one for each in planned for one in each.proposals])
    if asked.hours is not None:
        proposals = within_budget(proposals, asked.hours)
    return Answer(asked, plan, tuple(planned), tuple(proposals), taken)
