"""Inside which limits a cell may be proposed, and the cautions that go with it.

A declared limit holds; where none was declared, only the range already measured is proposed.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from campaign.chemistry.components import Recipe
from campaign.chemistry.species import Species
from campaign.diagnosis.next_cells import Condition, NewCell
from campaign.errors import RecipeError, Refused
from campaign.kinetics.constants import ZERO_CELSIUS_K
from campaign.ledger.readings import BoolArray, FloatArray, Snapshot

SLACK_K = 0.6
SLACK_V = 0.002
"""A set value may lie this far outside the measured ones: they scatter about it."""

EXACT = 1e-6
"""Rounding of a declared limit [K or V]."""

Span = tuple[float, float]
NOWHERE: Span = (math.inf, -math.inf)


@dataclass(frozen=True)
class Limits:
    """The limits of one electrode in a campaign."""

    snapshot: Snapshot
    electrode: str

    def temperatures(self, electrolyte: str) -> Span:
        """Return the temperatures [K] allowed for this electrode in this electrolyte."""
        r = self.snapshot.readings
        mine = _span(r.temperature_K, r.electrode == self.electrode)
        in_it = _span(r.temperature_K, r.electrolyte == electrolyte)
        facts = self.snapshot.electrodes.get(self.electrode)
        known = self.snapshot.electrolytes.get(electrolyte)
        high = facts.maximum_temperature_K if facts else None
        low_known = known.minimum_temperature_K if known else None
        high_known = known.maximum_temperature_K if known else None
        # an electrode has no least temperature: cold is limited by the electrolyte
        low = mine[0] if low_known is None else -math.inf
        return (
            max(low, in_it[0] if low_known is None else low_known),
            min(mine[1] if high is None else high, in_it[1] if high_known is None else high_known),
        )

    def potentials(self, reference: str) -> Span:
        """Return the potentials [V against `reference`] allowed for this electrode."""
        r = self.snapshot.readings
        measured = _span(
            r.potential_V, (r.electrode == self.electrode) & (r.reference == reference)
        )
        low, high = self._declared_potentials(reference)
        return (measured[0] if math.isinf(low) else low, measured[1] if math.isinf(high) else high)

    def allows(self, electrolyte: str, condition: Condition) -> bool:
        """Return whether a condition may be proposed.

        Declared limits hold exactly; measured ranges have the slack their readings scatter by.
        """
        T, E = condition.temperature_K, condition.potential_V
        if not _within(self.temperatures(electrolyte), T, SLACK_K):
            return False
        if not _within(self._declared_temperatures(electrolyte), T, EXACT):
            return False
        if not math.isfinite(E):
            return True
        if not _within(self.potentials(condition.reference), E, SLACK_V):
            return False
        return _within(self._declared_potentials(condition.reference), E, EXACT)

    def _declared_temperatures(self, electrolyte: str) -> Span:
        facts = self.snapshot.electrodes.get(self.electrode)
        known = self.snapshot.electrolytes.get(electrolyte)
        highs = [
            facts.maximum_temperature_K if facts else None,
            known.maximum_temperature_K if known else None,
        ]
        low = known.minimum_temperature_K if known else None
        return (
            -math.inf if low is None else low,
            min((one for one in highs if one is not None), default=math.inf),
        )

    def _declared_potentials(self, reference: str) -> Span:
        facts = self.snapshot.electrodes.get(self.electrode)
        if facts is None:
            return -math.inf, math.inf
        low = _converted(facts.window_low_V, facts.window_reference, reference)
        high = _converted(facts.window_high_V, facts.window_reference, reference)
        return (-math.inf if low is None else low, math.inf if high is None else high)


def _within(span: Span, value: float, slack: float) -> bool:
    return span[0] - slack <= value <= span[1] + slack


def _span(values: FloatArray, rows: BoolArray) -> Span:
    kept = values[np.asarray(rows, np.bool_) & np.isfinite(values)]
    return (float(kept.min()), float(kept.max())) if len(kept) else NOWHERE


def _converted(value: float | None, source: str, target: str) -> float | None:
    """Return a limit on another scale; None where none is declared or none is tabulated."""
    from campaign.chemistry.references import convert

    if value is None:
        return None
    if source == target or not source:
        return value
    try:
        return convert(value, source, target).value
    except Refused:
        return None


@lru_cache(maxsize=512)
def _recipe(text: str, extra: tuple[Species, ...]) -> Recipe | None:
    from campaign.chemistry.recipes import parse_recipe

    try:
        return parse_recipe(text, extra)
    except RecipeError:
        return None


def recipe_of(text: str, extra: Sequence[Species] = ()) -> Recipe | None:
    """Return the recipe of a canonical text, None where it cannot be read."""
    return _recipe(text, tuple(extra))


def cautions_of(cells: Iterable[NewCell], extra: Sequence[Species] = ()) -> tuple[str, ...]:
    """Return the cautions of a set of cells, those of heat first, who decides last."""
    from campaign.chemistry.cautions import METALS
    from campaign.chemistry.species import cautions, find

    names: dict[str, None] = {}
    hot: dict[str, None] = {}
    for cell in dict.fromkeys(cells):
        recipe = recipe_of(cell.electrolyte, extra)
        warmest = max(one.temperature_K for one in cell.conditions) - ZERO_CELSIUS_K
        for part in recipe.components if recipe else ():
            names[part.species] = None
            species = find(part.species, extra)
            if species is None or species.flash_point is None or warmest < species.flash_point:
                continue
            hot[
                f"{species.name}: {warmest:.3g} degC is at or above its flash point of "
                f"{species.flash_point:g} degC ({species.flash_source or 'as recorded'})."
            ] = None
        # a reference of an alkali metal means metal in the cell, the counter electrode too
        for condition in cell.conditions:
            if condition.reference.split("/")[0] in METALS:
                names[condition.reference] = None
    return (*hot, *cautions(names, extra))
