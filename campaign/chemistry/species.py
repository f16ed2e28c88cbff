"""Salts, solvents and additives the program knows, each value with its source.

The shipped table is `species.csv` beside this module; a campaign may add its own species,
which are passed to every function as `extra` and take precedence.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import lru_cache

from campaign.chemistry.cautions import (
    CLOSING,
    METAL_SENTENCE,
    METALS,
    SENTENCES,
    UNKNOWN_SENTENCE,
)
from campaign.chemistry.spelling import clean_or_empty, fold

SOURCES = {
    "gutmann": "Gutmann, Coord. Chem. Rev. 18 (1976) 225; The Donor-Acceptor Approach (1978)",
    "gutmann-memory": "Gutmann, Coord. Chem. Rev. 18 (1976) 225 (from memory)",
    "xu": "Xu, Chem. Rev. 104 (2004) 4303, table 1, at 25 degC (from memory)",
    "xu40": "Xu, Chem. Rev. 104 (2004) 4303, table 1, at 40 degC (from memory)",
    "crc": "CRC Handbook of Chemistry and Physics, near 20 to 25 degC (from memory)",
    "crc30": "CRC Handbook of Chemistry and Physics, at 30 degC (from memory)",
    "memory": "from memory",
    "iupac": "from the formula with the IUPAC standard atomic weights (2021, abridged)",
}

_MAX_NEAR_LENGTH = 60


@dataclass(frozen=True)
class Species:
    """One salt, solvent or additive; None or '' where nothing is recorded.

    classes: of 'salt', 'solvent', 'additive'. molar_mass [g/mol]; cation: element symbol,
    cations [1] of them per formula unit, each of charge number `charge` [1];
    donor_number [kcal/mol]; permittivity, relative [1]; flash_point [degC];
    *_source: where the value is from; cautions: sentences.
    """

    name: str
    classes: tuple[str, ...] = ()
    aliases: tuple[str, ...] = ()
    formula: str = ""
    molar_mass: float | None = None
    molar_mass_source: str = ""
    cation: str = ""
    cations: int | None = None
    charge: int | None = None
    donor_number: float | None = None
    donor_source: str = ""
    permittivity: float | None = None
    permittivity_source: str = ""
    flash_point: float | None = None
    flash_source: str = ""
    cautions: tuple[str, ...] = ()


@dataclass(frozen=True)
class Index:
    """Species by every spelling. `by_start` gives, for a folded first character, the
    lengths of the spellings that begin with it, longest first."""

    exact: dict[str, Species | None]
    folded: dict[str, Species | None]
    by_start: dict[str, tuple[int, ...]]
    spellings: tuple[str, ...]

    def lookup(self, name: str) -> Species | None:
        """Return the species a cleaned name stands for; None if unknown or ambiguous."""
        return self.exact.get(name) or self.folded.get(fold(name))

    def longest_at(self, text: str, position: int) -> tuple[Species, int] | None:
        """Return the species with the longest spelling at `position`, and where it ends."""
        if position >= len(text):
            return None
        for length in self.by_start.get(fold(text[position])[:1], ()):
            end = position + length
            if end <= len(text) and not _continues(text, end):
                found = self.lookup(text[position:end])
                if found is not None:
                    return found, end
        return None


def all_species() -> tuple[Species, ...]:
    """Return the shipped species in the order of the table."""
    return _shipped()


def find(name: str, extra: Sequence[Species] = ()) -> Species | None:
    """Return the species a typed name or alias stands for, or None.

    Case does not matter where that leaves one species only; LiPF₆ and LiPF6 are one.
    """
    if len(name) > _MAX_NEAR_LENGTH * 2:
        return None
    cleaned = clean_or_empty(name)
    return index_of(tuple(extra)).lookup(cleaned) if cleaned else None


def near(name: str, extra: Sequence[Species] = ()) -> list[str]:
    """Return up to three canonical names spelled like `name`, nearest first."""
    if len(name) > _MAX_NEAR_LENGTH:
        return []
    cleaned = clean_or_empty(name)
    return list(_near(fold(cleaned), tuple(extra))) if cleaned else []


def cautions(names: Iterable[str], extra: Sequence[Species] = ()) -> list[str]:
    """Return what to be careful of, one sentence a hazard, naming the species it concerns.

    `names` may hold species, and alkali metals or their electrodes ('Na', 'Na/Na+').
    Ends with the sentence that says who decides; an empty list of names gives it alone.
    """
    concerned: dict[str, list[str]] = {}
    for name in names:
        metal = name.split("/")[0].strip()
        if metal in METALS:
            _note(concerned, METAL_SENTENCE, metal)
            continue
        species = find(name, extra)
        if species is None:
            _note(concerned, UNKNOWN_SENTENCE, name)
            continue
        for sentence in species.cautions:
            _note(concerned, sentence, species.name)
    lines = [f"{', '.join(who)}: {sentence}." for sentence, who in concerned.items()]
    return [*lines, CLOSING]


def index_of(extra: tuple[Species, ...]) -> Index:
    """Return the look-up tables of the shipped species overlaid with `extra`."""
    return _index(extra)


def _note(concerned: dict[str, list[str]], sentence: str, who: str) -> None:
    names = concerned.setdefault(sentence, [])
    if who not in names:
        names.append(who)


def _continues(text: str, end: int) -> bool:
    """Return whether the name goes on after `end`, so that what precedes is only a part."""
    if end == len(text):
        return False
    character = text[end]
    return character.isalnum() or character in "_^[]'"


@lru_cache(maxsize=1)
def _shipped() -> tuple[Species, ...]:
    import csv
    from importlib import resources

    table = resources.files("campaign.chemistry").joinpath("species.csv")
    lines = table.read_text(encoding="utf-8").splitlines()
    return tuple(_from_row(row) for row in csv.DictReader(lines))


def _from_row(row: dict[str, str]) -> Species:
    return Species(
        name=row["name"],
        classes=tuple(filter(None, row["classes"].split(";"))),
        aliases=tuple(filter(None, row["aliases"].split(";"))),
        formula=row["formula"],
        molar_mass=_number(row["molar_mass"]),
        molar_mass_source=SOURCES["iupac"] if row["molar_mass"] else "",
        cation=row["cation"],
        cations=int(row["cations"]) if row["cations"] else None,
        charge=int(row["charge"]) if row["charge"] else None,
        donor_number=_number(row["donor_number"]),
        donor_source=_source(row["donor_source"]),
        permittivity=_number(row["permittivity"]),
        permittivity_source=_source(row["permittivity_source"]),
        flash_point=_number(row["flash_point"]),
        flash_source=_source(row["flash_source"]),
        cautions=tuple(SENTENCES[key] for key in row["cautions"].split()),
    )


def _number(text: str) -> float | None:
    return float(text) if text else None


def _source(key: str) -> str:
    return SOURCES[key] if key else ""


@lru_cache(maxsize=16)
def _index(extra: tuple[Species, ...]) -> Index:
    exact: dict[str, Species | None] = {}
    folded: dict[str, Species | None] = {}
    for group in (_shipped(), extra):
        exact |= _by_spelling(group, case=True)
        folded |= _by_spelling(group, case=False)
    starts: dict[str, set[int]] = {}
    for spelling in exact:
        starts.setdefault(fold(spelling[0])[:1], set()).add(len(spelling))
    by_start = {first: tuple(sorted(sizes, reverse=True)) for first, sizes in starts.items()}
    return Index(exact, folded, by_start, tuple(key for key, value in folded.items() if value))


def _by_spelling(group: Sequence[Species], case: bool) -> dict[str, Species | None]:
    """Return species by spelling: names before aliases before formulas of salts.

    A spelling that two species share at the same rank names neither (None).
    """
    table: dict[str, Species | None] = {}
    for rank in (_names, _aliases, _salt_formulas):
        own: dict[str, Species | None] = {}
        for species in group:
            for spelling in rank(species):
                cleaned = clean_or_empty(spelling)
                key = cleaned if case else fold(cleaned)
                if key and key not in table:
                    own[key] = species if own.get(key, species) is species else None
        table |= own
    return table


def _names(species: Species) -> tuple[str, ...]:
    return (species.name,)


def _aliases(species: Species) -> tuple[str, ...]:
    return species.aliases


def _salt_formulas(species: Species) -> tuple[str, ...]:
    """Organic isomers share a formula, so only a salt goes by its formula."""
    return (species.formula,) if species.cation else ()


@lru_cache(maxsize=256)
def _near(folded: str, extra: tuple[Species, ...]) -> tuple[str, ...]:
    import difflib

    index = _index(extra)
    names: list[str] = []
    for spelling in difflib.get_close_matches(folded, index.spellings, n=6, cutoff=0.6):
        species = index.folded[spelling]
        if species is not None and species.name not in names:
            names.append(species.name)
    return tuple(names[:3])
