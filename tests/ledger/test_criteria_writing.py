"""Criteria of a campaign: set with a reason, journalled, read back as they stood."""

from dataclasses import asdict

import pytest

from campaign.errors import Refused
from campaign.ledger.checking import check
from campaign.ledger.criteria import LIMITS, Criteria
from campaign.ledger.criteria_writing import (
    MEANINGS,
    criteria_history,
    criteria_in_force,
    read_assignments,
    read_names,
    set_criteria,
)
from campaign.ledger.database import open_database
from campaign.ledger.history import head
from campaign.ledger.settings import criteria
from campaign.ledger.starting import start


@pytest.fixture
def stored(empty_store):
    start(empty_store.where, "UTC", "tester")
    return open_database(empty_store.where)


def stands(database, as_of=None):
    with database.reading() as connection:
        return criteria(connection, as_of)


def entries(database):
    with database.reading() as connection:
        return head(connection)["entry"]


def test_every_criterion_has_limits_and_a_meaning():
    assert set(LIMITS) == set(MEANINGS) == set(asdict(Criteria()))


def test_setting_resetting_and_the_past(stored):
    changed = set_criteria(stored, {"order_margin": 0.2, "ratio_margin": 2.0}, reason="tighter")
    assert changed == {"order_margin": (0.15, 0.2), "ratio_margin": (1.5, 2.0)}
    first = entries(stored)
    set_criteria(stored, {"order_margin": 0.3}, ("ratio_margin",), reason="back", who="Ada")
    assert stands(stored) == Criteria(order_margin=0.3)
    assert stands(stored, first) == Criteria(order_margin=0.2, ratio_margin=2.0)
    assert stands(stored, first - 1) == Criteria()
    with stored.reading() as connection:
        past = criteria_history(connection)
        rows = {row["name"]: row for row in criteria_in_force(connection)}
        assert check(connection) == []
        assert len(criteria_history(connection, first)) == 2
    assert [(e["name"], e["was"], e["is"], e["reason"]) for e in past] == [
        ("order_margin", 0.15, 0.2, "tighter"), ("ratio_margin", 1.5, 2.0, "tighter"),
        ("order_margin", 0.2, 0.3, "back"), ("ratio_margin", 2.0, 1.5, "back"),
    ]  # fmt: skip
    assert (rows["order_margin"]["who"], rows["ratio_margin"]["who"]) == ("Ada", None)


def test_nothing_is_written_without_a_change_or_a_reason(stored):
    before = entries(stored)
    with pytest.raises(Refused, match="nothing would change"):
        set_criteria(stored, {"order_margin": 0.15}, reason="same")
    with pytest.raises(Refused, match="nothing would change"):
        set_criteria(stored, {}, read_names(["all"]), reason="same")
    for reason in (None, "  "):
        with pytest.raises(Refused, match="with a reason"):
            set_criteria(stored, {"order_margin": 0.2}, reason=reason)
    with pytest.raises(Refused, match="both set and reset"):
        set_criteria(stored, {"order_margin": 0.2}, ("order_margin",), reason="both")
    assert entries(stored) == before


def test_a_set_value_equal_to_the_default_is_reset_away(stored):
    set_criteria(stored, {"order_margin": 0.2}, reason="a")
    set_criteria(stored, {"order_margin": 0.15}, reason="b")
    set_criteria(stored, {}, ("order_margin",), reason="c")
    with stored.reading() as connection:
        assert all(row["entry"] is None for row in criteria_in_force(connection))


def test_every_fault_is_told_at_once_with_near_names():
    with pytest.raises(Refused) as caught:
        read_assignments(
            ["ordr_margin=0.2", "ratio_margin=x", "order_margin", "barrier_margin_kJ_mol=-1",
             "potential_window_V=0.2", "potential_window_V=0.3"]
        )  # fmt: skip
    said = [fault.message for fault in caught.value.faults]
    assert len(said) == 5
    assert "near: order_margin" in said[0]
    assert "not a number" in said[1] and "NAME=VALUE" in said[2]
    assert "from 0 to 200" in said[3] and "given twice" in said[4]


@pytest.mark.parametrize("text", ["0.5", "0.6", "nan", "inf", "0"])
def test_error_probability_stays_below_a_half(text):
    with pytest.raises(Refused):
        read_assignments([f"error_probability={text}"])
    assert read_assignments(["error_probability=0.49"]) == {"error_probability": 0.49}


def test_the_working_time_may_carry_its_unit():
    assert read_assignments(["working_time_s=5min"]) == {"working_time_s": 300.0}
