"""From the ledger to diagnoses: one read transaction, one snapshot, one answer."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
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

    from campaign.diagnosis.summary import Diagnosis
    from campaign.diagnosis.timeline import Moment
    from campaign.ledger.criteria import Criteria
    from campaign.ledger.periods import Every
    from campaign.ledger.readings import Snapshot


def summarise(
    db: str | None,
    wanted: FilterSource | None = None,
    *,
    by: str | None = None,
    times_s: Sequence[float] = (),
) -> dict[str, Any]:
    """Return the rate-limiting-step table as plain data: criteria and a row an electrode.

    by: salt, solvents or temperature gives a row each. times_s [s]: the budget at these
    times as well, in `budget_by_time`. Raises Refused for an unknown grouping.
    """
    from campaign.diagnosis.headline import with_headline
    from campaign.diagnosis.summary import diagnose, to_row

    taken, criteria = read_campaign(db, wanted)
    rows = []
    for found in diagnose(taken, criteria, by=by):
        row = with_headline(to_row(found), taken, criteria, found)
        if times_s:
            row["budget_by_time"] = _over_time(taken, criteria, found, times_s)
        rows.append(row)
    return {"criteria": asdict(criteria), "rows": rows, "left_out": dict(taken.left_out)}


def _over_time(
    taken: Snapshot, criteria: Criteria, found: Diagnosis, times_s: Sequence[float]
) -> list[dict[str, Any]]:
    from campaign.diagnosis.budget import budgets
    from campaign.diagnosis.summary import budget_row, part_of
    from campaign.trends.results import plain

    part = part_of(taken, criteria, found)
    facts = part.electrodes.get(found.electrode)
    return [plain(budget_row(one)) for one in budgets(part.readings, criteria, facts, times_s)]


def explained(
    electrode: str,
    db: str | None,
    wanted: FilterSource | None = None,
    *,
    times_s: Sequence[float] = (),
) -> dict[str, Any]:
    """Return everything behind one electrode's verdict as plain data.

    times_s [s]: when the budget is told, four times around the default working time where
    none is given. Raises Refused for an electrode without readings.
    """
    from campaign.diagnosis.explain import TIMES_s, explain, to_dict
    from campaign.diagnosis.headline import with_headline

    taken, criteria = read_campaign(db, wanted)
    found = explain(taken, criteria, electrode, times_s=times_s or TIMES_s)
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
