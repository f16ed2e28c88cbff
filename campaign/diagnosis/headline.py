"""The figures beside a verdict: barriers of each electrolyte and the law over the potential."""

from __future__ import annotations

from typing import Any

from campaign.diagnosis.budget import RESPONSE_OF
from campaign.diagnosis.summary import Diagnosis, of_electrode
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends import potential, temperature

Row = dict[str, Any]


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
    part = of_electrode(snapshot, diagnosis.electrode)
    diagnostics["barrier"] |= {"series": _barriers(part, criteria, response)}
    diagnostics["potential"] |= _law(part, criteria, response)
    return row


def _barriers(part: Snapshot, criteria: Criteria, response: str) -> list[Row]:
    names = (
        "salt", "solvents", "additives", "Ea_kJ_mol", "Ea_ci", "Ea_lnRT_kJ_mol", "Ea_lnRT_ci",
        "n_specimens",
    )  # fmt: skip
    found = [one.as_dict() for one in temperature.estimate(part, criteria, response).estimates]
    return [{name: one[name] for name in names} for one in found]


def _law(part: Snapshot, criteria: Criteria, response: str) -> Row:
    """Return the law most specimens speak for among those that were decided."""
    found = [one.as_dict() for one in potential.estimate(part, criteria, response).estimates]
    if not found:
        return {"law": "open", "span": None, "span_ci": None}
    decided = [one for one in found if one["law"] != "open"] or found
    laws: dict[str, int] = {}
    for one in decided:
        laws[one["law"]] = laws.get(one["law"], 0) + one["n_specimens"]
    law = max(sorted(laws), key=lambda name: laws[name])
    shown = max((one for one in decided if one["law"] == law), key=lambda one: one["n_specimens"])
    return {
        "law": law,
        **{name: shown[name] for name in ("span", "span_ci", "E0_V", "g", "reference")},
    }
