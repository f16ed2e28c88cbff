"""Budgets at many times, close enough together to be drawn as curves."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from campaign.diagnosis.budget import Budget, budgets
from campaign.diagnosis.summary import of_electrode
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot

EARLIEST_s, LATEST_s = 1e-3, 1e4
STEPS = 29


def budgets_over_time(
    snapshot: Snapshot, criteria: Criteria, electrodes: Sequence[str] | None = None
) -> dict[str, tuple[Budget, ...]]:
    """Return the budgets of each electrode at STEPS times from 1 ms to 10^4 s [s], by label.

    electrodes: only these. An electrode without fitted resistances of its own is left out.
    """
    times = np.geomspace(EARLIEST_s, LATEST_s, STEPS).tolist()
    wanted = sorted(set(snapshot.readings.electrode.tolist()))
    found = {}
    for label in wanted:
        if electrodes is not None and label not in electrodes:
            continue
        readings = of_electrode(snapshot, label).readings
        over = budgets(readings, criteria, snapshot.electrodes.get(label), times)
        if over:
            found[label] = over
    return found
