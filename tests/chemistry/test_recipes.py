"""Spellings of recipes: each group is one electrolyte and has one key."""

import pytest

from campaign.chemistry.recipes import (
    additive_key_of,
    parse_recipe,
    salt_key_of,
    solvent_key_of,
    species_name,
)
from campaign.chemistry.species import Species, all_species
from campaign.errors import RecipeError

GROUPS = {
    "1 mol/L NaPF6 in EC:DMC (1:1 v/v) + 2 wt% FEC": [
        "1 M NaPF6 in EC:DMC (1:1 v/v) + 2 wt% FEC",
        "1M NaPF6 in EC:DMC (1:1 v/v)+2wt% FEC",
        "1.00 mol/L NaPF6 in EC/DMC (1:1, v/v) with 2 wt.% FEC",
        "1,0 M NaPF₆ in EC:DMC (1:1 by volume) + 2wt.% FEC",
        "1 mol L-1 NaPF6 in DMC:EC 50:50 vol% + FEC (2 wt%)",
        "1 mol·L⁻¹ NaPF6 in EC : DMC ( 1 : 1 v:v ) + 2 % w/w FEC",
        "1 mol dm-3 NaPF6 / EC:DMC = 1:1 vol + 2 mass% FEC",
        "1 mol dm^-3 NaPF6 in EC/DMC (1/1 v/v) and 2 wt% FEC",
        "1 mol/dm3 NaPF6 in EC+DMC (1:1 vol.) + 2 weight% FEC",
        "1 mol dm⁻³ NaPF6 in EC and DMC (v/v = 1:1) + 2 wt% FEC",
        "1000 mM NaPF6 in EC–DMC (0.5:0.5 v/v) + 2.0 wt % FEC as additive",
        "1000 mmol/L NaPF6 in 1:1 (v/v) EC:DMC, FEC (2 wt%)",
        "1 mol·dm−3 NaPF6 in a mixture of EC and DMC (1:1 volume ratio) with 2 wt% of FEC.",
        "1 M sodium hexafluorophosphate in ethylene carbonate (EC):dimethyl carbonate (DMC) "
        "(1:1 v/v) + 2 wt% fluoroethylene carbonate",
        "1 M NaPF6 in a 1:1 mixture of EC and DMC (v/v) with an additive 2 wt% FEC",
        "1 M NaPF6 in (EC:DMC 1:1 v/v) + 20000 ppm FEC",
        "1 M NaPF6 in (EC:DMC) (1:1 v/v) + 2 wt% FEC",
        "1 M NaPF6 in EC:DMC with a volume ratio of 1:1 + 2 wt% FEC",
        "NaPF6 (1 M) in 50 vol% EC + 50 vol% DMC + 2 wt% FEC",
    ],
    "1 mol/L NaClO4 in PC": [
        "1.0 mol/L NaClO4 in PC",
        "1M NaClO4 in PC",
        "1 M NaClO₄ / PC",
        "1 M NaClO4/PC",
        "1 M  naclo4\tin   propylene carbonate",
        "1 molar NaClO4 dissolved in PC",
        "1e0 M NaClO4 in PC",
        "10^3 mol m-3 NaClO4 in PC",
        "1×10³ mM NaClO4 in PC",
        "1 mol/litre NaClO4 in PC",
        "１ Ｍ NaClO4 in ＰＣ",
    ],
    "0.5 mol/L NaClO4 in PC": [
        "0.5 mol dm-3 NaClO4 / PC",
        "0,5 M NaClO4 in PC",
        ".5 M NaClO4 in PC",
        "500 mM NaClO4 in PC",
        "500 mmol dm-3 NaClO4 in PC",
        "5e-1 M NaClO4 in PC",
        "5×10⁻¹ mol L⁻¹ NaClO4 in PC",
    ],
    "3 mol/kg NaTFSI in water": [
        "3 mol/kg NaTFSI in water",
        "3 mol kg-1 NaTFSI in H2O",
        "3 mol kg⁻¹ NaTFSI in H₂O",
        "3 mol·kg^-1 NaTFSI / water",
        "3 m NaTFSI in water",
        "3 molal NaTFSI (aq)",
        "3000 mmol/kg NaN(SO2CF3)2 in water",
        "3m NaTFSI aq.",
        "3 m NaTFSI aqueous solution",
    ],
    "0.8 mol/L NaPF6 + 0.2 mol/L NaTFSI in EC:DEC (3:7 w/w) + 0.5 wt% NaDFOB + 1 vol% VC": [
        "0.8M NaPF6 + 0.2 M NaTFSI in EC/DEC 3:7 wt + 1 vol% VC + 0.5 wt% NaDFOB",
        "0.2 M NaTFSI + 0.8 M NaPF6 in DEC:EC (7:3 w/w) + 0.5 wt% NaDFOB + 1 vol% VC",
        "0.8 M NaPF6 and 0.2 M NaTFSI in EC:DEC (30:70 by weight) with 1 vol.% VC and "
        "0.5 wt% NaDFOB",
        "0.8 M NaPF6, 0.2 M NaTFSI in EC:DEC (wt 3:7), VC (1 vol%), NaDFOB (0.5 wt%)",
        "0.8 M NaPF6 + 0.2 M NaTFSI in EC:DEC 0.3:0.7 mass + 1 % v/v VC + 0.5 wt% NaDFOB",
        "0.8 M NaPF6/0.2 M NaTFSI in 30 wt% EC + 70 wt% DEC + 1 vol% VC + 0.5 wt% NaDFOB",
    ],
    "1 mol/L LiTFSI in DOL:DME (1:1 v/v) + 0.2 mol/L LiNO3": [
        "1 M LiTFSI in DOL:DME (1:1 v/v) + 0.2 M LiNO3",
        "1 M LiTFSI in 1,3-dioxolane:1,2-dimethoxyethane (1:1 v/v) + 0.2 mol/L LiNO3",
        "1 M LiN(SO2CF3)2 in 1,2-dimethoxyethane/1,3-dioxolane 1:1 by vol. with 0.2 M LiNO3",
    ],
    "1 mol/L LiPF6 in EC:DEC:DMC (1:1:1 mol/mol)": [
        "1 M LiPF6 in EC:DMC:DEC (1:1:1 mol)",
        "1 M LiPF6 in EC/DMC/DEC 1/1/1 mol/mol/mol",
        "1 M LiPF6 in EC:DMC:DEC = 1:1:1 by mole",
    ],
    "0.5 mol/L Mg(TFSI)2 in 2-MeTHF:TEGDME (1:2 v/v)": [
        "0.5 M Mg(TFSI)2 in 2-MeTHF:G4 (1:2 v/v)",
        "0.5 M Mg(TFSI)2 in tetraglyme/2-methyltetrahydrofuran 2:1 v/v",
    ],
}  # fmt: skip
SPELLINGS = [(text, key) for key, texts in GROUPS.items() for text in texts]

