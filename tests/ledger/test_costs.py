"""Costs of bench work: set with a reason, journalled, read back as they stood."""

import pytest

from campaign.errors import Refused
from campaign.ledger.checking import check
from campaign.ledger.costs import NAMES, Costs, change_costs, read_cost_texts, read_costs, set_costs
from campaign.ledger.database import open_database
from campaign.ledger.history import head, history
from campaign.ledger.starting import start


@pytest.fixture
def stored(tmp_path):
    path = str(tmp_path / "campaign.sqlite")
    start(path, "UTC", "tester")
    return open_database(path)


def stands(database, as_of=None):
    with database.reading() as connection:
        return read_costs(connection, as_of)


def entries(database):
    with database.reading() as connection:
        return head(connection)["entry"]


def test_costs_are_set_kept_and_journalled(stored):
    assert stands(stored) == Costs()
    assert set_costs(stored, {"measure": 2.0, "build_cell": 5.0}, "new potentiostat", "Ada") == {
        "measure": (0.5, 2.0), "build_cell": (3.0, 5.0),
    }  # fmt: skip
    first = entries(stored)
    set_costs(stored, {"measure": 1.0}, "faster sweep")
    assert stands(stored) == Costs(measure=1.0, build_cell=5.0)
    assert stands(stored, first) == Costs(measure=2.0, build_cell=5.0)
    with stored.reading() as connection:
        assert check(connection) == []
        told = history(connection)
    assert any(one["reason"] == "new potentiostat" and one["who"] == "Ada" for one in told)


def test_setting_what_stands_is_refused_and_writes_nothing(stored):
    before = entries(stored)
    with pytest.raises(Refused, match="nothing would change"):
        set_costs(stored, {"measure": 0.5}, "no reason at all")
    assert entries(stored) == before


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("measur=2", "near: measure"),
        ("measure", "write NAME=HOURS"),
        ("measure=soon", "not a number of hours"),
        ("measure=-1", "not a number of hours"),
        ("measure=nan", "not a number of hours"),
        ("measure=inf", "not a number of hours"),
        ("measure=1e9", "not a number of hours"),
        ("=2", "names no cost"),
    ],
)
def test_texts_that_are_no_cost_are_refused(text, found):
    with pytest.raises(Refused, match=found):
        read_cost_texts([text])


def test_every_fault_is_reported_at_once():
    with pytest.raises(Refused) as caught:
        read_cost_texts(["measure=2", "measure=3", "tea=1"])
    assert len(caught.value.faults) == 2


def test_a_reason_is_asked_for(stored):
    with pytest.raises(Refused, match="--reason"):
        change_costs(None, ["measure=2"], None)
    assert stands(stored) == Costs()


def test_nothing_may_cost_nothing(stored):
    assert read_cost_texts([f"{name}=0" for name in NAMES]) == dict.fromkeys(NAMES, 0.0)
    set_costs(stored, {"measure": 0.0}, "automated")
    assert stands(stored).measure == 0.0
