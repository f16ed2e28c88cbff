"""The programme of a cell and its readings with ordinary scatter."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import datetime, timedelta

import numpy as np

from maker.films import FILM_D, QUANTITIES, TEMPERATURES_C, WITHIN
from maker.physics import half_potential, true_values
from maker.plan import FIRST_DAY, Cell, n_late

RELATIVE_SE = {"R_el": 0.01, "R_sl": 0.04, "R_ct": 0.018, "R_lat": 0.05, "sigma_w": 0.04}
CIRCUIT = "ohmic + film arc + charge-transfer arc + lattice arc + Warburg"
CIRCUIT_WATER = "ohmic + charge-transfer arc + lattice arc + Warburg"


@dataclass(frozen=True)
class Reading:
    """One measurement with its fit, in canonical units (resistances as fitted, ohm)."""

    cell: Cell
    measured_at: datetime
    offset_V: float
    temperature_C: float
    rest_h: float
    values: dict[str, float]
    se: dict[str, float]
    chi2: float
    note: str = ""
    circuit: str = CIRCUIT
    fitted_at: datetime = FIRST_DAY
    fitted_by: str = "op-2"

    @property
    def potential_V(self) -> float:
        """Potential against the cell's reference [V]."""
        return half_potential(self.cell, self.temperature_C + 273.15) + self.offset_V


def programme(cell: Cell, rng: np.random.RandomState) -> list[tuple[float, float]]:
    """Return (offset [V], temperature [C]) of a cell's programme in random order.

    Temperatures at the middle potential; first copies also go through the potentials.
    """
    few = cell.replicate == 3 or cell.film is FILM_D
    points = [(0.0, t) for t in (TEMPERATURES_C[::2] if few else TEMPERATURES_C)]
    if cell.replicate == 1:
        points += [(offset, 25.0) for offset in cell.film.offsets_V if offset]
    return [points[i] for i in rng.permutation(len(points))]


def late_days(cell: Cell, rng: np.random.RandomState) -> list[float]:
    """Return the ages [days] at which a cell's middle condition is measured again."""
    middles = {0: (), 1: (22.0,), 3: (13.0, 27.0, 44.0)}[n_late(cell)]
    spread = 8.0 if len(middles) == 1 else 2.0
    return [middle + spread * float(rng.uniform(-1, 1)) for middle in middles]


def read(
    cell: Cell, at: datetime, point: tuple[float, float], rest_h: float, rng: np.random.RandomState
) -> Reading:
    """Return one reading with scatter and standard errors."""
    offset, temperature = point
    age = (at - cell.assembled_at).total_seconds() / 86400
    truth = true_values(cell, offset, temperature + 273.15, age)
    values: dict[str, float] = {}
    errors: dict[str, float] = {}
    for name in QUANTITIES:
        noise, own, spread = rng.standard_normal(3)
        relative = RELATIVE_SE[name] * math.exp(0.25 * float(spread))
        if name in truth:
            scatter = math.exp(WITHIN * float(noise) + relative * float(own))
            values[name] = truth[name] * scatter / cell.area_cm2
            errors[name] = values[name] * relative
    for role in ("sl", "ct", "lat"):
        noise_q, noise_n = rng.standard_normal(2)
        if f"R_{role}" in truth:
            base = getattr(cell.film, f"Q_{role}") * cell.area_cm2
            values[f"Q_{role}"] = base * math.exp(cell.effects[f"Q_{role}"] + 0.02 * float(noise_q))
            values[f"n_{role}"] = min(cell.effects[f"n_{role}"] + 0.003 * float(noise_n), 0.99)
    return Reading(
        cell, at, offset, temperature, rest_h, values, errors,
        chi2=1e-4 * math.exp(0.4 * float(rng.standard_normal())),
        circuit=CIRCUIT_WATER if cell.medium.aqueous else CIRCUIT,
        fitted_at=at + timedelta(days=2, hours=1), fitted_by=f"op-{1 + int(rng.randint(3))}",
    )  # fmt: skip


def measure(cell: Cell, rng: np.random.RandomState) -> list[Reading]:
    """Return all readings of a cell in order of time."""
    at = cell.assembled_at + timedelta(hours=cell.rest_h)
    readings = []
    for point in programme(cell, rng):
        rest = 2.0 + 0.5 * int(rng.randint(4))
        readings.append(read(cell, at, point, rest, rng))
        at += timedelta(minutes=int(60 * rest) + int(rng.randint(30, 60)))
    for day in late_days(cell, rng):
        at = cell.assembled_at + timedelta(minutes=int(day * 1440))
        readings.append(read(cell, at, (0.0, 25.0), 2.0, rng))
    return readings
