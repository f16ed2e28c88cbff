"""Reference electrodes: spellings, own-ion references, conversion."""

import pytest

from campaign.chemistry.references import (
    JUNCTION,
    SOLVATION,
    canonical_reference,
    convert,
    is_known_reference,
    is_same_ion,
    read_reference,
)
from campaign.errors import Refused


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ("Na/Na+", "Na/Na+"), ("Na+/Na", "Na/Na+"), ("Na|Na+", "Na/Na+"), ("Na⁺/Na", "Na/Na+"),
        ("vs. Na+/Na", "Na/Na+"), (" Na / Na+ ", "Na/Na+"), ("na/na+", "Na/Na+"),
        ("Na/Na(+)", "Na/Na+"), ("Li+|Li", "Li/Li+"), ("vs Li/Li⁺", "Li/Li+"),
        ("K+/K", "K/K+"), ("Mg/Mg2+", "Mg/Mg2+"), ("Mg²⁺/Mg", "Mg/Mg2+"), ("Mg/Mg+2", "Mg/Mg2+"),
        ("Zn|Zn2+", "Zn/Zn2+"), ("Zn²⁺/Zn", "Zn/Zn2+"), ("Ag/AgCl", "Ag/AgCl"),
        ("Ag|AgCl", "Ag/AgCl"), ("AgCl/Ag", "Ag/AgCl"),
        ("Ag/AgCl (sat. KCl)", "Ag/AgCl (sat. KCl)"), ("Ag/AgCl/sat KCl", "Ag/AgCl (sat. KCl)"),
        ("Ag/AgCl (3 M KCl)", "Ag/AgCl (3 M KCl)"), ("Ag/AgCl (3.0 M KCl)", "Ag/AgCl (3 M KCl)"),
        ("Ag/AgCl, 3.5 M KCl", "Ag/AgCl (3.5 M KCl)"), ("SCE", "SCE"), ("sce", "SCE"),
        ("SHE", "SHE"), ("NHE", "SHE"), ("RHE", "RHE"), ("Ag/Ag+", "Ag/Ag+"), ("Ag⁺/Ag", "Ag/Ag+"),
        ("Hg/HgO", "Hg/HgO"), ("Hg/Hg2SO4", "Hg/Hg2SO4"), ("Hg|Hg₂SO₄", "Hg/Hg2SO4"),
        ("Fc/Fc+", "Fc/Fc+"), ("Fc+/Fc", "Fc/Fc+"), ("Fc⁺/Fc", "Fc/Fc+"),
    ],
)  # fmt: skip
def test_spellings(text: str, name: str) -> None:
    assert canonical_reference(text) == name
    assert is_known_reference(text)
    assert canonical_reference(name) == name


@pytest.mark.parametrize("text", ["Pt wire", "carbon", "Na/Li+", "Na/Na2+", "Ag/AgCl (tap water)"])
def test_an_unknown_reference_is_kept_as_written_and_flagged(text: str) -> None:
    found = read_reference(text)
    assert (found.name, found.known, found.offset_V) == (text, False, None)


@pytest.mark.parametrize("text", ["", "  ", "vs. ", "x" * 300, "x" * 600, "Na\x00", "A\nB"])
def test_an_unreadable_reference_is_refused(text: str) -> None:
    with pytest.raises(Refused) as caught:
        canonical_reference(text)
    assert caught.value.faults[0].expected


@pytest.mark.parametrize(
    ("reference", "ion", "same"),
    [
        ("Na+/Na", "Na", True), ("Na/Na+", "Na+", True), ("Zn/Zn2+", "Zn2+", True),
        ("Li/Li+", "Na", False), ("Ag/AgCl", "Na", False), ("SHE", "H", False),
        ("RHE", "H+", True), ("Pt wire", "Na", False), ("Ag/Ag+", "Na", False),
    ],
)  # fmt: skip
def test_own_ion(reference: str, ion: str, same: bool) -> None:
    assert is_same_ion(reference, ion) is same


def test_tabulated_offsets() -> None:
    # CRC Handbook, electrochemical series, and Bard & Faulkner, back cover (both from memory).
    assert convert(0.0, "Li/Li+", "Na/Na+").value == pytest.approx(-0.33, abs=0.005)
    assert convert(0.0, "Zn/Zn2+", "SHE").value == pytest.approx(-0.7618)
    assert convert(0.0, "SCE", "Ag/AgCl").value == pytest.approx(0.044, abs=0.001)
    assert convert(1.0, "Ag/AgCl", "SHE").value == pytest.approx(1.197)


def test_back_and_forth_changes_nothing() -> None:
    there = convert(0.512, "Zn/Zn2+", "SCE").value
    assert convert(there, "SCE", "Zn/Zn2+").value == pytest.approx(0.512, abs=1e-9)


def test_cautions() -> None:
    assert convert(0.1, "Na+/Na", "Na/Na+").caution == ""
    assert convert(0.1, "SHE", "SCE").caution == ""
    assert JUNCTION in convert(0.1, "Na/Na+", "SHE").caution
    assert JUNCTION in convert(0.1, "Ag/AgCl", "Li/Li+").caution
    own = convert(0.1, "Na/Na+", "Li/Li+").caution
    assert SOLVATION in own and JUNCTION not in own
    assert "filling solution" in convert(0.1, "Ag/AgCl", "SHE").caution


@pytest.mark.parametrize(("source", "target"), [("RHE", "SHE"), ("SHE", "Ag/Ag+"), ("foo", "SCE")])
def test_no_offset_no_conversion(source: str, target: str) -> None:
    with pytest.raises(Refused, match="no offset is tabulated"):
        convert(0.1, source, target)


def test_unlike_numbers_are_refused() -> None:
    with pytest.raises(Refused, match="cannot be converted"):
        convert(float("nan"), "SHE", "SCE")


def test_the_same_unknown_reference_converts_to_itself() -> None:
    assert convert(0.3, "Pt wire", "Pt wire").value == 0.3