DESIGN_EXAMPLES = (
    "1 M NaPF6 in EC:DMC (1:1 v/v) + 2 wt% FEC",
    "1.0 mol/L NaClO4 in PC",
    "0.5 mol dm-3 NaClO4 / PC",
    "3 mol/kg NaTFSI in water",
    "0.8M NaPF6 + 0.2 M NaTFSI in EC/DEC 3:7 wt + 1 vol% VC + 0.5 wt% NaDFOB",
)


def test_there_are_enough_spellings() -> None:
    assert len({text for text, _ in SPELLINGS}) >= 60


@pytest.mark.parametrize(("text", "key"), SPELLINGS)
def test_spellings_of_one_recipe_have_one_key(text: str, key: str) -> None:
    recipe = parse_recipe(text)
    assert recipe.key == key
    assert parse_recipe(key) == recipe


@pytest.mark.parametrize("text", DESIGN_EXAMPLES)
def test_the_examples_read_without_a_warning(text: str) -> None:
    assert parse_recipe(text).warnings == ()


def test_components_and_keys() -> None:
    recipe = parse_recipe(DESIGN_EXAMPLES[4])
    parts = [(c.role, c.species, c.amount, c.basis) for c in recipe.components]
    assert parts == [
        ("salt", "NaPF6", 0.8, "mol/L"),
        ("salt", "NaTFSI", 0.2, "mol/L"),
        ("solvent", "EC", 0.3, "w/w"),
        ("solvent", "DEC", 0.7, "w/w"),
        ("additive", "NaDFOB", 0.5, "wt%"),
        ("additive", "VC", 1.0, "vol%"),
    ]
    assert recipe.salt_key == "NaPF6:NaTFSI (0.8:0.2)"
    assert recipe.solvent_key == "EC:DEC (3:7 w/w)"
    assert recipe.additive_key == "0.5 wt% NaDFOB + 1 vol% VC"
    assert (recipe.basis, recipe.aqueous) == ("mol/L", False)


def test_a_single_solvent() -> None:
    recipe = parse_recipe("1 M NaClO4 in PC")
    assert (recipe.solvent_key, recipe.additive_key, recipe.salt_key) == ("PC", "none", "NaClO4")
    assert recipe.of_role("solvent")[0].amount == 1.0


