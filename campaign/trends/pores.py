"""Porous electrodes: R_ct is solved from the apparent value before any trend.

R_app = sqrt(R_ion R_ct) coth(sqrt(R_ion/R_ct)) (kinetics.porous). The recorded pore
resistance R_ion is scaled by the conductivity tables of the electrolytes to the
electrolyte and temperature of each reading, R_ion ~ 1/conductivity.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from campaign.kinetics import porous
from campaign.ledger.readings import (
    BoolArray,
    ElectrodeFacts,
    ElectrolyteFacts,
    FloatArray,
    Readings,
)

DOMINANT = 0.3
"""R_ion above this share of R_ct matters when it cannot be scaled."""

OPEN_BECAUSE = "pore resistance not scalable"

_SAME_TEMPERATURE_K = 1.0


@dataclass(frozen=True)
class Solved:
    """R_ct `value` [ohm cm2] and `sensitivity` d ln R_ct/d ln R_app [1] of n readings."""

    value: FloatArray
    sensitivity: FloatArray
    warnings: tuple[str, ...]
    open_because: str | None


@dataclass(frozen=True)
class Pores:
    """The recorded pore resistance of an electrode and the electrolytes that scale it."""

    facts: ElectrodeFacts
    electrolytes: Mapping[str, ElectrolyteFacts]

    def solve(self, readings: Readings, apparent: FloatArray) -> Solved:
        """Return R_ct solved from the `apparent` value [ohm cm2] of each reading.

        Where R_ion cannot be scaled the recorded value is used and said; above 0.3 R_ct
        the concentration and barrier decisions are then open.
        """
        recorded = self.facts.pore_resistance_ohm_cm2 or 0.0
        factor, scaled = self.scale(readings)
        pore = recorded * factor
        value = porous.charge_transfer_from_apparent(apparent, pore)
        known = np.isfinite(value)
        sensitivity = np.full(len(apparent), np.nan)
        sensitivity[known] = 1.0 / porous.sensitivity(value[known], pore[known])
        ratio = np.full(len(apparent), 0.0)
        ratio[known] = pore[known] / value[known]
        return Solved(value, sensitivity, *_said(known, scaled, ratio))

    def scale(self, readings: Readings) -> tuple[FloatArray, BoolArray]:
        """Return R_ion relative to the recorded one [1], and where that could be scaled."""
        keys = list(zip(readings.electrolyte, readings.temperature_K.tolist(), strict=True))
        distinct = {key: self._factor(*key) for key in set(keys)}
        factors = np.array([distinct[key] for key in keys], np.float64)
        scaled = np.isfinite(factors)
        return np.where(scaled, factors, 1.0), scaled

    def _factor(self, electrolyte: str, temperature_K: float) -> float:
        facts = self.facts
        at = facts.pore_temperature_K
        if facts.pore_electrolyte is None or at is None:
            return np.nan
        if electrolyte == facts.pore_electrolyte and abs(temperature_K - at) <= _SAME_TEMPERATURE_K:
            return 1.0
        reference = self._conductivity(facts.pore_electrolyte, at)
        here = self._conductivity(electrolyte, temperature_K)
        if reference is None or here is None:
            return np.nan
        return porous.scaled_pore_resistance(1.0, reference, here)

    def _conductivity(self, electrolyte: str, temperature_K: float) -> float | None:
        known = self.electrolytes.get(electrolyte)
        return porous.conductivity_at(known.conductivity, temperature_K) if known else None


def pores(facts: ElectrodeFacts, electrolytes: Mapping[str, ElectrolyteFacts]) -> Pores | None:
    """Return the pores of an electrode that records a pore resistance, else None."""
    return Pores(facts, electrolytes) if facts.pore_resistance_ohm_cm2 else None


def _said(
    known: BoolArray, scaled: BoolArray, ratio: FloatArray
) -> tuple[tuple[str, ...], str | None]:
    """Return the warnings and the reason for an open decision."""
    if not known.any():
        return (), None
    said = [
        "R_ct was solved from the apparent value with the recorded pore resistance "
        f"(R_ion/R_ct from {ratio[known].min():.2g} to {ratio[known].max():.2g})"
    ]
    fixed = known & ~scaled
    if not fixed.any():
        return tuple(said), None
    said.append(
        f"the pore resistance could not be scaled to electrolyte and temperature of "
        f"{int(fixed.sum())} readings (no conductivity tables); the recorded one was used"
    )
    if ratio[fixed].max() <= DOMINANT:
        return tuple(said), None
    said.append(
        f"there it exceeds {DOMINANT} R_ct: apparent order and barrier are those of R_ct mixed "
        "with those of the pores"
    )
    return tuple(said), OPEN_BECAUSE
