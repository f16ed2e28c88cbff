"""Periods of a campaign: their ends in the campaign's zone, and durations as written."""

from datetime import datetime

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.errors import Refused
from campaign.ledger.durations import read_duration, read_durations
from campaign.ledger.periods import MOST, Every, periods, read_every

FIRST, LAST = "2026-02-17T09:00:00.000000Z", "2026-05-02T09:00:00.000000Z"


def names(every, first=FIRST, last=LAST, zone="Europe/Paris"):
    return [one.name for one in periods(first, last, read_every(every), zone)]


def test_months_weeks_quarters_and_days():
    assert names("month") == ["2026-02", "2026-03", "2026-04", "2026-05"]
    assert names("quarter") == ["2026 Q1", "2026 Q2"]
    assert names("30d") == ["to 2026-03-18", "to 2026-04-17", "to 2026-05-17"]
    weeks = names("week")
    # 17 February 2026 is a Tuesday of ISO week 8 (date arithmetic of the calendar).
    assert (weeks[0], weeks[-1], len(weeks)) == ("2026 week 8", "2026 week 18", 11)


def test_a_month_ends_at_midnight_of_the_zone_and_follows_the_clock_change():
    february, march, *_ = periods(FIRST, LAST, Every("month"), "Europe/Paris")
    assert february.end == "2026-02-28T22:59:59.999999Z"
    assert march.end == "2026-03-31T21:59:59.999999Z"
    assert march.last_day == "2026-03-31"


def test_an_instant_belongs_to_the_local_day():
    late = "2026-02-28T23:30:00.000000Z"
    assert names("month", late, late) == ["2026-03"]
    assert names("month", late, late, "America/New_York") == ["2026-02"]


@pytest.mark.parametrize("text", ["", "fortnight", "0d", "-3d", "3", "1.5d", "99999d"])
def test_other_periods_are_refused(text):
    with pytest.raises(Refused, match="is not a period"):
        read_every(text)


def test_more_periods_than_anyone_reads_are_refused():
    with pytest.raises(Refused, match=f"more than {MOST} points"):
        periods("2020-01-01T00:00:00.000000Z", LAST, Every("day"), "UTC")


ZONES = st.sampled_from(["UTC", "Europe/Paris", "America/Sao_Paulo", "Asia/Kolkata"])
INSTANTS = st.datetimes(datetime(1990, 1, 1), datetime(2060, 1, 1))


@settings(max_examples=80)
@given(st.lists(INSTANTS, min_size=2, max_size=2), ZONES, st.sampled_from(["month", "90d", "week"]))
def test_every_instant_of_the_range_falls_in_one_period(instants, zone, every):
    texts = sorted(f"{one:%Y-%m-%dT%H:%M:%S.%f}Z" for one in instants)
    try:
        found = periods(*texts, read_every(every), zone)
    except Refused:
        return
    ends = [one.end for one in found]
    assert ends == sorted(set(ends))
    assert ends[-1] >= texts[1]
    assert len(ends) == 1 or ends[-2] < texts[1]


@pytest.mark.parametrize(
    ("text", "seconds"),
    [("0.1s", 0.1), ("10", 10), ("5 min", 300), ("200ms", 0.2), ("2h", 7200), ("1e3 s", 1000),
     (".5 s", 0.5), ("1d", 86400)],
)  # fmt: skip
def test_durations_are_read_with_their_unit(text, seconds):
    assert read_duration(text, "--at") == pytest.approx(seconds, rel=1e-12)


@pytest.mark.parametrize("text", ["", "s", "1 year", "-1s", "0s", "inf", "nan s", "1e12 s", "1,5s"])
def test_other_durations_are_refused_by_name(text):
    with pytest.raises(Refused, match="--at is"):
        read_duration(text, "--at")


def test_times_come_in_order_each_once():
    assert read_durations("10s, 0.1s,10 s;1min,", "--at") == (0.1, 10.0, 60.0)
    with pytest.raises(Refused, match="names no time"):
        read_durations(" , ", "--at")
