"""From the ledger to diagnoses: one read transaction, one snapshot, one answer."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

from campaign.trends.reading import FilterSource, read_campaign


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
