"""Instants as people write them. Zone rules are those of the IANA database (tzdata)."""

from datetime import UTC, datetime, timedelta, timezone

import pytest
from hypothesis import given
from hypothesis import strategies as st

from campaign.errors import Refused
from campaign.ledger.instants import (
    InstantError,
    check_zone,
    format_utc,
    parse_instant,
    show_local,
)

ZONE = "Europe/Paris"


@pytest.mark.parametrize(
    ("text", "utc", "offset", "assumed"),
    [
        ("2026-03-14T09:30+01:00", "2026-03-14T08:30:00.000000Z", 60, False),
        ("2026-03-14T09:30:15.25+01:00", "2026-03-14T08:30:15.250000Z", 60, False),
        ("2026-03-14T09:30:15,25+0100", "2026-03-14T08:30:15.250000Z", 60, False),
        ("2026-03-14T09:30+01", "2026-03-14T08:30:00.000000Z", 60, False),
        ("2026-03-14T09:30:00Z", "2026-03-14T09:30:00.000000Z", 0, False),
        ("2026-03-14 09:30z", "2026-03-14T09:30:00.000000Z", 0, False),
        ("2026-03-14 09:30:00 -03:30", "2026-03-14T13:00:00.000000Z", -210, False),
        ("2026-03-14 09:30", "2026-03-14T08:30:00.000000Z", 60, True),
        ("2026-07-14 09:30", "2026-07-14T07:30:00.000000Z", 120, True),
        ("2026-07-14", "2026-07-13T22:00:00.000000Z", 120, True),
        ("  2026-3-4 9:05  ", "2026-03-04T08:05:00.000000Z", 60, True),
        ("2024-02-29 12:00", "2024-02-29T11:00:00.000000Z", 60, True),
    ],
)
def test_texts_are_read(text, utc, offset, assumed):
    instant = parse_instant(text, ZONE)
    assert format_utc(instant.utc) == utc
    assert (instant.offset_minutes, instant.zone_assumed) == (offset, assumed)


def test_a_date_alone_is_said_to_be_one():
    assert parse_instant("2026-07-14", ZONE).date_only
    assert not parse_instant("2026-07-14 00:00", ZONE).date_only


@pytest.mark.parametrize(
    ("text", "why"),
    [
        ("03/04/2026", "day and month"),
        ("13/04/2026", "day and month"),
        ("3.4.2026 10:00", "day and month"),
        ("04-03-26", "day and month"),
        ("2026-02-30", "no such day"),
        ("2026-03-14T24:00+01:00", "no such day"),
        ("2026-13-01", "no such day"),
        ("2026-03-14T09:60Z", "no such day"),
        ("2026-03-14T09:30+15:00", "no offset"),
        ("2026-03-14T09:30+01:75", "no offset"),
        ("1899-12-31", "outside"),
        ("2201-01-01", "outside"),
        ("20260314", "not a date"),
        ("2026-W11-6", "not a date"),
        ("yesterday", "not a date"),
        ("", "not a date"),
        ("46085.4", "not a date"),
        ("2026-03-14T09", "not a date"),
        ("٢٠٢٦-03-14", "not a date"),
    ],
)
def test_other_texts_are_refused(text, why):
    with pytest.raises(InstantError, match=why) as caught:
        parse_instant(text, ZONE)
    assert "2026-03-14T09:30+01:00" in caught.value.expected


def test_clock_changes_are_refused_without_offset():
    """Paris 2026: forward on 29 March 02:00 -> 03:00, back on 25 October 03:00 -> 02:00 (IANA)."""
    with pytest.raises(InstantError, match="does not exist"):
        parse_instant("2026-03-29 02:30", ZONE)
    with pytest.raises(InstantError, match="exists twice"):
        parse_instant("2026-10-25 02:30", ZONE)
    twice = [parse_instant(f"2026-10-25 02:30{o}", ZONE).utc for o in ("+02:00", "+01:00")]
    assert twice[1] - twice[0] == timedelta(hours=1)
    assert parse_instant("2026-03-29 03:00", ZONE).offset_minutes == 120


def test_a_spreadsheet_date_takes_the_zone():
    instant = parse_instant(datetime(2026, 3, 14, 9, 30), ZONE)
    assert (format_utc(instant.utc), instant.zone_assumed) == ("2026-03-14T08:30:00.000000Z", True)
    aware = datetime(2026, 3, 14, 9, 30, tzinfo=timezone(timedelta(hours=5, minutes=45)))
    assert parse_instant(aware, ZONE).offset_minutes == 345


instants = st.datetimes(
    datetime(1901, 1, 1), datetime(2199, 12, 30), timezones=st.just(UTC)
)


@given(instants, instants, st.integers(-14 * 60, 14 * 60))
def test_text_order_is_time_order_and_local_text_reads_back(one, two, offset):
    assert (format_utc(one) < format_utc(two)) == (one < two)
    assert len(format_utc(one)) == 27
    shown = show_local(format_utc(one), offset)
    back = parse_instant(shown, "UTC")
    assert (back.utc, back.offset_minutes, back.zone_assumed) == (one, offset, False)


@given(st.text(max_size=40))
def test_any_text_is_read_or_refused(text):
    try:
        instant = parse_instant(text, ZONE)
    except InstantError:
        return
    assert instant.utc.tzinfo is UTC


@pytest.mark.parametrize("name", ["UTC", "Europe/Paris", "America/Argentina/Buenos_Aires"])
def test_zones_of_the_database_are_taken(name):
    assert check_zone(name) == name


@pytest.mark.parametrize(
    "name",
    ["Europe/Pari", "../../etc/passwd", "/etc/localtime", "localtime", "", "CET\0", "a" * 999],
)
def test_other_zones_are_refused(name):
    with pytest.raises(Refused, match="no time zone"):
        check_zone(name)


def test_a_near_zone_is_named():
    with pytest.raises(Refused, match="Europe/Paris"):
        check_zone("Europe/Pari")
