"""Concentration bases: mol/L and mol/kg are never mixed, unless a density converts them.

c = b rho / (1 + b M / k), with b the molality of the ion [mol/kg], rho the density of the
electrolyte [kg/L = g/cm3], M the molar mass of the salt [kg/mol] and k ions a formula unit;
by the definitions of molality and concentration (IUPAC Green Book, 3rd ed., section 2.10).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from campaign.ledger.readings import ElectrolyteFacts, FloatArray, Readings

if TYPE_CHECKING:
    from campaign.trends.sample import Sample

MOLAR, MOLAL = "mol/L", "mol/kg"


def molar(molality: float, density_g_cm3: float, molar_mass_g_mol: float, ions: int = 1) -> float:
    """Return the concentration [mol/L] of an ion from its molality [mol/kg].

    density_g_cm3 of the electrolyte [g cm^-3], molar_mass_g_mol of the salt [g/mol], ions:
    insertion ions a formula unit of the salt [1].
    """
    return molality * density_g_cm3 / (1.0 + molality * molar_mass_g_mol / 1000.0 / ions)


def unified(
    readings: Readings, electrolytes: Mapping[str, ElectrolyteFacts]
) -> tuple[Readings, tuple[str, ...]]:
    """Bring recipes given in both bases to mol/L where a density allows it.

    Only series (salt, solvents, additives) that mix both bases are touched; where a density
    or the salt's molar mass is missing they stay separate series, with a warning.
    """
    molal = readings.basis == MOLAL
    if not molal.any() or molal.all():
        return readings, ()
    keys = list(zip(readings.salt, readings.solvents, readings.additives, strict=True))
    both = {keys[i] for i in np.flatnonzero(molal)} & {keys[i] for i in np.flatnonzero(~molal)}
    concentration, basis = readings.concentration.copy(), readings.basis.copy()
    warnings = []
    for key in sorted(both):
        rows = np.array([i for i in np.flatnonzero(molal) if keys[i] == key])
        converted = [_converted(readings, i, electrolytes) for i in rows]
        name = " / ".join(key)
        if any(value is None for value in converted):
            warnings.append(
                f"{name} is recorded in mol/L and in mol/kg; they stay separate series, because "
                "an electrolyte's density (or the salt's molar mass) is not recorded"
            )
            continue
        concentration[rows] = converted
        basis[rows] = MOLAR
        warnings.append(f"{name}: {len(rows)} readings in mol/kg were converted by density")
    return replace(readings, concentration=concentration, basis=basis), tuple(warnings)


def _converted(
    readings: Readings, row: int, electrolytes: Mapping[str, ElectrolyteFacts]
) -> float | None:
    from campaign.chemistry.species import find

    known = electrolytes.get(readings.electrolyte[row])
    salt = find(readings.salt[row])
    if known is None or known.density_g_cm3 is None or salt is None or not salt.molar_mass:
        return None
    molality = float(readings.concentration[row])
    return molar(molality, known.density_g_cm3, salt.molar_mass, salt.cations or 1)


def in_activity(s: Sample) -> tuple[Sample, FloatArray]:
    """Return the readings with a tabulated activity coefficient and ln(gamma c) of each."""
    keys = list(zip(s.c.electrolyte.tolist(), s.c.temperature_K.tolist(), strict=True))
    known = {key: _coefficient(s, *key) for key in set(keys)}
    gamma = np.array([known[key] for key in keys], np.float64)
    without = ~np.isfinite(gamma)
    kept = s.leaving(without, "no activity coefficient tabulated for electrolyte and temperature")
    return kept, np.log(gamma[~without] * s.c.concentration[~without])


def _coefficient(s: Sample, electrolyte: int, temperature_K: float) -> float:
    """Return the coefficient interpolated in temperature, NaN outside the table (1 K)."""
    facts = s.c.electrolytes.get(s.c.names["electrolyte"][electrolyte])
    if facts is None or not facts.activity:
        return float("nan")
    temperatures, values = zip(*sorted(facts.activity), strict=True)
    if not temperatures[0] - 1.0 <= temperature_K <= temperatures[-1] + 1.0:
        return float("nan")
    return float(np.exp(np.interp(temperature_K, temperatures, np.log(values))))
