"""What the axes say of one response of one electrode, all its series together.

The electrode-level findings are what the diagnosis decides from: a common order over the
strata of salt, solvents, additives, temperature and state; all ratios of solvents and of
additives; the span over each electrolyte's own window; barrier differences across solvents;
the drift with age. Conditions are coded once an electrode and shared by all responses.
"""

from __future__ import annotations

from collections.abc import Callable

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends import additive, age, concentration, potential, solvent, temperature
from campaign.trends.between import NoContrast
from campaign.trends.findings import Axis, Finding
from campaign.trends.sample import Sample, Source, attempt, draw, source

AXES: tuple[Axis, ...] = ("concentration", "solvent", "additive", "potential", "barrier", "age")


def findings(
    snapshot: Snapshot,
    criteria: Criteria,
    electrode: str,
    response: str,
    *,
    origin: Source | None = None,
    porous: bool = True,
) -> dict[str, Finding]:
    """Return one finding for each of `AXES`.

    An axis without contrast has `tested` False and the reason in `open_because`. origin: the
    electrode's coded readings (`sample.source`), to be shared between responses.
    Raises Refused for an unknown response.
    """
    coded = source(snapshot, criteria, electrode) if origin is None else origin
    whole = draw(snapshot, coded, response, porous)
    return {axis: _finding(whole, criteria, axis) for axis in AXES}


def of_electrode(
    snapshot: Snapshot, criteria: Criteria, electrode: str, responses: tuple[str, ...]
) -> dict[str, dict[str, Finding]]:
    """Return the findings of several responses, with the conditions coded once."""
    coded = source(snapshot, criteria, electrode)
    return {
        response: findings(snapshot, criteria, electrode, response, origin=coded)
        for response in responses
    }


def _finding(whole: Sample, criteria: Criteria, axis: Axis) -> Finding:
    try:
        return _FITS[axis](whole, criteria)
    except NoContrast as reason:
        return Finding(
            axis, whole.response, whole.n_specimens, len(whole), open_because=str(reason),
            warnings=whole.warnings, tested=False,
        )  # fmt: skip


def _concentration(s: Sample, criteria: Criteria) -> Finding:
    return attempt(s, lambda part: concentration.order(part, criteria, by_cell=True)).finding


def _solvent(s: Sample, criteria: Criteria) -> Finding:
    return attempt(s, lambda part: solvent.fit(part, criteria, by_cell=True)).finding


def _additive(s: Sample, criteria: Criteria) -> Finding:
    return attempt(s, lambda part: additive.fit(part, criteria, by_cell=True)).finding


def _potential(s: Sample, criteria: Criteria) -> Finding:
    return potential.finding(s, criteria)[1]


def _barrier(s: Sample, criteria: Criteria) -> Finding:
    return attempt(s, lambda part: temperature.fit(part, criteria)).finding


def _age(s: Sample, criteria: Criteria) -> Finding:
    if not age.spans_enough(s):
        raise NoContrast(age.TOO_YOUNG)
    return age.fit(s, criteria).finding


_FITS: dict[Axis, Callable[[Sample, Criteria], Finding]] = {
    "concentration": _concentration,
    "solvent": _solvent,
    "additive": _additive,
    "potential": _potential,
    "barrier": _barrier,
    "age": _age,
}
