"""What the ledger hands to the trends: one row a measurement with its current fit.

Columns are NumPy arrays of equal length n. Text columns are object arrays of `str`
('' = not stated). Numbers not recorded are NaN. Fitted values are as fitted; per-area
and per-interface conversion belongs to the trends.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, fields, replace
from typing import Any

import numpy as np
import numpy.typing as npt

from campaign.ledger.quantities import QUANTITIES

__all__ = [
    "QUANTITIES",
    "BoolArray",
    "ElectrodeFacts",
    "ElectrolyteFacts",
    "FloatArray",
    "IntArray",
    "Plateau",
    "Readings",
    "Snapshot",
    "TextArray",
]

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]
BoolArray = npt.NDArray[np.bool_]
TextArray = npt.NDArray[np.object_]

@dataclass(frozen=True)
class Readings:
    """Measurements in force, one row each, with the values of their current fit.

    measurement: record number. concentration: of the insertion ion over all salts, in
    `basis` ('mol/L' or 'mol/kg'). salt, solvents, additives: canonical keys
    ('NaPF6', 'EC:DMC (1:1 v/v)', 'none'). area_cm2 [cm2], potential_V [V] against
    `reference`, temperature_K [K], ion_content [1], E_half_V [V] against `reference`,
    measured_at and assembled_at [s since 1970-01-01 UTC], cycle [1].
    values, se: by quantity, as fitted [ohm, S s^n, 1, ohm s^-1/2], NaN where not fitted
    or absent; absent: by quantity, True where the arc was looked for and is not there.
    """

    measurement: IntArray
    cell: TextArray
    specimen: TextArray
    electrode: TextArray
    electrolyte: TextArray
    salt: TextArray
    solvents: TextArray
    additives: TextArray
    concentration: FloatArray
    basis: TextArray
    aqueous: BoolArray
    area_cm2: FloatArray
    configuration: TextArray
    reference: TextArray
    potential_V: FloatArray
    temperature_K: FloatArray
    ion_content: FloatArray
    E_half_V: FloatArray
    measured_at: FloatArray
    assembled_at: FloatArray
    cycle: FloatArray
    values: Mapping[str, FloatArray]
    se: Mapping[str, FloatArray]
    absent: Mapping[str, BoolArray]

    def __len__(self) -> int:
        return len(self.measurement)

    def take(self, rows: npt.NDArray[Any]) -> Readings:
        """Return the readings selected by a boolean mask or an index array."""
        changes: dict[str, Any] = {}
        for column in fields(self):
            value = getattr(self, column.name)
            changes[column.name] = (
                {name: array[rows] for name, array in value.items()}
                if isinstance(value, Mapping)
                else value[rows]
            )
        return replace(self, **changes)


@dataclass(frozen=True)
class Plateau:
    """A declared two-phase plateau [V] against `reference`."""

    low_V: float
    high_V: float
    reference: str


@dataclass(frozen=True)
class ElectrodeFacts:
    """What is recorded of an electrode; None where not recorded.

    charge: charge number z. diffusion_length_cm [cm], diffusivity_cm2_s [cm2 s^-1],
    pore_resistance_ohm_cm2 [ohm cm2] measured in `pore_electrolyte` at
    `pore_temperature_K` [K]; window [V] against `window_reference`; maximum_temperature_K [K].
    """

    label: str
    material: str
    ion: str
    charge: int
    form: str = ""
    diffusion_length_cm: float | None = None
    diffusivity_cm2_s: float | None = None
    porosity: float | None = None
    pore_resistance_ohm_cm2: float | None = None
    pore_electrolyte: str | None = None
    pore_temperature_K: float | None = None
    window_low_V: float | None = None
    window_high_V: float | None = None
    window_reference: str = ""
    maximum_temperature_K: float | None = None
    plateaus: tuple[Plateau, ...] = ()


@dataclass(frozen=True)
class ElectrolyteFacts:
    """What is recorded of an electrolyte beside its recipe; None where not recorded.

    density_g_cm3 [g cm^-3]; conductivity: (temperature [K], conductivity [S cm^-1]) pairs;
    activity: (temperature [K], mean activity coefficient [1]) pairs;
    minimum_temperature_K, maximum_temperature_K [K].
    """

    recipe: str
    density_g_cm3: float | None = None
    conductivity: tuple[tuple[float, float], ...] = ()
    activity: tuple[tuple[float, float], ...] = ()
    minimum_temperature_K: float | None = None
    maximum_temperature_K: float | None = None


@dataclass(frozen=True)
class Snapshot:
    """A campaign as it stood at one journal entry: readings and what they refer to.

    left_out: counts of what the selection left out, by reason ('withdrawn', 'no fit', ...).
    """

    readings: Readings
    electrodes: Mapping[str, ElectrodeFacts]
    electrolytes: Mapping[str, ElectrolyteFacts]
    left_out: Mapping[str, int] = field(default_factory=dict)
