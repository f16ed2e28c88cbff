"""The figures beside a verdict: barriers of each electrolyte and the law over the potential."""

from __future__ import annotations

from typing import Any

import numpy as np

from campaign.diagnosis.budget import RESPONSE_OF
from campaign.diagnosis.summary import Diagnosis, keep, part_of
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends import potential, temperature
from campaign.trends.scales import own_reference

Row = dict[str, Any]

_LAW = ("span", "span_ci", "E0_V", "E0_ci", "g", "g_ci", "slope_per_V", "slope_ci", "reference")


def with_headline(
    row: Row, snapshot: Snapshot, criteria: Criteria, diagnosis: Diagnosis
) -> Row:
    """Return a summary row whose diagnostics also carry order, ratio, barriers and law."""
    diagnostics: dict[str, Row] = row["diagnostics"]
    order, solvent = diagnostics["concentration"], diagnostics["solvent"]
    order |= {"order": order["estimate"], "order_ci": order["interval"]}
    solvent |= {"ratio": solvent["estimate"], "ratio_ci": solvent["interval"]}
    if diagnosis.dominant is None:
        return row
    response = RESPONSE_OF[diagnosis.dominant]
    part = part_of(snapshot, criteria, diagnosis)
    diagnostics["barrier"] |= {"series": _barriers(part, criteria, response)}
    diagnostics["potential"] |= law(part, criteria, response)
    return row


def _barriers(part: Snapshot, criteria: Criteria, response: str) -> list[Row]:
    names = (
        "salt", "solvents", "additives", "Ea_kJ_mol", "Ea_ci", "Ea_lnRT_kJ_mol", "Ea_lnRT_ci",
        "n_specimens",
    )  # fmt: skip
    found = [one.as_dict() for one in temperature.estimate(part, criteria, response).estimates]
    return [{name: one[name] for name in names} for one in found]


def law(part: Snapshot, criteria: Criteria, response: str) -> Row:
    """Return the law of one electrode's response over the potential, with its parameters.

    Where the state of the electrode is held, all electrolytes speak together, each specimen
    within its own; elsewhere each electrolyte for itself. The law is that of most specimens
    among the scales that were decided, and open where scales that were decided differ.
    """
    shared = _held(part)
    found = [
        one.as_dict()
        for rows, together in ((shared, True), (~shared, False))
        if rows.any()
        for one in potential.estimate(
            keep(part, rows), criteria, response, together=together
        ).estimates
    ]
    if not found:
        return {"law": "open", "law_because": "no specimen was measured at two potentials",
                **dict.fromkeys(_LAW)}  # fmt: skip
    decided = [one for one in found if one["law"] != "open"]
    best = max(decided or found, key=lambda one: one["n_specimens"])
    shown = {name: best[name] for name in _LAW} | {"law_specimens": best["n_specimens"]}
    names = sorted({one["law"] for one in decided})
    if len(names) == 1:
        return {"law": names[0], "law_because": None, **shown}
    because = "; ".join(dict.fromkeys(text for one in found for text in one["warnings"]))
    if names:
        because = "; ".join(
            f"{one['law']} against {one['reference']} ({one['n_specimens']} specimens)"
            for one in decided
        )
    return {"law": "open", "law_because": because or None, **shown}


def _held(part: Snapshot) -> Any:
    """Return where one potential means one state in every electrolyte [n]."""
    readings = part.readings
    held = np.isfinite(readings.E_half_V)
    for label in set(readings.electrode.tolist()):
        facts = part.electrodes.get(label)
        if facts is not None:
            held |= (readings.electrode == label) & own_reference(readings.reference, facts.ion)
    return np.asarray(held, dtype=bool)
