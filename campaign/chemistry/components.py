"""What a recipe consists of."""

from __future__ import annotations

from dataclasses import dataclass, field

MOLAR, MOLAL = "mol/L", "mol/kg"


@dataclass(frozen=True)
class Component:
    """One part of an electrolyte.

    role: 'salt', 'solvent' or 'additive'; species: canonical name; amount in `basis`:
    salts 'mol/L' or 'mol/kg'; solvents a fraction [1] 'v/v', 'w/w' or 'mol/mol', all of
    which sum to 1; additives 'wt%', 'vol%', 'mol/L' or 'mol/kg'.
    """

    role: str
    species: str
    amount: float
    basis: str


@dataclass(frozen=True)
class Recipe:
    """An electrolyte in canonical form; two spellings of one recipe are equal.

    components: salts, solvents, additives, each in alphabetical order; basis: of the salts,
    'mol/L' or 'mol/kg'; key: canonical text that reads back to an equal recipe; aqueous:
    more than half of the blend, in the basis it is given in, is water; warnings: sentences
    about how it was read, not part of what it is.
    """

    components: tuple[Component, ...]
    basis: str
    salt_key: str
    solvent_key: str
    additive_key: str
    key: str
    aqueous: bool
    warnings: tuple[str, ...] = field(default=(), compare=False)

    def of_role(self, role: str) -> tuple[Component, ...]:
        """Return the components of one role in canonical order."""
        return tuple(part for part in self.components if part.role == role)
