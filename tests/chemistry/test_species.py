"""The shipped table of species: molar masses, donor numbers, spellings, cautions."""

import re
from collections import Counter
from dataclasses import fields

import pytest

from campaign.chemistry.cautions import CLOSING
from campaign.chemistry.species import Species, all_species, cautions, find, near

# IUPAC (CIAAW) standard atomic weights 2021, abridged to five digits where longer.
ATOMIC_WEIGHT = {
    "H": 1.008, "Li": 6.94, "B": 10.81, "C": 12.011, "N": 14.007, "O": 15.999, "F": 18.998,
    "Na": 22.990, "Mg": 24.305, "Al": 26.982, "Si": 28.085, "P": 30.974, "S": 32.06, "Cl": 35.45,
    "K": 39.098, "Ca": 40.078, "Mn": 54.938, "Zn": 65.38, "As": 74.922, "Br": 79.904, "I": 126.90,
    "D": 2.0141,  # the mass of deuterium, which has no standard atomic weight of its own
}  # fmt: skip
TOKEN = re.compile(r"([A-Z][a-z]?)(\d*)|(\()|\)(\d*)")


def atoms(formula: str) -> Counter[str]:
    """Return how many atoms of each element a formula with nested brackets holds."""
    stack: list[Counter[str]] = [Counter()]
    position = 0
    while position < len(formula):
        found = TOKEN.match(formula, position)
        assert found, f"{formula} at {position}"
        element, count, opening, repeat = found.groups()
        if element:
            stack[-1][element] += int(count or 1)
        elif opening:
            stack.append(Counter())
        else:
            inner = stack.pop()
            for symbol, number in inner.items():
                stack[-1][symbol] += number * int(repeat or 1)
        position = found.end()
    assert len(stack) == 1, formula
    return stack[0]


def formula_mass(formula: str) -> float:
    return sum(ATOMIC_WEIGHT[element] * count for element, count in atoms(formula).items())


def test_the_formula_reader_itself() -> None:
    assert atoms("Mg(N(SO2CF3)2)2") == Counter(Mg=1, N=2, S=4, O=8, C=4, F=12)
    # Glucose 180.16 and water 18.015 g/mol, CRC Handbook (from memory).
    assert formula_mass("C6H12O6") == pytest.approx(180.16, abs=0.005)
    assert formula_mass("H2O") == pytest.approx(18.015, abs=0.0005)


def test_the_table_is_large_enough_and_has_no_repeats() -> None:
    names = [species.name for species in all_species()]
    assert len(names) >= 80
    assert len({name.casefold() for name in names}) == len(names)


@pytest.mark.parametrize("species", all_species(), ids=lambda s: s.name)
def test_molar_mass_agrees_with_the_formula(species: Species) -> None:
    assert species.formula and species.molar_mass is not None
    assert species.molar_mass == pytest.approx(formula_mass(species.formula), abs=0.006)


@pytest.mark.parametrize(
    ("name", "molar_mass"),
    # As printed in the CRC Handbook or on bottles (from memory); older weights differ by 0.03.
    [("LiPF6", 151.91), ("LiTFSI", 287.09), ("LiFSI", 187.07), ("LiBOB", 193.79), ("NaPF6", 167.95),
     ("NaTFSI", 303.13), ("NaClO4", 122.44), ("KPF6", 184.06), ("Mg(TFSI)2", 584.60),
     ("Zn(OTf)2", 363.53), ("H2SO4", 98.08), ("EC", 88.06), ("PC", 102.09), ("DMC", 90.08),
     ("FEC", 106.05), ("DTD", 124.12), ("TMSP", 314.54), ("EMIMTFSI", 391.31)],
)  # fmt: skip
def test_molar_masses_as_printed(name: str, molar_mass: float) -> None:
    species = find(name)
    assert species is not None
    assert species.molar_mass == pytest.approx(molar_mass, abs=0.035)


@pytest.mark.parametrize("species", all_species(), ids=lambda s: s.name)
def test_a_row_is_complete_and_in_range(species: Species) -> None:
    assert species.classes and set(species.classes) <= {"salt", "solvent", "additive"}
    assert ("salt" in species.classes) == bool(species.cation)
    for value in ("molar_mass", "donor_number", "permittivity", "flash_point"):
        source = value.removesuffix("_number").removesuffix("_point") + "_source"
        assert (getattr(species, value) is None) == (getattr(species, source) == "")
    assert species.donor_number is None or 0 < species.donor_number < 40
    assert species.permittivity is None or 1 < species.permittivity < 200
    assert species.flash_point is None or -50 < species.flash_point < 250


