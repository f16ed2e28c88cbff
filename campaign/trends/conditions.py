"""The coded conditions of one electrode's readings: shared by every axis and response.

Coding is done once an electrode; an axis only picks and combines columns.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, fields, replace
from typing import Any

import numpy as np
import numpy.typing as npt

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import (
    BoolArray,
    ElectrodeFacts,
    ElectrolyteFacts,
    FloatArray,
    IntArray,
    Readings,
    Snapshot,
)
from campaign.trends import scales
from campaign.trends.strata import Matched, combine, factor, match

DAY_s = 86400.0


@dataclass(frozen=True)
class Conditions:
    """Conditions of n readings; every array has length n.

    Integer columns are codes; `names` holds the texts of the coded text columns.
    content, offset, own, fixed: matched ion content [1], E - E_half [V], potential against
    the same ion's electrode [V], potential against any reference [V]; -1 where not
    recorded. concentration in the basis coded by `basis`. x_V: potential on its scale
    (coded by `scale`). age_s [s] since assembly, else since the cell's first measurement
    (`age_since_assembly` False). day, assembled_day [d].
    """

    measurement: IntArray
    specimen: IntArray
    cell: IntArray
    electrolyte: IntArray
    salt: IntArray
    solvents: IntArray
    additives: IntArray
    basis: IntArray
    scale: IntArray
    concentration: FloatArray
    temperature_K: FloatArray
    temperature: IntArray
    x_V: FloatArray
    content: IntArray
    offset: IntArray
    own: IntArray
    fixed: IntArray
    offset_V: FloatArray
    symmetric: BoolArray
    two_electrode: BoolArray
    plateau: BoolArray
    age_s: FloatArray
    age_since_assembly: BoolArray
    day: FloatArray
    assembled_day: FloatArray
    names: Mapping[str, tuple[str, ...]]
    facts: ElectrodeFacts
    electrolytes: Mapping[str, ElectrolyteFacts]
    warnings: tuple[str, ...] = field(default=())

    def __len__(self) -> int:
        return len(self.measurement)

    def take(self, rows: npt.NDArray[Any]) -> Conditions:
        """Return the conditions of the rows selected by a mask or an index array."""
        return replace(self, **{name: getattr(self, name)[rows] for name in _COLUMNS})

    def name(self, column: str, code: int) -> str:
        """Return the text of one code of a text column."""
        return self.names[column][code]


_COLUMNS = tuple(
    column.name
    for column in fields(Conditions)
    if column.name not in ("names", "facts", "electrolytes", "warnings")
)


def electrodes(snapshot: Snapshot) -> list[str]:
    """Return the labels of the electrodes that have readings, in alphabetical order."""
    return sorted(set(snapshot.readings.electrode.tolist()))


def of_electrode(snapshot: Snapshot, electrode: str) -> Readings:
    """Return one electrode's readings."""
    return snapshot.readings.take(snapshot.readings.electrode == electrode)


def facts_of(snapshot: Snapshot, electrode: str) -> ElectrodeFacts:
    """Return what is recorded of an electrode; an unrecorded one has no facts."""
    return snapshot.electrodes.get(electrode) or ElectrodeFacts(electrode, "", "", 1)


def condition(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    readings: Readings | None = None,
    scale: str | None = None,
) -> Conditions:
    """Code the conditions of one electrode's readings.

    scale: a reference scale to which every potential is converted, so that readings
    against different references may share a stratum; without it they never do.
    """
    r = of_electrode(snapshot, electrode) if readings is None else readings
    facts = facts_of(snapshot, electrode)
    placed = scales.place(r, scale)
    tolerance = criteria.potential_tolerance_V
    temperature = match(r.temperature_K, criteria.temperature_tolerance_K)
    offset_V = r.potential_V - r.E_half_V
    content, offset = match(r.ion_content, criteria.content_tolerance), match(offset_V, tolerance)
    fixed = _by_scale(placed.x_V, placed.scale, tolerance)
    own = np.where(scales.own_reference(r.reference, facts.ion), fixed.codes, -1)
    plateau, unchecked = scales.in_plateau(r, facts)
    age_s, since_assembly = _age(r)
    texts = {
        name: factor(getattr(r, name))
        for name in ("specimen", "cell", "electrolyte", "salt", "solvents", "additives", "basis")
    }
    return Conditions(
        measurement=r.measurement,
        **{name: coded.codes for name, coded in texts.items()},
        scale=placed.scale,
        concentration=r.concentration,
        temperature_K=r.temperature_K,
        temperature=temperature.codes,
        x_V=placed.x_V,
        content=content.codes,
        offset=offset.codes,
        own=own.astype(np.int64),
        fixed=fixed.codes,
        offset_V=offset_V,
        symmetric=np.asarray(r.configuration == "symmetric", np.bool_),
        two_electrode=np.asarray(r.configuration == "two-electrode", np.bool_),
        plateau=plateau,
        age_s=age_s,
        age_since_assembly=since_assembly,
        day=r.measured_at / DAY_s,
        assembled_day=r.assembled_at / DAY_s,
        names={**{name: coded.names for name, coded in texts.items()}, "scale": placed.names},
        facts=facts,
        electrolytes=snapshot.electrolytes,
        warnings=(
            *placed.warnings,
            *unchecked,
            *_chains("temperatures", temperature, "K"),
            *_chains("ion contents", content, ""),
            *_chains("values of E - E_half", offset, "V"),
            *_chains("potentials", fixed, "V"),
        ),
    )


def _by_scale(x_V: FloatArray, scale: IntArray, tolerance: float) -> Matched:
    """Match potentials within each reference scale; codes differ between scales."""
    codes = np.full(len(x_V), -1, np.int64)
    chains: tuple[tuple[float, float], ...] = ()
    for one in np.unique(scale):
        rows = scale == one
        matched = match(x_V[rows], tolerance)
        codes[rows] = matched.codes
        chains += matched.chains
    known = codes >= 0
    codes[known] = combine(scale[known], codes[known])
    return Matched(codes, chains)


def _chains(what: str, matched: Matched, unit: str) -> list[str]:
    return [
        f"{what} from {low:.4g} to {high:.4g} {unit}".rstrip()
        + " follow one another within the tolerance; the chain is wider than three tolerances "
        "and was split"
        for low, high in matched.chains
    ]


def _age(r: Readings) -> tuple[FloatArray, BoolArray]:
    """Return the age [s] since assembly, else since the cell's first measurement."""
    known = np.isfinite(r.assembled_at)
    cell = factor(r.cell)
    first = np.full(len(cell.names), np.inf)
    np.minimum.at(first, cell.codes, np.where(np.isfinite(r.measured_at), r.measured_at, np.inf))
    age = r.measured_at - np.where(known, r.assembled_at, first[cell.codes])
    return np.asarray(age, np.float64), known
