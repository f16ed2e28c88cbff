"""Electrolyte recipes as papers write them, and their one canonical form.

    >>> parse_recipe("0.8M NaPF6 + 0.2 M NaTFSI in EC/DEC 3:7 wt + 1 vol% VC").key
    '0.8 mol/L NaPF6 + 0.2 mol/L NaTFSI in DEC:EC (7:3 w/w) + 1 vol% VC'
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction

from campaign.chemistry.amounts import MASS, MOLE, VOLUME
from campaign.chemistry.components import Component, Recipe
from campaign.chemistry.concentrations import (
    IonCount,
    count_ion,
    ion_concentration,
    molar_factor,
    recipe_ions,
    to_molar,
)
from campaign.chemistry.grammar import (
    Blend,
    Entry,
    Written,
    read_additives,
    read_blend,
    read_recipe,
    read_salts,
)
from campaign.chemistry.naming import Name
from campaign.chemistry.ratios import normalised, ratio_text, rounded
from campaign.chemistry.scanner import Scanner
from campaign.chemistry.species import Species, index_of, near
from campaign.chemistry.spelling import MAX_LENGTH, clean, number_text
from campaign.errors import RecipeError

__all__ = [
    "Component",
    "IonCount",
    "Recipe",
    "additive_key_of",
    "count_ion",
    "ion_concentration",
    "molar_factor",
    "parse_recipe",
    "recipe_ions",
    "salt_key_of",
    "solvent_key_of",
    "species_name",
    "to_molar",
]

WATER = "water"
NO_ADDITIVES = "none"
_BLEND_PLACES = 9
_SALT_PLACES = 6


def parse_recipe(text: str, extra: Sequence[Species] = ()) -> Recipe:
    """Return the electrolyte that `text` describes.

    extra: the campaign's own species, which take precedence over the shipped table.
    Raises RecipeError with the 0-based position of the fault in `text`.
    """
    scanner = _scanner(text, extra)
    written = read_recipe(scanner, _water(extra))
    _refuse_repeats(scanner, written)
    solvents, blend_warnings = _solvents(scanner, written.blend)
    salts = _salts(scanner, written.salts)
    additives = _additives(scanner, written.additives)
    salt_key = _salt_key(scanner, written.salts)
    solvent_key = _solvent_key(solvents)
    additive_key = _additive_key(additives)
    key = " + ".join(_amount_text(part) for part in salts) + f" in {solvent_key}"
    if additives:
        key += f" + {additive_key}"
    if len(key) > MAX_LENGTH:
        raise RecipeError(
            f"the recipe written out has {len(key)} characters; at most {MAX_LENGTH} can be kept",
            0,
            "fewer components or shorter names",
        )
    return Recipe(
        components=(*salts, *(part for part, _ in solvents), *additives),
        basis=salts[0].basis,
        salt_key=salt_key,
        solvent_key=solvent_key,
        additive_key=additive_key,
        key=key,
        aqueous=any(part.species == WATER and part.amount > 0.5 for part, _ in solvents),
        warnings=tuple(dict.fromkeys([*blend_warnings, *_warnings(written, extra)])),
    )


def solvent_key_of(text: str, extra: Sequence[Species] = ()) -> str:
    """Return the canonical key of a solvent blend as typed in a filter: 'DMC:EC 1:1'.

    Raises RecipeError with the position of the fault.
    """
    scanner = _scanner(text, extra)
    blend = read_blend(scanner)
    if not scanner.at_end():
        raise scanner.unexpected("a ratio such as (1:1 v/v), or the end")
    _refuse_repeated_names(scanner, blend.names)
    return _solvent_key(_solvents(scanner, blend)[0])


def salt_key_of(text: str, extra: Sequence[Species] = ()) -> str:
    """Return the canonical key of the salts as typed in a filter.

    Reads 'NaPF6', 'NaPF6:NaTFSI (0.8:0.2)' and '0.8 M NaPF6 + 0.2 M NaTFSI'.
    Raises RecipeError with the position of the fault.
    """
    scanner = _scanner(text, extra)
    names, parts, start = read_salts(scanner)
    _refuse_repeated_names(scanner, names)
    if len(parts) != len(names) and (parts or len(names) > 1):
        raise _wrong_count(scanner, len(names), len(parts), "salts", start)
    return _salt_key_text(scanner, [n.text for n in names], parts or [Fraction(1)], start)


def additive_key_of(text: str, extra: Sequence[Species] = ()) -> str:
    """Return the canonical key of additives as typed in a filter: 'none', '2 wt% FEC'.

    Raises RecipeError with the position of the fault.
    """
    scanner = _scanner(text, extra)
    if scanner.text.casefold() == NO_ADDITIVES:
        return NO_ADDITIVES
    entries = read_additives(scanner)
    _refuse_repeated_names(scanner, [entry.name for entry in entries])
    return _additive_key(_additives(scanner, entries))


def species_name(text: str) -> str:
    """Return a name for a species of the campaign, in the one spelling recipes will use.

    Raises RecipeError where a recipe could not be read back with it, or where it is already
    a spelling of a shipped species; `position` is where the name stops being one.
    """
    scanner = _scanner(text, ())
    name = scanner.name()
    if not scanner.at_end():
        raise scanner.unexpected("a name that ends here, without '+', '/', ':' or an amount")
    if name.species is not None:
        raise scanner.fault(
            f"'{scanner.text}' already stands for {name.text}", 0, "a name not yet in the table"
        )
    return name.text


def _scanner(text: str, extra: Sequence[Species]) -> Scanner:
    return Scanner(clean(text), index_of(tuple(extra)))


def _water(extra: Sequence[Species]) -> Name:
    return Name(WATER, index_of(tuple(extra)).lookup(WATER), 0)


def _order(name: str) -> tuple[str, str]:
    return name.casefold(), name


# Papers write the strongly solvating solvent of a blend first: EC:DMC, not DMC:EC (common
# practice, no source). The list is part of the canonical recipe: changing it would split
# recipes that are stored already.
_WRITTEN_FIRST = ("water", "EC", "PC", "FEC", "VC", "GBL", "sulfolane", "AN", "DMSO", "DMF", "DOL")


def _solvent_order(name: str) -> tuple[int, str, str]:
    rank = _WRITTEN_FIRST.index(name) if name in _WRITTEN_FIRST else len(_WRITTEN_FIRST)
    return rank, *_order(name)


# -- refusals ------------------------------------------------------------------------------


def _refuse_repeats(scanner: Scanner, written: Written) -> None:
    entries = [*written.salts, *written.additives]
    names = [*(entry.name for entry in entries), *written.blend.names]
    _refuse_repeated_names(scanner, sorted(names, key=lambda name: name.start))


def _refuse_repeated_names(scanner: Scanner, names: Sequence[Name]) -> None:
    seen: set[str] = set()
    for name in names:
        if name.text in seen:
            raise scanner.fault(f"{name.text} is named twice", name.start, "each species once")
        seen.add(name.text)


def _wrong_count(
    scanner: Scanner, names: int, parts: int, what: str, start: int
) -> RecipeError:
    example = ":".join(["1"] * names)
    if not parts:
        return scanner.fault(
            f"{names} {what} without a ratio",
            start,
            f"a ratio such as {example}, or an amount beside each additive",
        )
    return scanner.fault(
        f"a ratio of {parts} parts for {names} {what}", start, f"{names} numbers such as {example}"
    )


# -- salts ---------------------------------------------------------------------------------


def _salts(scanner: Scanner, entries: Sequence[Entry]) -> list[Component]:
    basis = entries[0].amount.unit
    for entry in entries:
        if entry.amount.unit != basis:
            raise scanner.fault(
                f"salts in {basis} and in {entry.amount.unit} in one recipe",
                entry.amount.start,
                f"every salt in {basis}",
            )
    salts = [Component("salt", e.name.text, float(e.amount.value), basis) for e in entries]
    return sorted(salts, key=lambda part: _order(part.species))


def _salt_key(scanner: Scanner, entries: Sequence[Entry]) -> str:
    names = [entry.name.text for entry in entries]
    amounts = [entry.amount.value for entry in entries]
    return _salt_key_text(scanner, names, amounts, entries[0].amount.start)


def _salt_key_text(
    scanner: Scanner, names: Sequence[str], amounts: Sequence[Fraction], start: int
) -> str:
    pairs = sorted(zip(names, amounts, strict=True), key=lambda pair: _order(pair[0]))
    if len(pairs) == 1:
        return pairs[0][0]
    # Decimal fractions here, not 4:1: a salt ratio is read beside a total concentration.
    shares = rounded([amount for _, amount in pairs], _SALT_PLACES)
    if shares is None:
        raise scanner.fault(
            "a salt below a millionth of the others", start, "comparable amounts of salt"
        )
    joined = ":".join(name for name, _ in pairs)
    return f"{joined} ({':'.join(number_text(float(share)) for share in shares)})"


# -- solvents ------------------------------------------------------------------------------


def _solvents(
    scanner: Scanner, blend: Blend
) -> tuple[list[tuple[Component, Fraction]], list[str]]:
    """Return the solvents in canonical order with exact fractions, and warnings."""
    names = [name.text for name in blend.names]
    if len(names) == 1 and not blend.parts:
        return [(Component("solvent", names[0], 1.0, "v/v"), Fraction(1))], []
    if len(blend.parts) != len(names):
        raise _wrong_count(scanner, len(names), len(blend.parts), "solvents", blend.ratio_start)
    # Sorted first, so that rounding does not depend on the order of writing.
    pairs = sorted(
        zip(names, blend.parts, strict=True), key=lambda pair: _solvent_order(pair[0])
    )
    shares = normalised([part for _, part in pairs], _BLEND_PLACES)
    if shares is None:
        raise scanner.fault(
            "a solvent below a billionth of the blend", blend.ratio_start, "a ratio such as 1:1"
        )
    basis = blend.basis or "v/v"
    warnings = [] if blend.basis else ["the blend's ratio has no basis: read as volume (v/v)"]
    return [
        (Component("solvent", name, float(share), basis), share)
        for (name, _), share in zip(pairs, shares, strict=True)
    ], warnings


def _solvent_key(solvents: Sequence[tuple[Component, Fraction]]) -> str:
    if len(solvents) == 1:
        return solvents[0][0].species
    joined = ":".join(part.species for part, _ in solvents)
    ratio = ratio_text([share for _, share in solvents])
    return f"{joined} ({ratio} {solvents[0][0].basis})"


# -- additives -----------------------------------------------------------------------------


def _additives(scanner: Scanner, entries: Sequence[Entry]) -> list[Component]:
    totals = {MASS: Fraction(0), VOLUME: Fraction(0)}
    for entry in entries:
        unit, start = entry.amount.unit, entry.amount.start
        if unit == MOLE:
            raise scanner.fault("an additive in mol%", start, "wt%, vol%, mol/L or mol/kg")
        if unit in totals:
            totals[unit] += entry.amount.value
            if totals[unit] >= 100:
                raise scanner.fault("additives of 100 % or more", start, "a sum below 100 %")
    parts = [
        Component("additive", e.name.text, float(e.amount.value), e.amount.unit) for e in entries
    ]
    return sorted(parts, key=lambda part: _order(part.species))


def _additive_key(additives: Sequence[Component]) -> str:
    return " + ".join(_amount_text(part) for part in additives) or NO_ADDITIVES


def _amount_text(part: Component) -> str:
    return f"{number_text(part.amount)} {part.basis} {part.species}"


# -- warnings ------------------------------------------------------------------------------


def _warnings(written: Written, extra: Sequence[Species]) -> list[str]:
    found: list[str] = []
    for role, entries in (("salt", written.salts), ("additive", written.additives)):
        for entry in entries:
            if entry.amount.remark:
                found.append(entry.amount.remark)
            if entry.hydrate:
                found.append(f"{entry.name.text}: its water of crystallisation is not counted")
            found.extend(_about(entry.name, role, extra))
    for name in written.blend.names:
        found.extend(_about(name, "solvent", extra))
    return found


def _about(name: Name, role: str, extra: Sequence[Species]) -> list[str]:
    if name.species is None:
        alike = near(name.text, extra)
        hint = f"; did you mean {' or '.join(alike)}?" if alike else ""
        return [f"{name.text} is not in the table of species{hint}"]
    classes = name.species.classes
    if role == "additive" or not classes or role in classes:
        return []
    return [f"{name.text} is listed as {' and '.join(classes)}, used here as {role}"]
