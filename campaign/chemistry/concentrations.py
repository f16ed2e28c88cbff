"""Concentration of an ion in a recipe, and molality to amount concentration."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from campaign.chemistry.components import MOLAL, Recipe
from campaign.chemistry.ions import DEFAULT_CHARGES
from campaign.chemistry.species import Species, find
from campaign.errors import refused


@dataclass(frozen=True)
class IonCount:
    """Concentration of an ion [mol/L or mol/kg, the recipe's basis]; None if no salt has it.

    assumed: sentences saying what was taken for granted about unknown salts.
    """

    concentration: float | None
    assumed: tuple[str, ...] = ()


def ion_concentration(recipe: Recipe, ion: str, extra: Sequence[Species] = ()) -> float | None:
    """Return the concentration of `ion` over all salts, in the recipe's basis.

    ion: element symbol ('Na'). 0.5 mol/L Na2SO4 holds 1 mol/L Na; acids count every H of the
    formula. None where no salt holds the ion. Additives are not counted.
    """
    return count_ion(recipe, ion, extra).concentration


def count_ion(recipe: Recipe, ion: str, extra: Sequence[Species] = ()) -> IonCount:
    """Return the concentration of `ion` with what had to be assumed about unknown salts."""
    total, found, assumed = 0.0, False, []
    for salt in recipe.of_role("salt"):
        species = find(salt.species, extra)
        if species is not None and species.cation:
            count = (species.cations or 1) if species.cation == ion else 0
        else:
            count = _count_by_name(salt.species, ion)
            if count:
                assumed.append(
                    f"{salt.species} is not a salt of the table: "
                    f"{count} {ion} per formula unit assumed from its name"
                )
        if count:
            total += count * salt.amount
            found = True
    return IonCount(float(f"{total:.12g}") if found else None, tuple(assumed))


def recipe_ions(recipe: Recipe, extra: Sequence[Species] = ()) -> tuple[str, ...]:
    """Return the symbols of the cations of the salts, in the order of the salts."""
    found: list[str] = []
    for salt in recipe.of_role("salt"):
        species = find(salt.species, extra)
        if species is not None and species.cation:
            found.append(species.cation)
        else:
            found.extend(ion for ion in DEFAULT_CHARGES if _count_by_name(salt.species, ion))
    return tuple(dict.fromkeys(found))


def _count_by_name(name: str, ion: str) -> int:
    """Return the cations of an unknown salt whose name begins with the ion: NaX 1, Na2X 2."""
    if not name.startswith(ion):
        return 0
    rest = name[len(ion) :]
    if not rest or rest[0].islower():
        return 0
    return int(rest[0]) if rest[0] in "23456789" and not rest[1:2].isdigit() else 1


def to_molar(
    concentration_mol_kg: float, solute_g_per_kg: float, density_g_cm3: float
) -> float:
    """Return the amount concentration [mol/L] of a solute of given molality.

    c = b rho / (1 + sum_j b_j M_j): a solution of 1 kg of solvent weighs 1 kg + sum_j b_j M_j
    and fills that mass over rho, from the definitions of molality and amount concentration [1].
    concentration_mol_kg: molality b [mol per kg of solvent]; solute_g_per_kg: sum of b_j M_j
    over all salts [g per kg of solvent]; density_g_cm3: of the solution [g/cm3].
    [1] IUPAC Green Book, 3rd ed. (2007), section 2.10.
    Raises campaign.errors.Refused for values that are not finite or not positive.
    """
    for name, value, least in (
        ("molality", concentration_mol_kg, 0.0),
        ("mass of salt", solute_g_per_kg, 0.0),
        ("density", density_g_cm3, 1e-12),
    ):
        if not (math.isfinite(value) and value >= least):
            raise refused(
                f"a {name} of {value} cannot be converted",
                value=value,
                expected="a finite number above zero",
            )
    return concentration_mol_kg * density_g_cm3 / (1.0 + solute_g_per_kg / 1000.0)


def molar_factor(
    recipe: Recipe, density_g_cm3: float, extra: Sequence[Species] = ()
) -> float:
    """Return what a molality of this recipe is multiplied by to give mol/L [kg/L].

    density_g_cm3: of the solution [g/cm3]. 1 for a recipe already in mol/L. Additives are
    left out of the mass. Raises campaign.errors.Refused for a salt of unknown molar mass.
    """
    if recipe.basis != MOLAL:
        return 1.0
    solute = 0.0
    for salt in recipe.of_role("salt"):
        species = find(salt.species, extra)
        if species is None or species.molar_mass is None:
            raise refused(
                f"the molar mass of {salt.species} is not known, so mol/kg cannot be "
                "converted to mol/L; add the species with its molar mass",
                value=salt.species,
                expected="salts of known molar mass",
            )
        solute += salt.amount * species.molar_mass
    return to_molar(1.0, solute, density_g_cm3)
