"""Outliers are shown, never dropped: studentised residuals beyond a stated bound.

The bound keeps the chance of showing anything in clean data at 5 %, by Bonferroni over the
specimens, or over the readings [1].

[1] Cook & Weisberg, Residuals and Influence in Regression (1982), section 2.2.2.
"""

from __future__ import annotations

import math

import numpy as np

from campaign.trends.between import BetweenFit
from campaign.trends.results import Outlier
from campaign.trends.sample import Sample

CHANCE = 0.05


def bound(n: int, df: float, chance: float = CHANCE) -> float:
    """Return the studentised residual that the largest of n exceeds by `chance` [1].

    df: degrees of freedom of a residual's own t distribution; infinite without any.
    """
    from scipy.special import stdtrit

    return float(stdtrit(df, 1.0 - chance / (2 * n))) if df >= 1 and n > 0 else math.inf


def outliers(s: Sample, fitted: BetweenFit) -> tuple[Outlier, ...]:
    """Return specimens and readings whose studentised residual exceeds the bound.

    Readings only where the fit was of single readings and not of one effect a cell.
    """
    mixed = fitted.mixed
    names = s.c.names["specimen"]
    codes = np.unique(s.c.specimen)
    by_specimen = mixed.studentised_specimens()
    limit = bound(len(codes), mixed.df_between - 1)
    shown = [
        Outlier("specimen", names[int(codes[i])], None, float(by_specimen[i]))
        for i in np.flatnonzero(np.abs(by_specimen) > limit)
    ]
    if fitted.by_cell:
        return tuple(shown)
    by_reading = mixed.studentised_readings()
    limit = bound(mixed.n, mixed.n - mixed.rank - 1)
    shown += [
        Outlier(
            "reading", names[int(s.c.specimen[i])], int(s.c.measurement[i]), float(by_reading[i])
        )
        for i in np.flatnonzero(np.abs(by_reading) > limit)
    ]
    return tuple(shown)
