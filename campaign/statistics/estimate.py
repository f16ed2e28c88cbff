"""An estimate with its standard error and degrees of freedom."""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True)
class Estimate:
    """A value, its standard error (same unit) and its degrees of freedom.

    `se` is NaN where the data give no error (one specimen): such an estimate has
    no interval.
    """

    value: float
    se: float
    df: float

    def interval(self, level: float = 0.95) -> tuple[float, float] | None:
        """Return the two-sided t interval at `level`, or None where there is none."""
        from scipy.special import stdtrit

        if not (math.isfinite(self.se) and self.df > 0):
            return None
        half = float(stdtrit(self.df, 0.5 + level / 2)) * self.se
        return (self.value - half, self.value + half)
