"""From the ledger to the trends of one axis: one read transaction, one snapshot, one answer."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from importlib import import_module
from typing import TYPE_CHECKING

import numpy as np

from campaign.chemistry.references import canonical_reference, is_known_reference
from campaign.errors import refused
from campaign.ledger.criteria import Criteria
from campaign.ledger.database import open_database
from campaign.ledger.filters import Filter
from campaign.ledger.readings import Snapshot
from campaign.ledger.settings import criteria as stored_criteria
from campaign.ledger.snapshot import snapshot
from campaign.trends.results import Adjusted, AxisResult, LeftOut, SeriesEstimate

if TYPE_CHECKING:
    from sqlalchemy import Connection

FilterSource = Callable[["Connection"], Filter]

# What only one axis offers, by the name of its argument there.
MORE = {
    "activity": "concentration",
    "age_adjusted": "concentration",
    "donor": "solvent",
    "together": "potential",
}

# The axes whose estimate pores distort, and the names of that estimate and its interval.
ESTIMATE = {"concentration": ("order", "order_ci"), "temperature": ("Ea_kJ_mol", "Ea_ci")}

AXES = ("concentration", "solvent", "additive", "potential", "temperature", "age")


def read_campaign(db: str | None, wanted: FilterSource | None = None) -> tuple[Snapshot, Criteria]:
    """Return what the filter keeps of a campaign, and the criteria that stood then."""
    with open_database(db).reading() as connection:
        asked = wanted(connection) if wanted is not None else Filter()
        return snapshot(connection, asked), stored_criteria(connection, asked.as_of)


@dataclass(frozen=True)
class Looked:
    """What a trend is rebuilt from, every option read and checked.

    withheld: how many readings `without` left out. more: arguments of the axis alone.
    """

    taken: Snapshot
    criteria: Criteria
    scale: str | None
    withheld: int
    more: Mapping[str, bool]


def look(
    axis: str,
    db: str | None,
    wanted: FilterSource | None,
    *,
    scale: str | None,
    without: Sequence[str],
    more: Mapping[str, bool] | None,
) -> Looked:
    """Return what the options of `rebuilt` ask to look at. Raises Refused as it does."""
    chosen = _chosen(axis, more or {})
    if scale is not None:
        scale = canonical_reference(scale)
        if not is_known_reference(scale):
            raise refused(
                f"potentials cannot be placed on the scale '{scale}': no reference electrode of "
                "that name is tabulated",
                column="scale",
                value=scale,
                expected="a reference electrode such as Na/Na+, SHE or Ag/AgCl",
            )
    taken, criteria = read_campaign(db, wanted)
    before = len(taken.readings)
    if without:
        taken = _without(taken, without)
    return Looked(taken, criteria, scale, before - len(taken.readings), chosen)


def rebuilt(
    axis: str,
    db: str | None,
    wanted: FilterSource | None = None,
    *,
    response: str = "R_ct",
    porous: bool = True,
    scale: str | None = None,
    without: Sequence[str] = (),
    more: Mapping[str, bool] | None = None,
) -> AxisResult:
    """Return the trends of one axis.

    porous: solve R_ct from the apparent value of porous electrodes first. scale: compare
    potentials on this reference's scale. without: record numbers of measurements, or labels of
    specimens, to leave out. more: what an axis alone offers (see `MORE`).
    Raises Refused for an unknown axis, response, measurement or specimen, and for an option
    the axis does not have.
    """
    if axis not in AXES:
        raise refused(
            f"there is no axis '{axis}'; one of {', '.join(AXES)} is expected",
            value=axis,
            expected=", ".join(AXES),
        )
    looked = look(axis, db, wanted, scale=scale, without=without, more=more)
    taken, criteria, scale = looked.taken, looked.criteria, looked.scale
    module = import_module(f"campaign.trends.{axis}")
    result: AxisResult = module.estimate(
        taken, criteria, response, porous=porous, scale=scale, **looked.more
    )
    if porous and axis in ESTIMATE and any(
        facts.pore_resistance_ohm_cm2 for facts in taken.electrodes.values()
    ):
        as_it_appears = module.estimate(
            taken, criteria, response, porous=False, scale=scale, **looked.more
        )
        result = beside_apparent(axis, result, as_it_appears)
    extra = [LeftOut(reason, count) for reason, count in taken.left_out.items()]
    if without:
        extra.append(LeftOut("left out with --without", looked.withheld))
    return replace(result, left_out=(*result.left_out, *extra))


def beside_apparent(axis: str, solved: AxisResult, apparent: AxisResult) -> AxisResult:
    """Return estimates with those of the apparent R_ct beside them, where the two differ."""
    value, interval = ESTIMATE[axis]
    known = {_series_of(one): one for one in apparent.estimates}

    def beside(one: SeriesEstimate) -> SeriesEstimate:
        other = known.get(_series_of(one))
        if other is None or getattr(other, value) == getattr(one, value):
            return one
        shown = Adjusted("R_ct as it appears", getattr(other, value), getattr(other, interval))
        return replace(one, apparent=shown)

    return replace(solved, estimates=tuple(beside(one) for one in solved.estimates))


def _series_of(one: SeriesEstimate) -> tuple[str, ...]:
    return one.electrode, one.salt, one.solvents, one.additives, one.basis


def _chosen(axis: str, more: Mapping[str, bool]) -> dict[str, bool]:
    chosen = {name: True for name, wanted in more.items() if wanted}
    for name in chosen:
        if MORE[name] != axis:
            option = name.replace("_", "-")
            raise refused(
                f"--{option} belongs to 'trend {MORE[name]}', not to 'trend {axis}'",
                column=option,
                expected=f"trend {MORE[name]}",
            )
    return chosen


def _without(taken: Snapshot, without: Sequence[str]) -> Snapshot:
    readings = taken.readings
    keep = np.ones(len(readings), dtype=bool)
    for name in without:
        mine = readings.specimen == name
        if name.isdigit() and len(name) < 16:
            mine = mine | (readings.measurement == int(name))
        if not mine.any():
            raise refused(
                f"'{name}' is neither a measurement nor a specimen among those looked at; "
                "'campaign list measurements' shows them",
                value=name,
                expected="a measurement's record number or a specimen's label",
            )
        keep &= ~mine
    return replace(taken, readings=readings.take(keep))
