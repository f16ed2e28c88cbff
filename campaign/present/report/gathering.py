"""What a report tells, collected from one state of the campaign."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass, replace
from datetime import UTC, datetime
from typing import TYPE_CHECKING, Any

from campaign.diagnosis.budget import RESPONSE_OF, Budget
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends.curves import Curve
from campaign.trends.reading import FilterSource
from campaign.trends.results import AxisResult

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from campaign.diagnosis.summary import EvidenceSource
    from campaign.diagnosis.wording import Decider

Row = Mapping[str, Any]

AXES = ("concentration", "solvent", "additive", "temperature", "potential", "age")


@dataclass(frozen=True)
class Trend:
    """One trend of one electrode's dominant term: its estimates and their curves."""

    result: AxisResult
    curves: tuple[Curve, ...]


@dataclass(frozen=True)
class Content:
    """Everything a report shows.

    explanations, trends, over_time: by electrode. coverage, proposals, imports: rows as the
    commands of these names give them. left_out: counts by reason. head: of the journal.
    """

    written: datetime
    database: str
    zone: str
    stated: Mapping[str, str]
    criteria: Row
    head: Row | None
    counts: Mapping[str, int]
    explanations: Mapping[str, Row]
    trends: Mapping[str, tuple[Trend, ...]]
    over_time: Mapping[str, tuple[Budget, ...]]
    coverage: Sequence[Row]
    proposals: Sequence[Row]
    electrolytes: Sequence[Row]
    cautions: Sequence[str]
    left_out: Mapping[str, int]


def gather(
    db: str | None, wanted: FilterSource | None, stated: Mapping[str, str] | None = None
) -> Content:
    """Return the content of a report on what a filter keeps. Raises Refused."""
    from campaign.diagnosis.coverage import coverage
    from campaign.diagnosis.next_reading import Asked, next_steps
    from campaign.diagnosis.overtime import budgets_over_time
    from campaign.ledger import history, selecting
    from campaign.ledger.database import open_database
    from campaign.ledger.filters import Filter
    from campaign.ledger.settings import criteria as stored_criteria
    from campaign.ledger.settings import zone
    from campaign.ledger.snapshot import snapshot

    database = open_database(db)
    with database.reading() as connection:
        asked = wanted(connection) if wanted is not None else Filter()
        taken, criteria = snapshot(connection, asked), stored_criteria(connection, asked.as_of)
        head, where = history.head(connection), zone(connection)
        used = set(taken.readings.electrolyte.tolist())
        listed = selecting.list_electrolytes(connection, Filter(as_of=asked.as_of))
        electrolytes = [row for row in listed if row["electrolyte"] in used]
        cautions = _cautions(connection, sorted(used))
    labels = sorted(set(taken.readings.electrode.tolist()))
    source = _remembered()
    explanations = {label: _explained(taken, criteria, label, source) for label in labels}
    proposals = next_steps(db, wanted, Asked(), labels) if labels else None
    return Content(
        written=datetime.now(UTC),
        database=database.where.shown,
        zone=where,
        stated=dict(stated or {}),
        criteria=asdict(criteria),
        head=head,
        counts=_counts(taken),
        explanations=explanations,
        trends={label: _trends(taken, criteria, label, explanations[label]) for label in labels},
        over_time=budgets_over_time(taken, criteria),
        coverage=[one.as_dict() for one in coverage(taken, criteria)],
        proposals=[] if proposals is None else proposals.as_dict()["rows"],
        electrolytes=electrolytes,
        cautions=cautions,
        left_out=dict(taken.left_out),
    )


def _counts(taken: Snapshot) -> dict[str, int]:
    r = taken.readings
    return {
        "electrodes": len(set(r.electrode.tolist())),
        "electrolytes": len(set(r.electrolyte.tolist())),
        "cells": len(set(r.cell.tolist())),
        "specimens": len(set(r.specimen.tolist())),
        "measurements": len(r),
    }


def _cautions(connection: Connection, recipes: Sequence[str]) -> list[str]:
    from campaign.chemistry.recipes import parse_recipe
    from campaign.chemistry.species import cautions
    from campaign.ledger.book import stored_species

    own = stored_species(connection)
    names = [part.species for text in recipes for part in parse_recipe(text, own).components]
    return list(cautions(list(dict.fromkeys(names)), own))


def _remembered() -> EvidenceSource:
    """Return a source of findings that works out none twice for the same readings."""
    from campaign.diagnosis.lazy import trend_evidence

    known: dict[tuple[str, str, bytes], Mapping[str, Decider]] = {}

    def source(
        snapshot: Snapshot, criteria: Criteria, electrode: str, response: str
    ) -> Mapping[str, Decider]:
        key = (electrode, response, snapshot.readings.measurement.tobytes())
        if key not in known:
            known[key] = trend_evidence(snapshot, criteria, electrode, response)
        return known[key]

    return source


def _explained(
    taken: Snapshot, criteria: Criteria, label: str, source: EvidenceSource
) -> dict[str, Any]:
    """Return what `explain` tells of an electrode, without its slow trials."""
    from campaign.diagnosis.explain import explain, to_dict
    from campaign.diagnosis.headline import with_headline

    found = explain(taken, criteria, label, evidence=source, robust=False)
    return with_headline(to_dict(found), taken, criteria, found.diagnosis)


def _trends(
    taken: Snapshot, criteria: Criteria, label: str, explained: Row
) -> tuple[Trend, ...]:
    """Return the trends of the dominant term along every axis that has an estimate."""
    from importlib import import_module

    from campaign.diagnosis.summary import of_electrode
    from campaign.trends import curves

    if explained["dominant"] is None:
        return ()
    response = RESPONSE_OF[explained["dominant"]]
    part = replace(of_electrode(taken, label), left_out={})
    found = []
    for axis in AXES:
        if axis in curves.AXES:
            trend = Trend(*curves.curves(axis, part, criteria, response))
        else:
            module = import_module(f"campaign.trends.{axis}")
            trend = Trend(module.estimate(part, criteria, response), ())
        if trend.result.estimates:
            found.append(trend)
    return tuple(found)