def test_a_concentration_series_has_one_salt_key() -> None:
    texts = ("0.8 M NaPF6 + 0.2 M NaTFSI in PC", "0.04 M NaPF6 + 10 mM NaTFSI in PC",
             "2.4 M NaPF6 + 0.6 M NaTFSI in PC")  # fmt: skip
    assert {parse_recipe(text).salt_key for text in texts} == {"NaPF6:NaTFSI (0.8:0.2)"}


@pytest.mark.parametrize(
    ("a", "b"),
    [
        ("1 M NaPF6 in EC:DMC (1:1 v/v)", "1 M NaPF6 in EC:DMC (1:1 w/w)"),
        ("1 M NaPF6 in EC:DMC (1:2 v/v)", "1 M NaPF6 in EC:DMC (2:1 v/v)"),
        ("1 M NaPF6 in PC", "1 mol/kg NaPF6 in PC"),
        ("1 M NaPF6 in PC", "1 m NaPF6 in PC"),
        ("1 M NaPF6 in PC", "1 mM NaPF6 in PC"),
        ("1 M NaPF6 in PC + 1 wt% FEC", "1 M NaPF6 in PC + 1 vol% FEC"),
        ("1 M NaPF6 in PC + 1 wt% FEC", "1 M NaPF6 in PC + 2 wt% FEC"),
        ("0.8 M NaPF6 + 0.2 M NaTFSI in PC", "0.2 M NaPF6 + 0.8 M NaTFSI in PC"),
    ],
)
def test_different_recipes_differ(a: str, b: str) -> None:
    assert parse_recipe(a).key != parse_recipe(b).key


@pytest.mark.parametrize(
    ("text", "aqueous"),
    [
        ("1 M NaClO4 in water", True), ("1 M Na2SO4 (aq)", True), ("0.5 M H2SO4 in H2O", True),
        ("1 M NaClO4 in water:AN (2:1 v/v)", True), ("1 M NaClO4 in water:AN (1:1 v/v)", False),
        ("1 M NaClO4 in PC + 100 mM water", False), ("1 M NaClO4 in PC", False),
    ],
)  # fmt: skip
def test_aqueous_means_more_than_half_water(text: str, aqueous: bool) -> None:
    assert parse_recipe(text).aqueous is aqueous


def test_warnings() -> None:
    def warned(text: str) -> str:
        return " | ".join(parse_recipe(text).warnings)

    assert "no basis" in warned("1 M NaPF6 in EC:DMC 1:1")
    assert "molality" in warned("21 m LiTFSI in water")
    assert "wt%" in warned("1 M NaPF6 in PC + 2% FEC")
    assert "by mass" in warned("1 M NaPF6 in PC + 50 ppm water")
    assert "did you mean NaPF6" in warned("1 M NaPF in PC")
    assert "Zorblax is not in the table" in warned("1 M NaPF6 in Zorblax")
    assert "listed as salt" in warned("1 M NaPF6 in NaCl")
    assert "crystallisation" in warned("1 M ZnSO4·7H2O in water")
    assert parse_recipe("1 M ZnSO4·7H2O in water") == parse_recipe("1 M ZnSO4 in water")


def test_an_unlisted_ratio_stays_a_fraction() -> None:
    # 1/4.14159 = 0.241453161...
    key = solvent_key_of("EC:PC (1:3.14159 v/v)")
    assert key == "EC:PC (0.241453162:0.758546838 v/v)"
    assert solvent_key_of(key) == key
    assert solvent_key_of("EC:PC 33.3:66.7 v/v") == "EC:PC (333:667 v/v)"


def test_names_with_brackets_commas_and_hyphens() -> None:
    recipe = parse_recipe("1 M Na(abc(de)2)3 in 3-zorblaxol:Qum-Q (1:1 v/v) + 1 wt% 1,2-bar-x(y)z")
    assert [part.species for part in recipe.components] == [
        "Na(abc(de)2)3", "3-zorblaxol", "Qum-Q", "1,2-bar-x(y)z",
    ]  # fmt: skip


def test_species_of_the_campaign_take_precedence() -> None:
    own = Species("Zorblax", classes=("solvent",), aliases=("ZB", "zorblax ether"))
    recipe = parse_recipe("1 M NaPF6 in zorblax ether:PC (1:1 v/v)", [own])
    assert recipe.solvent_key == "PC:Zorblax (1:1 v/v)"
    assert recipe.warnings == ()
    assert solvent_key_of("ZB", [own]) == "Zorblax"


