"""A sample: the readings of one electrode that have a response, with their conditions."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Any, TypeVar

import numpy as np
import numpy.typing as npt

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import BoolArray, FloatArray, IntArray, Readings, Snapshot
from campaign.statistics.design import NoContrast
from campaign.trends.bases import unified
from campaign.trends.conditions import Conditions, condition, facts_of, of_electrode
from campaign.trends.pores import pores
from campaign.trends.response import respond
from campaign.trends.results import LeftOut
from campaign.trends.state import NOT_COMPARABLE, state
from campaign.trends.strata import combine

T = TypeVar("T")

IN_PLATEAU = "in a declared two-phase plateau, ion content not recorded"

SERIES = ("salt", "solvents", "additives", "basis")


@dataclass(frozen=True)
class Sample:
    """n readings of one response: y = ln R, `known` = (SE/R)^2, `filled` SE, conditions c.

    state [n]: code of the electrode's state. open_because: a reason that leaves the
    decision open; pore_open: the same for concentration and barrier alone.
    """

    electrode: str
    response: str
    c: Conditions
    y: FloatArray
    known: FloatArray
    filled: BoolArray
    state: IntArray
    left_out: tuple[LeftOut, ...] = ()
    warnings: tuple[str, ...] = ()
    open_because: str | None = None
    pore_open: str | None = None

    def __len__(self) -> int:
        return len(self.y)

    @property
    def n_specimens(self) -> int:
        """Return the number of specimens."""
        return len(np.unique(self.c.specimen))

    def take(self, rows: npt.NDArray[Any]) -> Sample:
        """Return the sample of the selected rows (mask or index array)."""
        return replace(
            self, c=self.c.take(rows), y=self.y[rows], known=self.known[rows],
            filled=self.filled[rows], state=self.state[rows],
        )  # fmt: skip

    def leaving(self, rows: BoolArray, reason: str) -> Sample:
        """Return the sample without `rows`, which are counted as left out for `reason`."""
        if not rows.any():
            return self
        gone = LeftOut(reason, int(rows.sum()), self.electrode)
        return replace(self.take(~rows), left_out=(*self.left_out, gone))

    def warned(self, *warnings: str) -> Sample:
        """Return the sample with further warnings."""
        return replace(self, warnings=(*self.warnings, *warnings))


@dataclass(frozen=True)
class Source:
    """One electrode's readings with their coded conditions: coded once, sampled often."""

    electrode: str
    readings: Readings
    conditions: Conditions


def source(
    snapshot: Snapshot, criteria: Criteria, electrode: str, scale: str | None = None
) -> Source:
    """Return the coded readings of one electrode."""
    readings = of_electrode(snapshot, electrode)
    readings, warnings = unified(readings, snapshot.electrolytes)
    coded = condition(snapshot, criteria, electrode, readings, scale)
    return Source(electrode, readings, replace(coded, warnings=(*warnings, *coded.warnings)))


def draw(snapshot: Snapshot, origin: Source, response: str, porous: bool = True) -> Sample:
    """Return all readings of `origin` that have the response, with counts of the others.

    porous: solve R_ct from the apparent value where the electrode records a pore
    resistance; False takes the values as fitted.
    """
    facts = facts_of(snapshot, origin.electrode)
    found = pores(facts, snapshot.electrolytes) if porous else None
    r = respond(origin.readings, response, found)
    has = np.isfinite(r.y)
    absent = int((r.absent & ~has).sum())
    missing = int((~has).sum()) - absent
    c = origin.conditions if has.all() else origin.conditions.take(has)
    counts = (("arc looked for and absent", absent), ("not fitted", missing))
    warnings = list(r.warnings)
    if c.two_electrode.any():
        warnings.append(
            f"{int(c.two_electrode.sum())} readings of two-electrode cells contain the counter "
            "electrode's impedance"
        )
    return Sample(
        electrode=origin.electrode,
        response=response,
        c=c,
        y=r.y[has],
        known=r.variance[has],
        filled=r.filled[has],
        state=np.zeros(len(c), np.int64),
        left_out=tuple(LeftOut(text, n, origin.electrode) for text, n in counts if n),
        warnings=(*warnings, *c.warnings),
        pore_open=r.open_because,
    )


def series(s: Sample, by: tuple[str, ...] = SERIES) -> Iterator[tuple[dict[str, str], Sample]]:
    """Yield each series of a sample with the texts of its held conditions."""
    if not len(s):
        return
    code = combine(*(getattr(s.c, name) for name in by))
    for one in range(int(code.max()) + 1):
        part = s.take(np.flatnonzero(code == one))
        yield {name: s.c.name(name, int(getattr(part.c, name)[0])) for name in by}, part


def texts(s: Sample, column: str) -> str:
    """Return the texts of a coded column, joined where there are several."""
    return "; ".join(s.c.name(column, int(code)) for code in np.unique(getattr(s.c, column)))


def recipe(s: Sample) -> dict[str, str]:
    """Return salt, solvents and additives of a sample."""
    return {name: texts(s, name) for name in ("salt", "solvents", "additives")}


def described(s: Sample, held: Mapping[str, str]) -> dict[str, Any]:
    """Return the fields every estimate of a sample carries: what, how many, which rows."""
    return {
        "electrode": s.electrode,
        **held,
        "n_specimens": s.n_specimens,
        "n_measurements": len(s),
        "flagged_se": int(s.filled.sum()),
        "left_out": s.left_out,
        "rows": tuple(s.c.measurement.tolist()),
    }


def comparable(s: Sample) -> Sample:
    """Return the readings of `s` whose electrode state is held, with `state` coded.

    Plateau points matched by a potential are left out (there a potential does not fix the
    ion content). Readings whose state is not held are left out when others are held.
    Where none is, all are kept and the decision is open.
    """
    held = state(s.c)
    s = replace(s, state=held.code)
    if held.lost.any():
        s = s.leaving(held.lost, IN_PLATEAU)
        held = replace(held, held=held.held[~held.lost])
    if held.comparable:
        return s
    if held.held.any():
        return s.leaving(~held.held, NOT_COMPARABLE)
    return replace(s, open_because=NOT_COMPARABLE)


def not_comparable(s: Sample) -> Sample:
    """Return all readings of `s` matched by the potential as recorded; decision open."""
    held = state(s.c)
    s = replace(s, state=s.c.fixed).leaving(held.lost, IN_PLATEAU)
    return replace(s, open_because=NOT_COMPARABLE)


def attempt(s: Sample, fit: Callable[[Sample], T]) -> T:
    """Return `fit` of the readings whose state is held.

    Where these show no contrast, but readings at equal potentials against one reference
    do, the fit of those is returned with the decision open. Raises NoContrast.
    """
    try:
        return fit(comparable(s))
    except NoContrast as reason:
        try:
            return fit(not_comparable(s))
        except NoContrast:
            raise reason from None
