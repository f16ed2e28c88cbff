"""Malformed recipes: each is refused at the character at fault."""

from collections.abc import Callable

import pytest

from campaign.chemistry.recipes import (
    additive_key_of,
    parse_recipe,
    salt_key_of,
    solvent_key_of,
)
from campaign.errors import RecipeError

# The caret under each text would stand at `position`, counted from 0.
MALFORMED = [
    ("", 0),
    ("   ", 0),
    ("NaPF6 in PC", 0),
    ("EC:DMC (1:1 v/v)", 0),
    ("in PC", 0),
    ("1 NaPF6 in PC", 2),
    ("1 M", 3),
    ("1 M in PC", 4),
    ("1 M 2 in PC", 4),
    ("1 M NaPF6", 9),
    ("1 M NaPF6 in", 12),
    ("1 M NaPF6 in ", 13),
    ("1 M NaPF6 on PC", 10),
    ("1 M NaPF6 EC:DMC 1:1", 10),
    ("1 M NaPF6 + in PC", 12),
    ("1 M NaPF6 + NaTFSI in PC", 12),
    ("0 M NaPF6 in PC", 0),
    ("0.0 mol/L NaPF6 in PC", 0),
    ("-1 M NaPF6 in PC", 0),
    ("−0.5 M NaPF6 in PC", 0),
    ("nan M NaPF6 in PC", 0),
    ("inf M NaPF6 in PC", 0),
    ("1e999 M NaPF6 in PC", 0),
    ("1e-999 M NaPF6 in PC", 0),
    ("5000 M NaPF6 in PC", 0),
    ("1,000 M NaPF6 in PC", 0),
    ("1.000,5 M NaPF6 in PC", 0),
    ("1.2.3 M NaPF6 in PC", 0),
    ("2^3 M NaPF6 in PC", 0),
    ("1 mol/foo NaPF6 in PC", 2),
    ("1 mol L-3 NaPF6 in PC", 2),
    ("1 M NaPF6 + 1 mol/kg NaTFSI in PC", 12),
    ("1 M NaPF6 + 0.5 M NaPF6 in PC", 18),
    ("2 wt% FEC in PC", 0),
    ("1 M NaPF6 in EC:DMC", 19),
    ("1 M NaPF6 in EC:EC (1:1 v/v)", 16),
    ("1 M NaPF6 in EC:ethylene carbonate (1:1)", 16),
    ("1 M NaPF6 in EC:DMC (1:1:1)", 21),
    ("1 M NaPF6 in EC:DMC:DEC (1:1)", 25),
    ("1 M NaPF6 in PC (1:1 v/v)", 17),
    ("1 M NaPF6 in EC:DMC (1:0 v/v)", 23),
    ("1 M NaPF6 in EC:DMC (1:-1 v/v)", 23),
    ("1 M NaPF6 in EC:DMC (1:x)", 23),
    ("1 M NaPF6 in EC:DMC (1:1 v/v", 28),
    ("1 M NaPF6 in EC:DMC (1:1 v/w)", 27),
    ("1 M NaPF6 in EC:DMC (1:1 blurb)", 25),
    ("1 M NaPF6 in EC:DMC (1:1 v/v)) + 2 wt% FEC", 29),
    ("1 M NaPF6 in EC: :DMC (1:1)", 17),
    ("1 M NaPF6 in EC DMC 1:1", 16),
    ("1 M NaPF6 in 30 vol% EC + 60 vol% DMC", 13),
    ("1 M NaPF6 in 30 vol% EC + 80 vol% DMC", 13),
    ("1 M NaPF6 in 30 vol% EC + 70 wt% DMC", 26),
    ("1 M NaPF6 in PC + 2 wt%", 23),
    ("1 M NaPF6 in PC + 2 FEC", 18),
    ("1 M NaPF6 in PC +", 17),
    ("1 M NaPF6 in PC with FEC", 24),
    ("1 M NaPF6 in PC + 0 wt% FEC", 18),
    ("1 M NaPF6 in PC + -2 wt% FEC", 18),
    ("1 M NaPF6 in PC + 100 wt% FEC", 18),
    ("1 M NaPF6 in PC + 60 wt% FEC + 50 wt% VC", 31),
    ("1 M NaPF6 in PC + 2 mol% FEC", 18),
    ("1 M NaPF6 in PC + 2 wt% PC", 24),
    ("1 M NaPF6 in PC + 2 wt% FEC + 1 wt% FEC", 36),
    ("1 M NaPF6 in PC + 2 wt% FEC!", 27),
    ("1 M NaPF6 in PC\x00", 15),
    ("1 M Na\nPF6 in PC", 6),
    ("1 M Na\u202ePF6 in PC", 6),
    ("1 M NaPF6 in EC (DMC)", 17),
    ("1 M Na(PF6 in PC", 6),
    ("1 M NaPF6 in (EC:DMC 1:1 v/v", 28),
    ("1 M NaPF6 in ((EC:DMC) 1:1)", 14),
    ("1 M NaPF6 in PC" + " " * 600, 500),
]


def test_there_are_enough() -> None:
    assert len({text for text, _ in MALFORMED}) >= 40


@pytest.mark.parametrize(("text", "position"), MALFORMED)
def test_refused_at_the_character_at_fault(text: str, position: int) -> None:
    with pytest.raises(RecipeError) as caught:
        parse_recipe(text)
    assert caught.value.position == position
    assert caught.value.expected
    assert "\n" not in caught.value.message


def test_positions_count_characters_as_typed() -> None:
    """Characters that are dropped, folded or multiplied on reading do not shift a position."""
    folded = ("1 M NaPF₆ in ", "1 mol L⁻¹ NaPF6 in ", "  1\u200b M   NaPF6 in ", "1 ㏖/L A1 in ")
    for prefix in folded:
        with pytest.raises(RecipeError) as caught:
            parse_recipe(prefix + "?")
        assert caught.value.position == len(prefix)


@pytest.mark.parametrize(
    ("read", "text", "position"),
    [
        (solvent_key_of, "", 0),
        (solvent_key_of, "DMC:EC", 6),
        (solvent_key_of, "DMC:EC 1:1 + 2 wt% FEC", 11),
        (solvent_key_of, "DMC:DMC 1:1", 4),
        (salt_key_of, "", 0),
        (salt_key_of, "NaPF6:NaTFSI", 12),
        (salt_key_of, "NaPF6:NaPF6 (1:1)", 6),
        (salt_key_of, "NaPF6 1:1", 6),
        (salt_key_of, "NaPF6 in PC", 6),
        (salt_key_of, "NaPF6:NaTFSI (1:1 v/v)", 14),
        (additive_key_of, "", 0),
        (additive_key_of, "FEC", 3),
        (additive_key_of, "2 wt% FEC + 1 wt% FEC", 18),
    ],
)
def test_filters_are_refused_with_a_position(
    read: Callable[[str], str], text: str, position: int
) -> None:
    with pytest.raises(RecipeError) as caught:
        read(text)
    assert caught.value.position == position
