"""From the ledger to the trends of one axis: one read transaction, one snapshot, one answer."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from importlib import import_module
from typing import TYPE_CHECKING

import numpy as np

from campaign.errors import refused
from campaign.ledger.criteria import Criteria
from campaign.ledger.database import open_database
from campaign.ledger.filters import Filter
from campaign.ledger.readings import Snapshot
from campaign.ledger.settings import criteria as stored_criteria
from campaign.ledger.snapshot import snapshot
from campaign.trends.results import AxisResult, LeftOut

if TYPE_CHECKING:
    from sqlalchemy import Connection

FilterSource = Callable[["Connection"], Filter]

AXES = ("concentration", "solvent", "additive", "potential", "temperature", "age")


def read_campaign(db: str | None, wanted: FilterSource | None = None) -> tuple[Snapshot, Criteria]:
    """Return what the filter keeps of a campaign, and the criteria that stood then."""
    with open_database(db).reading() as connection:
        asked = wanted(connection) if wanted is not None else Filter()
        return snapshot(connection, asked), stored_criteria(connection, asked.as_of)


def rebuilt(
    axis: str,
    db: str | None,
    wanted: FilterSource | None = None,
    *,
    response: str = "R_ct",
    porous: bool = True,
    scale: str | None = None,
    without: Sequence[int] = (),
) -> AxisResult:
    """Return the trends of one axis.

    porous: solve R_ct from the apparent value of porous electrodes first. scale: compare
    potentials on this reference's scale. without: record numbers of measurements to leave out.
    Raises Refused for an unknown axis, response or measurement.
    """
    if axis not in AXES:
        raise refused(
            f"there is no axis '{axis}'; one of {', '.join(AXES)} is expected",
            value=axis,
            expected=", ".join(AXES),
        )
    taken, criteria = read_campaign(db, wanted)
    withheld = len(without)
    if withheld:
        taken = _without(taken, without)
    module = import_module(f"campaign.trends.{axis}")
    result: AxisResult = module.estimate(taken, criteria, response, porous=porous, scale=scale)
    extra = [LeftOut(reason, count) for reason, count in taken.left_out.items()]
    if withheld:
        extra.append(LeftOut("left out with --without", withheld))
    return replace(result, left_out=(*result.left_out, *extra))


def _without(taken: Snapshot, without: Sequence[int]) -> Snapshot:
    known = set(taken.readings.measurement.tolist())
    for number in without:
        if number not in known:
            raise refused(
                f"measurement {number} is not among those looked at; 'campaign list measurements' "
                "shows them",
                value=number,
                expected="a measurement's record number",
            )
    keep = ~np.isin(taken.readings.measurement, np.array(list(without), dtype=np.int64))
    return replace(taken, readings=taken.readings.take(keep))
