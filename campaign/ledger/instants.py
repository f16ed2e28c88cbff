"""Instants: read as people write them, kept as UTC with the offset they were given in."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from datetime import UTC, datetime, timedelta, timezone
from functools import lru_cache
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

from campaign.errors import refused

EXPECTED = "a date and time such as 2026-03-14T09:30+01:00"
EARLIEST, LATEST = 1900, 2200

_FORM = re.compile(
    r"(\d{4})-(\d{1,2})-(\d{1,2})"
    r"(?:[Tt ]\s*(\d{1,2}):(\d{2})(?::(\d{2})(?:[.,](\d{1,9}))?)?"
    r"\s*(Z|z|[+-]\d{2}(?::?\d{2})?)?)?",
    re.ASCII,
)
# The usual form with an offset, which the C reader of datetime takes as it is.
_USUAL = re.compile(
    r"\d{4}-\d\d-\d\d[T ]\d\d:\d\d(?::\d\d(?:\.\d{6})?)?[+-]\d\d:\d\d", re.ASCII
)
_OTHER_ORDER = re.compile(r"\d{1,2}[./-]\d{1,2}[./-]\d{2,4}.*", re.ASCII | re.DOTALL)


class InstantError(ValueError):
    """A text is not an instant; `expected` says what one looks like."""

    def __init__(self, message: str, expected: str = EXPECTED) -> None:
        self.expected = expected
        super().__init__(message)


@dataclass(frozen=True, slots=True)
class Instant:
    """An instant: UTC, the offset [min] it was given with, and whether that was assumed.

    date_only: no time of day was given, 00:00 is taken.
    """

    utc: datetime
    offset_minutes: int
    zone_assumed: bool
    date_only: bool = False


# IANA names begin with a capital; files beside them, such as localtime, do not.
_ZONE_NAME = re.compile(r"[A-Z][A-Za-z0-9_+-]*(?:/[A-Za-z0-9_+-]+)*", re.ASCII)


@lru_cache(maxsize=32)
def _zone(name: str) -> ZoneInfo:
    return ZoneInfo(name)


def check_zone(name: str) -> str:
    """Return an IANA zone name; raise Refused where there is no such zone."""
    from difflib import get_close_matches
    from zoneinfo import available_timezones

    try:
        _zone(name)
        if not _ZONE_NAME.fullmatch(name):
            raise ValueError
    except (ZoneInfoNotFoundError, ValueError, OSError):
        near = get_close_matches(name, sorted(available_timezones()), n=3)
        hint = f"; near: {', '.join(near)}" if near else ""
        raise refused(
            f"there is no time zone '{name}'{hint}",
            column="zone",
            value=name,
            expected="an IANA name such as UTC or Europe/Paris",
        ) from None
    return name


def parse_instant(given: str | datetime, zone: str) -> Instant:
    """Return the instant a text or a spreadsheet's date states.

    A time without offset is read in `zone`. Raises InstantError for anything else than
    year-month-day, for local times that do not exist or exist twice, and for years outside
    1900 to 2200.
    """
    if isinstance(given, datetime):
        return _placed(given, zone)
    text = given.strip()
    if _USUAL.fullmatch(text):
        return _usual(text, zone)
    match = _FORM.fullmatch(text)
    if match is None:
        if _OTHER_ORDER.fullmatch(text):
            raise InstantError("day and month cannot be told apart; write year-month-day")
        raise InstantError("it is not a date and time")
    year, month, day, hour, minute, second, fraction, offset = match.groups()
    microsecond = int((fraction or "0").ljust(6, "0")[:6])
    try:
        local = datetime(
            int(year), int(month), int(day), int(hour or 0), int(minute or 0), int(second or 0),
            microsecond,
        )  # fmt: skip
    except ValueError:
        raise InstantError("there is no such day or time") from None
    if offset:
        local = local.replace(tzinfo=_offset(offset))
    placed = _placed(local, zone)
    return replace(placed, date_only=True) if hour is None else placed


def _usual(text: str, zone: str) -> Instant:
    _check_offset(text[-6:])
    try:
        return _placed(datetime.fromisoformat(text), zone)
    except ValueError as error:
        if isinstance(error, InstantError):
            raise
        raise InstantError("there is no such day or time") from None


def _check_offset(text: str) -> None:
    if text[1:3] > "14" or text[-2:] > "59":
        raise InstantError(f"there is no offset {text}")


def _offset(text: str) -> timezone:
    if text in ("Z", "z"):
        return UTC
    digits = text[1:].replace(":", "").ljust(4, "0")
    _check_offset(f"{text[0]}{digits[:2]}:{digits[2:]}")
    hours, minutes = int(digits[:2]), int(digits[2:])
    sign = -1 if text[0] == "-" else 1
    return timezone(sign * timedelta(hours=hours, minutes=minutes))


def _placed(local: datetime, zone: str) -> Instant:
    if not EARLIEST <= local.year <= LATEST:
        raise InstantError(f"the year is outside {EARLIEST} to {LATEST}")
    assumed = local.tzinfo is None
    if assumed:
        local = _in_zone(local, zone)
    offset = local.utcoffset() or timedelta(0)
    return Instant(local.astimezone(UTC), int(offset.total_seconds() // 60), assumed)


def _in_zone(local: datetime, zone: str) -> datetime:
    placed = local.replace(tzinfo=_zone(zone))
    if placed.utcoffset() != placed.replace(fold=1).utcoffset():
        back = placed.astimezone(UTC).astimezone(_zone(zone)).replace(tzinfo=None)
        why = "exists twice" if back == local else "does not exist"
        raise InstantError(
            f"this local time {why} in {zone}, where the clock changes; give its offset"
        )
    return placed


def format_utc(instant: datetime) -> str:
    """Return the fixed-width UTC form, whose text order is time order."""
    return instant.astimezone(UTC).isoformat(timespec="microseconds")[:26] + "Z"


def show_local(utc_text: str, offset_minutes: int) -> str:
    """Return a stored instant as it was given: local time with its offset."""
    utc = datetime.fromisoformat(utc_text)
    local = utc.astimezone(timezone(timedelta(minutes=offset_minutes)))
    exact = local.second or local.microsecond
    return local.isoformat(timespec="auto" if exact else "minutes")