@pytest.mark.parametrize(
    ("text", "key"),
    [
        ("DMC:EC 1:1", "EC:DMC (1:1 v/v)"), ("EC/DMC (50:50)", "EC:DMC (1:1 v/v)"),
        ("DMC:EC (1:1 w/w)", "EC:DMC (1:1 w/w)"), ("pc", "PC"), ("H₂O", "water"),
        ("3:7 EC/DEC wt", "EC:DEC (3:7 w/w)"), ("DEC:EC (7:3 w/w)", "EC:DEC (3:7 w/w)"),
    ],
)  # fmt: skip
def test_solvent_key_of_what_is_typed(text: str, key: str) -> None:
    assert solvent_key_of(text) == key


@pytest.mark.parametrize(
    ("text", "key"),
    [
        ("NaPF6", "NaPF6"), ("napf₆", "NaPF6"), ("sodium perchlorate", "NaClO4"),
        ("NaTFSI:NaPF6 (0.2:0.8)", "NaPF6:NaTFSI (0.8:0.2)"),
        ("NaPF6/NaTFSI 4:1", "NaPF6:NaTFSI (0.8:0.2)"),
        ("0.4 M NaPF6 + 0.1 M NaTFSI", "NaPF6:NaTFSI (0.8:0.2)"),
    ],
)  # fmt: skip
def test_salt_key_of_what_is_typed(text: str, key: str) -> None:
    assert salt_key_of(text) == key


@pytest.mark.parametrize(
    ("text", "key"),
    [
        ("none", "none"), ("None", "none"), ("2wt% FEC", "2 wt% FEC"), ("FEC (2 wt%)", "2 wt% FEC"),
        ("1 vol% VC + 2 wt% FEC", "2 wt% FEC + 1 vol% VC"), ("0.05 M NaDFOB", "0.05 mol/L NaDFOB"),
    ],
)  # fmt: skip
def test_additive_key_of_what_is_typed(text: str, key: str) -> None:
    assert additive_key_of(text) == key


def test_keys_of_a_recipe_are_what_the_filters_give() -> None:
    for text in DESIGN_EXAMPLES:
        recipe = parse_recipe(text)
        assert salt_key_of(recipe.salt_key) == recipe.salt_key
        assert solvent_key_of(recipe.solvent_key) == recipe.solvent_key
        assert additive_key_of(recipe.additive_key) == recipe.additive_key


@pytest.mark.parametrize("species", all_species(), ids=lambda s: s.name)
def test_every_spelling_of_every_species_reads_in_every_role(species: Species) -> None:
    for spelling in (species.name, *species.aliases):
        for typed in (spelling, spelling.lower(), spelling.upper()):
            other = "PC" if species.name != "PC" else "EC"
            assert parse_recipe(f"1 M {typed} in {other}").salt_key == species.name
            assert parse_recipe(f"1 M NaZorb in {typed}").solvent_key == species.name
            blend = parse_recipe(f"1 M NaZorb in {typed}/{other} 1:1 v/v with 1 wt% Zorb-2")
            assert species.name in {part.species for part in blend.of_role("solvent")}
            blend = parse_recipe(f"1 M NaZorb in {other} + {typed} (1:1 wt)")
            assert species.name in {part.species for part in blend.of_role("solvent")}
            assert parse_recipe(f"1 M NaZorb in Qorb + 2 wt% {typed}").additive_key == (
                f"2 wt% {species.name}"
            )
            listed = parse_recipe(f"1 M NaZorb in Qorb:Zorb-2 1:1, {typed} (2 wt%)")
            assert (listed.additive_key, listed.solvent_key) == (
                f"2 wt% {species.name}", "Qorb:Zorb-2 (1:1 v/v)",
            )  # fmt: skip
            assert parse_recipe(f"1 M NaZorb in Qorb with {typed} (2 wt%)").additive_key == (
                f"2 wt% {species.name}"
            )


@pytest.mark.parametrize("text", ["Zorblax", " zorblax  ether ", "Na(zor)2", "2-zorblaxol", "Zo₂"])
def test_a_new_species_name_reads_back_in_a_recipe(text: str) -> None:
    name = species_name(text)
    assert species_name(name) == name
    assert parse_recipe(f"1 M NaPF6 in {name}").solvent_key == name


@pytest.mark.parametrize(
    ("text", "position"),
    [("", 0), ("M", 0), ("in", 0), ("Zor/blax", 3), ("Zor: blax", 3), ("Zor in", 4), ("EC", 0),
     ("propylene carbonate", 0), ("12", 0), ("Zor\x07", 3)],
)  # fmt: skip
def test_a_name_no_recipe_could_read_is_refused(text: str, position: int) -> None:
    with pytest.raises(RecipeError) as caught:
        species_name(text)
    assert caught.value.position == position
