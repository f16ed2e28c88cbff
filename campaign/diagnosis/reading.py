"""From the ledger to diagnoses: one read transaction, one snapshot, one answer."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import asdict, replace
from datetime import UTC, datetime
from typing import TYPE_CHECKING, Any

from campaign.errors import refused
from campaign.ledger.database import open_database
from campaign.ledger.filters import Filter
from campaign.ledger.instants import format_utc
from campaign.ledger.settings import criteria as stored_criteria
from campaign.ledger.snapshot import snapshot
from campaign.trends.reading import FilterSource, read_campaign

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from campaign.diagnosis.timeline import Moment
    from campaign.ledger.periods import Every


def summarise(db: str | None, wanted: FilterSource | None = None) -> dict[str, Any]:
    """Return the rate-limiting-step table as plain data: criteria and a row an electrode."""
    from campaign.diagnosis.headline import with_headline
    from campaign.diagnosis.summary import diagnose, to_row

    taken, criteria = read_campaign(db, wanted)
    rows = [
        with_headline(to_row(found), taken, criteria, found) for found in diagnose(taken, criteria)
    ]
    return {"criteria": asdict(criteria), "rows": rows, "left_out": dict(taken.left_out)}


def explained(electrode: str, db: str | None, wanted: FilterSource | None = None) -> dict[str, Any]:
    """Return everything behind one electrode's verdict as plain data.

    Raises Refused for an electrode without readings.
    """
    from campaign.diagnosis.explain import explain, to_dict
    from campaign.diagnosis.headline import with_headline

    taken, criteria = read_campaign(db, wanted)
    found = explain(taken, criteria, electrode)
    row = with_headline(to_dict(found), taken, criteria, found.diagnosis)
    return {**row, "criteria": asdict(criteria)}


CLOCKS = ("logged", "measured")


def followed(
    db: str | None,
    wanted: FilterSource | None = None,
    *,
    every: str = "month",
    clock: str | None = None,
) -> dict[str, Any]:
    """Return the timeline as plain data: rows, conclusions, the clock and why it was taken.

    clock: logged rebuilds the campaign and its criteria as of the last entry of each period;
    measured takes what stands now and looks at the readings measured by then. Without one,
    measured is taken where the imports of one day hold over half the measurements.
    Raises Refused for an unknown clock or period.
    """
    from campaign.diagnosis.timeline import conclusions, follow
    from campaign.ledger.periods import read_every
    from campaign.ledger.settings import zone

    if clock is not None and clock not in CLOCKS:
        raise refused(
            f"there is no clock '{clock}'; logged or measured is expected",
            column="clock", value=clock, expected="logged or measured",
        )  # fmt: skip
    spacing = read_every(every)
    with open_database(db).reading() as connection:
        asked = wanted(connection) if wanted is not None else Filter()
        chosen, because = _clock(connection, clock, asked)
        moments = _moments(connection, asked, chosen, spacing, zone(connection))
        rows = follow(moments)
        criteria = stored_criteria(connection, asked.as_of)
    return {
        "rows": rows,
        "conclusions": conclusions(rows),
        "clock": chosen,
        "clock_because": because,
        "every": every,
        "criteria": asdict(criteria),
    }


def _clock(connection: Connection, clock: str | None, asked: Filter) -> tuple[str, str]:
    from campaign.ledger.occasions import largest_import

    if clock is not None:
        return clock, "as asked"
    bulk = largest_import(connection, asked.as_of)
    held = f"{bulk.count} of {bulk.total} measurements"
    if bulk.over_half:
        return "measured", f"the imports of {bulk.day} hold {held}"
    return "logged", f"no day's imports hold over half the measurements ({held} at most)"


def _moments(
    connection: Connection, asked: Filter, clock: str, every: Every, zone_name: str
) -> Iterator[Moment]:
    from campaign.diagnosis.timeline import Moment
    from campaign.ledger.occasions import logged_from
    from campaign.ledger.periods import periods
    from campaign.ledger.selecting import entry_at

    if clock == "logged":
        span = logged_from(connection, asked.as_of)
        for period in periods(*span, every, zone_name) if span else ():
            entry = entry_at(connection, period.end)
            entry = entry if asked.as_of is None else min(entry, asked.as_of)
            then = replace(asked, as_of=entry)
            yield Moment(
                period.name, period.last_day, snapshot(connection, then),
                stored_criteria(connection, entry),
            )  # fmt: skip
        return
    whole, criteria = snapshot(connection, asked), stored_criteria(connection, asked.as_of)
    measured = whole.readings.measured_at
    if not len(measured):
        return
    first, last = (format_utc(_instant(one)) for one in (measured.min(), measured.max()))
    for period in periods(first, last, every, zone_name):
        end = datetime.fromisoformat(period.end).timestamp()
        part = replace(whole, readings=whole.readings.take(measured <= end))
        yield Moment(period.name, period.last_day, part, criteria)


def _instant(seconds: float) -> datetime:
    return datetime.fromtimestamp(float(seconds), UTC)
