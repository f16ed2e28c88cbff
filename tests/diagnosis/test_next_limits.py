"""Nothing is proposed outside declared limits, or outside what was measured without any."""

import importlib.util
from pathlib import Path

import pytest

from campaign.chemistry.cautions import CLOSING
from campaign.diagnosis.next_cells import Condition, NewCell
from campaign.diagnosis.next_limits import Limits, cautions_of
from campaign.ledger.readings import ElectrolyteFacts

_spec = importlib.util.spec_from_file_location(
    "next_campaign", Path(__file__).parent / "next_campaign.py"
)
made = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(made)

PC = "1 mol/L NaPF6 in PC"


def at(T=298.15, E=3.0, reference="Na/Na+"):
    return Condition(T, E, reference)


def test_without_declared_limits_only_the_measured_range_is_allowed():
    limits = Limits(made.snapshot(made.rows(potentials=(3.0, 3.2))), "film")
    assert limits.allows(PC, at(278.15)) and limits.allows(PC, at(318.15, 3.2))
    assert not limits.allows(PC, at(325.0))
    assert not limits.allows(PC, at(260.0))
    assert not limits.allows(PC, at(E=3.3))
    assert not limits.allows(PC, at(E=3.0, reference="SCE"))
    assert not limits.allows("1 mol/L NaPF6 in DMC", at())


def test_a_declared_temperature_limit_holds_to_the_degree():
    campaign = made.snapshot(
        made.rows(),
        [ElectrolyteFacts(PC, minimum_temperature_K=263.15, maximum_temperature_K=343.15)],
        maximum_temperature_K=333.15,
    )
    limits = Limits(campaign, "film")
    assert limits.allows(PC, at(333.15)) and not limits.allows(PC, at(333.5))
    assert limits.allows(PC, at(263.15))
    # the electrode's own limit is the lower one; the other electrolyte has none declared
    assert limits.temperatures(PC) == (263.15, 333.15)
    assert limits.temperatures("0.1 mol/L NaPF6 in PC") == (278.15, 318.15)


def test_a_set_temperature_may_lie_a_little_outside_what_it_was_measured_as():
    rows = made.rows(concentrations=(1.0,))
    for row in rows:
        row["temperature_K"] -= 0.3
    limits = Limits(made.snapshot(rows, maximum_temperature_K=330.0), "film")
    assert limits.allows(PC, at(318.15)) and not limits.allows(PC, at(319.0))


def test_a_limit_below_what_was_measured_takes_it_back():
    limits = Limits(made.snapshot(made.rows(), maximum_temperature_K=303.15), "film")
    assert limits.allows(PC, at(298.15)) and not limits.allows(PC, at(318.15))


def test_the_window_holds_on_its_own_scale_and_on_another():
    campaign = made.snapshot(
        made.rows(), window_low_V=2.5, window_high_V=3.5, window_reference="Na/Na+"
    )
    limits = Limits(campaign, "film")
    assert limits.allows(PC, at(E=3.5)) and not limits.allows(PC, at(E=3.501))
    # Na/Na+ lies 2.71 V below SHE (CRC Handbook): 0.8 V vs SHE is 3.51 V vs Na/Na+
    low, high = limits.potentials("SHE")
    assert low == pytest.approx(2.5 - 2.71, abs=0.01)
    assert high == pytest.approx(3.5 - 2.71, abs=0.01)


def test_an_unknown_scale_falls_back_on_what_was_measured():
    campaign = made.snapshot(
        made.rows(reference="gold wire"), window_low_V=0.0, window_high_V=9.0,
        window_reference="Na/Na+",
    )  # fmt: skip
    limits = Limits(campaign, "film")
    assert limits.potentials("gold wire") == (3.0, 3.0)


def cell(electrolyte, T=298.15, reference="Na/Na+"):
    return NewCell("film", electrolyte, (at(T, reference=reference),))


def test_fluoride_salt_flash_point_and_alkali_metal_are_cautioned():
    # flash point of DMC 18 degC (Xu, Chem. Rev. 104 (2004) 4303, table 1; from memory)
    lines = cautions_of([cell("1 mol/L NaPF6 in DMC")])
    assert lines[0].startswith("DMC: 25 degC is at or above its flash point of 18 degC")
    assert any("hydrogen fluoride" in one and "NaPF6" in one for one in lines)
    assert any(one.startswith("Na: alkali metal") for one in lines)
    assert lines[-1] == CLOSING


def test_perchlorate_is_cautioned_and_cold_cells_are_below_the_flash_point():
    lines = cautions_of([cell("1 mol/L NaClO4 in DMC", 278.15, "SCE")])
    assert any("perchlorate" in one for one in lines)
    assert not any("flash point" in one for one in lines)
    assert not any("alkali metal" in one for one in lines)


def test_each_caution_stands_once():
    lines = cautions_of([cell(PC), cell(PC), cell(PC, 318.15)])
    assert len(lines) == len(set(lines))
