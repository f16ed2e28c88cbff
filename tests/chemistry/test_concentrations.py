"""Ion concentration of a recipe and conversion of molality."""

import pytest

from campaign.chemistry.recipes import (
    count_ion,
    ion_concentration,
    molar_factor,
    parse_recipe,
    recipe_ions,
    to_molar,
)
from campaign.chemistry.species import Species
from campaign.errors import Refused


@pytest.mark.parametrize(
    ("text", "ion", "value"),
    [
        ("0.5 M Na2SO4 in water", "Na", 1.0), ("1 M NaPF6 in PC", "Na", 1.0),
        ("0.8 M NaPF6 + 0.2 M NaTFSI in PC", "Na", 1.0), ("1 M NaPF6 in PC", "Li", None),
        ("0.5 M H2SO4 in water", "H", 1.0), ("1 M HCl in water", "H", 1.0),
        ("1 M ZnSO4 + 0.1 M MnSO4 in water", "Zn", 1.0), ("0.3 M Mg(TFSI)2 in G2", "Mg", 0.3),
        ("3 mol/kg NaTFSI in water", "Na", 3.0), ("1 M NaPF6 in PC + 0.1 M NaDFOB", "Na", 1.0),
        ("0.1 M NaPF6 + 0.2 M NaTFSI in PC", "Na", 0.3), ("1 M KOH in water", "H", None),
    ],
)  # fmt: skip
def test_ion_concentration(text: str, ion: str, value: float | None) -> None:
    assert ion_concentration(parse_recipe(text), ion) == value


def test_unknown_salts_are_counted_by_their_name_and_said() -> None:
    counted = count_ion(parse_recipe("0.5 M NaZorb + 0.5 M Na2Zorb in PC"), "Na")
    assert counted.concentration == 1.5
    assert len(counted.assumed) == 2 and "assumed" in counted.assumed[0]
    assert count_ion(parse_recipe("1 M Nazorb in PC"), "Na").concentration is None
    assert count_ion(parse_recipe("1 M NaPF6 in PC"), "Na").assumed == ()


def test_species_of_the_campaign_are_counted() -> None:
    own = Species("TriZorb", classes=("salt",), cation="Na", cations=3, charge=1, molar_mass=200.0)
    recipe = parse_recipe("0.2 M TriZorb in PC", [own])
    assert ion_concentration(recipe, "Na", [own]) == pytest.approx(0.6)
    assert recipe_ions(recipe, [own]) == ("Na",)


def test_recipe_ions() -> None:
    assert recipe_ions(parse_recipe("1 M ZnSO4 + 0.1 M Na2SO4 in water")) == ("Na", "Zn")
    assert recipe_ions(parse_recipe("1 M KZorb in PC")) == ("K",)


@pytest.mark.parametrize(
    ("molality", "molar_mass", "density", "molarity"),
    [
        # CRC Handbook, concentrative properties of aqueous solutions at 20 degC, 10 mass %
        # (from memory): NaCl 1.901 mol/kg, 1.0707 g/cm3, 1.832 mol/L;
        # H2SO4 1.133 mol/kg, 1.0661 g/cm3, 1.087 mol/L.
        (1.901, 58.44, 1.0707, 1.832),
        (1.133, 98.07, 1.0661, 1.087),
    ],
)
def test_molality_to_amount_concentration(
    molality: float, molar_mass: float, density: float, molarity: float
) -> None:
    value = to_molar(molality, molality * molar_mass, density)
    assert value == pytest.approx(molarity, abs=0.001)


def test_molar_factor_of_a_recipe() -> None:
    factor = molar_factor(parse_recipe("1.901 mol/kg NaCl in water"), 1.0707)
    assert 1.901 * factor == pytest.approx(1.832, abs=0.001)
    assert molar_factor(parse_recipe("1 M NaPF6 in PC"), 1.2) == 1.0


def test_two_salts_share_the_mass_of_the_solution() -> None:
    recipe = parse_recipe("1 mol/kg NaCl + 1 mol/kg KCl in water")
    # 1 kg of water with 58.44 g NaCl and 74.55 g KCl, at 1.08 g/cm3: 1.13299 kg in 1.04906 L.
    assert molar_factor(recipe, 1.08) == pytest.approx(1 / 1.04906, rel=1e-4)


def test_conversion_refused() -> None:
    with pytest.raises(Refused, match="NaZorb is not known"):
        molar_factor(parse_recipe("1 mol/kg NaZorb in water"), 1.1)
    for values in ((float("nan"), 1.0, 1.0), (1.0, float("inf"), 1.0), (1.0, 1.0, 0.0)):
        with pytest.raises(Refused, match="cannot be converted"):
            to_molar(*values)
