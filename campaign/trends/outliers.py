"""Outliers are shown, never dropped: studentised residuals beyond a stated bound."""

from __future__ import annotations

import numpy as np

from campaign.trends.between import BetweenFit
from campaign.trends.results import Outlier
from campaign.trends.sample import Sample

BOUND = 3.5
"""Studentised residuals beyond this are shown (common practice, no source)."""


def outliers(s: Sample, fitted: BetweenFit, bound: float = BOUND) -> tuple[Outlier, ...]:
    """Return specimens and readings whose studentised residual exceeds `bound`.

    Readings only where the fit was of single readings and not of one effect a cell.
    """
    names = s.c.names["specimen"]
    codes = np.unique(s.c.specimen)
    by_specimen = fitted.mixed.studentised_specimens()
    shown = [
        Outlier("specimen", names[int(codes[i])], None, float(by_specimen[i]))
        for i in np.flatnonzero(np.abs(by_specimen) > bound)
    ]
    if fitted.by_cell:
        return tuple(shown)
    by_reading = fitted.mixed.studentised_readings()
    shown += [
        Outlier(
            "reading", names[int(s.c.specimen[i])], int(s.c.measurement[i]), float(by_reading[i])
        )
        for i in np.flatnonzero(np.abs(by_reading) > bound)
    ]
    return tuple(shown)
