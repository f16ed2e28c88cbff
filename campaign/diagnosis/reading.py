"""From the ledger to diagnoses: one read transaction, one snapshot, one answer."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import asdict
from typing import TYPE_CHECKING, Any

from campaign.ledger.criteria import Criteria
from campaign.ledger.database import open_database
from campaign.ledger.filters import Filter
from campaign.ledger.readings import Snapshot
from campaign.ledger.settings import criteria as stored_criteria
from campaign.ledger.snapshot import snapshot

if TYPE_CHECKING:
    from sqlalchemy import Connection

FilterSource = Callable[["Connection"], Filter]


def read_campaign(
    db: str | None, wanted: FilterSource | None = None
) -> tuple[Snapshot, Criteria]:
    """Return what the filter keeps of a campaign, and the criteria that stood then."""
    with open_database(db).reading() as connection:
        asked = wanted(connection) if wanted is not None else Filter()
        return snapshot(connection, asked), stored_criteria(connection, asked.as_of)


def summarise(db: str | None, wanted: FilterSource | None = None) -> dict[str, Any]:
    """Return the rate-limiting-step table as plain data: criteria and a row an electrode."""
    from campaign.diagnosis.headline import with_headline
    from campaign.diagnosis.summary import diagnose, to_row

    taken, criteria = read_campaign(db, wanted)
    rows = [
        with_headline(to_row(found), taken, criteria, found)
        for found in diagnose(taken, criteria)
    ]
    return {"criteria": asdict(criteria), "rows": rows, "left_out": dict(taken.left_out)}


def explained(
    electrode: str, db: str | None, wanted: FilterSource | None = None
) -> dict[str, Any]:
    """Return everything behind one electrode's verdict as plain data.

    Raises Refused for an electrode without readings.
    """
    from campaign.diagnosis.explain import explain, to_dict
    from campaign.diagnosis.headline import with_headline

    taken, criteria = read_campaign(db, wanted)
    found = explain(taken, criteria, electrode)
    row = with_headline(to_dict(found), taken, criteria, found.diagnosis)
    return {**row, "criteria": asdict(criteria)}
