"""Weeks, months, quarters and spans of days in the campaign's zone, and when they end."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import UTC, date, datetime, time, timedelta
from typing import Final
from zoneinfo import ZoneInfo

from campaign.errors import refused

EXPECTED: Final = "week, month, quarter or a number of days such as 14d"
MOST: Final = 1000
"""Periods beyond which a longer one is asked for."""

_DAYS = re.compile(r"(\d{1,4})\s*d(?:ays?)?", re.ASCII)


@dataclass(frozen=True)
class Every:
    """How often: `unit` week, month, quarter or day, and `count` of days."""

    unit: str
    count: int = 1


@dataclass(frozen=True)
class Period:
    """One period: its name, its last local day, and its last instant (UTC, fixed width)."""

    name: str
    last_day: str
    end: str


def read_every(text: str) -> Every:
    """Return how often a text asks for. Raises Refused for anything else."""
    word = text.strip().lower()
    if word in ("week", "month", "quarter"):
        return Every(word)
    match = _DAYS.fullmatch(word)
    if match and int(match.group(1)) > 0:
        return Every("day", int(match.group(1)))
    raise refused(
        f"--every is '{text.strip()}', which is not a period; write {EXPECTED}",
        column="every", value=text.strip(), expected=EXPECTED,
    )  # fmt: skip


def periods(first: str, last: str, every: Every, zone: str) -> list[Period]:
    """Return the periods from that of the instant `first` to that of `last` (UTC texts).

    Spans of days are counted from the first day. Raises Refused for more than `MOST`.
    """
    place = ZoneInfo(zone)
    begin = datetime.fromisoformat(first).astimezone(place).date()
    stop = datetime.fromisoformat(last).astimezone(place).date()
    found: list[Period] = []
    for start, following in _spans(begin, every):
        if len(found) == MOST:
            raise refused(
                f"--every {every.count} d would give more than {MOST} points; "
                "ask for a longer period",
                column="every", expected=f"at most {MOST} points",
            )  # fmt: skip
        after = datetime.combine(following, time(), place).astimezone(UTC)
        end = (after - timedelta(microseconds=1)).strftime("%Y-%m-%dT%H:%M:%S.%fZ")
        last_day = following - timedelta(days=1)
        found.append(Period(_name(start, last_day, every), last_day.isoformat(), end))
        if following > stop:
            return found
    return found


def _spans(day: date, every: Every) -> Iterator[tuple[date, date]]:
    """Yield the first day of each period and that of the next one, from the one with `day`."""
    start = _start(day, every)
    while start.year < date.max.year:
        following = _next(start, every)
        yield start, following
        start = following


def _start(day: date, every: Every) -> date:
    if every.unit == "week":
        return day - timedelta(days=day.weekday())
    if every.unit == "month":
        return day.replace(day=1)
    if every.unit == "quarter":
        return day.replace(month=3 * ((day.month - 1) // 3) + 1, day=1)
    return day


def _next(start: date, every: Every) -> date:
    if every.unit in ("week", "day"):
        return start + timedelta(days=7 if every.unit == "week" else every.count)
    months = start.month - 1 + (1 if every.unit == "month" else 3)
    return date(start.year + months // 12, months % 12 + 1, 1)


def _name(start: date, last_day: date, every: Every) -> str:
    if every.unit == "month":
        return f"{start:%Y-%m}"
    if every.unit == "quarter":
        return f"{start.year} Q{(start.month - 1) // 3 + 1}"
    if every.unit == "week":
        year, week, _ = start.isocalendar()
        return f"{year} week {week}"
    return f"to {last_day.isoformat()}"
