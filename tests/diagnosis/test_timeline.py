"""The timeline: one row a period, settled from where it stays, flips and reopenings marked."""

import itertools
from dataclasses import replace

import pytest

from campaign.diagnosis import summary, timeline
from campaign.diagnosis.timeline import Moment, conclusions, follow
from campaign.ledger.criteria import Criteria

ION = {"concentration": "responds", "solvent": "responds", "barrier": "responds"}
TRANSFER = {"concentration": "unresponsive", "solvent": "unresponsive", "potential": "responds"}
NOTHING: dict[str, str] = {}


@pytest.fixture
def told(says, snapshot_of):
    """Rows for what the evidence says at each of several months, a cell more in each."""

    def build(*months, cells=6):
        def source(snapshot, criteria, electrode, response):
            # leave-one-out takes one reading away: the evidence stays that of the month
            month = max(len(snapshot.readings) - cells, 0)
            said = months[month] if response == "R_ct" else {}
            return {axis: says(word) for axis, word in said.items()}

        moments = []
        for index in range(len(months)):
            rows = [
                {"specimen": f"c{i}", "R_sl": 5.0, "R_ct": 50.0 * (1 + 0.02 * i)}
                for i in range(cells + index)
            ]
            snapshot = snapshot_of(rows)
            moments.append(Moment(f"month {index}", "2026-01-31", snapshot, Criteria()))
        return follow(moments, source)

    return build


def marks(rows):
    return [(row["verdict"], row["settled"], row["mark"]) for row in rows]


def test_settled_from_where_it_stays(told):
    rows = told(NOTHING, TRANSFER, TRANSFER)
    assert [row["verdict"] for row in rows] == ["undetermined", *["electron transfer"] * 2]
    assert [row["settled"] for row in rows] == [False, True, True]
    assert [row["mark"] for row in rows] == ["", "settled", ""]
    (one,) = conclusions(rows)
    assert (one["settled_in"], one["flips"], one["measurements_then"]) == ("month 1", 0, 7)


def stated(*verdicts):
    rows = [
        {"electrode": "A", "period": str(i), "n_measurements": i, "verdict": word,
         "strength": strength}
        for i, (word, strength) in enumerate(verdicts)
    ]  # fmt: skip
    timeline._mark(rows)
    return rows


def test_a_flip_is_marked_also_across_an_undetermined_month():
    rows = stated(
        ("ion transport", "moderate"), ("undetermined", None), ("host", "strong"), ("host", "weak")
    )
    assert marks(rows) == [
        ("ion transport", False, ""), ("undetermined", False, "reopened"),
        ("host", False, "flipped from ion transport"), ("host", False, "reopened"),
    ]  # fmt: skip
    (one,) = conclusions(rows)
    assert (one["settled_in"], one["flips"], one["flipped_in"]) == (None, 1, ["2"])


def test_a_lean_settles_nothing():
    rows = stated(("host", "weak"), ("host", "weak"))
    assert not any(row["settled"] for row in rows)
    assert conclusions(rows)[0]["ever_named"]


def test_the_last_run_of_one_firm_verdict_is_what_is_settled():
    words = [None, ("host", "strong"), ("host", "weak"), ("mixed", "moderate")]
    for path in itertools.product(words, repeat=4):
        rows = stated(*[one or ("undetermined", None) for one in path])
        start = next((i for i, row in enumerate(rows) if row["settled"]), None)
        firm = path[-1] is not None and path[-1][1] != "weak"
        assert (start is not None) == firm
        if start is not None:
            assert {row["verdict"] for row in rows[start:]} == {rows[-1]["verdict"]}
            assert start == 0 or path[start - 1] != path[-1]


def test_what_did_not_change_is_not_diagnosed_again(told, snapshot_of, says, monkeypatch):
    calls = []
    original = timeline.diagnose
    monkeypatch.setattr(
        timeline, "diagnose", lambda *a, **k: calls.append(1) or original(*a, **k)
    )
    snapshot = snapshot_of([{"specimen": f"c{i}", "R_ct": 50.0 + i} for i in range(3)])

    def source(*_):
        return {axis: says(word) for axis, word in TRANSFER.items()}

    strict = replace(Criteria(), order_margin=0.1)
    moments = [Moment(str(i), "", snapshot, c) for i, c in enumerate([Criteria()] * 3 + [strict])]
    rows = follow(moments, source)
    assert len(rows) == 4
    assert len(calls) == 2
    first = snapshot.readings.take(snapshot.readings.specimen == "c0")
    follow([Moment("a", "", snapshot, Criteria()),
            Moment("b", "", replace(snapshot, readings=first), Criteria())], source)  # fmt: skip
    assert len(calls) == 4


def test_no_readings_no_rows(snapshot_of):
    assert follow([Moment("a", "", snapshot_of([]), Criteria())]) == []
    assert summary.diagnose(snapshot_of([]), Criteria()) == []
