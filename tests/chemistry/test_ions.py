"""Ions as written in papers."""

import pytest

from campaign.chemistry.ions import Ion, parse_ion
from campaign.errors import Refused


@pytest.mark.parametrize(
    ("text", "symbol", "charge"),
    [
        ("Na", "Na", 1), ("Na+", "Na", 1), ("na", "Na", 1), (" Na+ ", "Na", 1), ("Na1+", "Na", 1),
        ("Na(+)", "Na", 1), ("Li⁺", "Li", 1), ("K+", "K", 1), ("Mg", "Mg", 2), ("Mg2+", "Mg", 2),
        ("Mg²⁺", "Mg", 2), ("Mg++", "Mg", 2), ("Zn+2", "Zn", 2), ("Zn^2+", "Zn", 2),
        ("Ca2+", "Ca", 2), ("Al3+", "Al", 3), ("H+", "H", 1), ("sodium", "Na", 1),
        ("Sodium ion", "Na", 1),
    ],
)  # fmt: skip
def test_spellings(text: str, symbol: str, charge: int) -> None:
    ion = parse_ion(text)
    assert ion == Ion(symbol, charge)
    assert parse_ion(ion.label) == ion


@pytest.mark.parametrize(
    "text",
    ["", "Xx", "Fe2+", "Na2+", "Mg+", "Cl-", "Na-", "Na+ +", "Na(+", "1", "Na\x00", "N" * 999],
)
def test_refused_with_what_was_expected(text: str) -> None:
    with pytest.raises(Refused) as caught:
        parse_ion(text)
    assert caught.value.faults[0].expected


def test_labels() -> None:
    assert [Ion("Na", 1).label, Ion("Mg", 2).label, Ion("Al", 3).label] == ["Na+", "Mg2+", "Al3+"]