@pytest.mark.parametrize("species", [s for s in all_species() if s.cation], ids=lambda s: s.name)
def test_a_salt_holds_the_cations_it_claims(species: Species) -> None:
    assert species.cations and species.charge
    held = atoms(species.formula)[species.cation]
    if species.cation != "H":
        assert held == species.cations
    else:
        assert held >= species.cations


@pytest.mark.parametrize(
    ("name", "donor_number"),
    # Gutmann, Coord. Chem. Rev. 18 (1976) 225; The Donor-Acceptor Approach (1978).
    [("acetonitrile", 14.1), ("DMC", 17.2), ("DEC", 16.0), ("THF", 20.0), ("DMF", 26.6),
     ("DMSO", 29.8)],
)  # fmt: skip
def test_donor_numbers_of_gutmann(name: str, donor_number: float) -> None:
    species = find(name)
    assert species is not None
    assert species.donor_number == donor_number
    assert "Gutmann" in species.donor_source and "memory" not in species.donor_source


@pytest.mark.parametrize("species", all_species(), ids=lambda s: s.name)
def test_every_spelling_finds_its_species(species: Species) -> None:
    for spelling in (species.name, *species.aliases):
        assert find(spelling) == species
        assert find(spelling.upper()) == species
        assert find(f" {spelling.lower()} ") == species


@pytest.mark.parametrize(
    ("typed", "name"),
    [("LiPF₆", "LiPF6"), ("NaPF₆", "NaPF6"), ("ＰＣ", "PC"), ("H₂O", "water"), ("MeCN", "AN"),
     ("2–MeTHF", "2-MeTHF"), ("propylene   carbonate", "PC"), ("G4", "TEGDME"),
     ("Li₂SO₄", "Li2SO4")],
)  # fmt: skip
def test_spellings(typed: str, name: str) -> None:
    found = find(typed)
    assert found is not None and found.name == name


@pytest.mark.parametrize("typed", ["", " ", "Zorblax", "\x00", "x" * 1000, "C4H8O2"])
def test_unknown(typed: str) -> None:
    assert find(typed) is None


def test_near_names() -> None:
    assert near("NaPF5")[0] == "NaPF6"
    assert "LiTFSI" in near("LiTSFI")
    assert near("") == [] and near("\x00") == [] and near("y" * 100) == []


def test_species_of_the_campaign() -> None:
    own = Species("PC", classes=("salt",), aliases=("mine",), cation="Na", cations=1, charge=1)
    assert find("mine", [own]) == own
    assert find("pc", [own]) == own
    assert find("mine") is None
    assert near("minne", [own]) == ["PC"]


def test_a_spelling_that_two_species_share_names_neither() -> None:
    a, b = Species("Aa1", aliases=("same",)), Species("Bb1", aliases=("SAME",))
    assert find("same", [a, b]) == a
    assert find("SAME", [a, b]) == b
    assert find("Same", [a, b]) is None


def test_cautions_name_whom_they_concern_once() -> None:
    lines = cautions(["NaClO4", "DMC", "DEC", "DMC", "LiPF6", "Na/Na+", "unknown thing"])
    assert lines[-1] == CLOSING
    assert len(lines) == len(set(lines))
    assert any(line.startswith("NaClO4: perchlorate") for line in lines)
    assert any(line.startswith("DMC, DEC: flammable") for line in lines)
    assert any("HF" in line and "LiPF6" in line for line in lines)
    assert any(line.startswith("Na: alkali metal") for line in lines)
    assert any(line.startswith("unknown thing: not in the table") for line in lines)
    assert cautions([]) == [CLOSING]


def test_hazards_that_must_not_be_missing() -> None:
    for species in all_species():
        text = " ".join(species.cautions)
        if "ClO4" in species.formula:
            assert "oxidiser" in text, species.name
        if "PF6" in species.formula or "BF4" in species.formula:
            assert "HF" in text, species.name
        if species.flash_point is not None and species.flash_point < 60:
            assert "flammable" in text, species.name  # GHS category 3 ends at 60 degC


def test_species_can_be_hashed() -> None:
    assert len(fields(Species)) == 16
    assert len({*all_species()}) == len(all_species())
