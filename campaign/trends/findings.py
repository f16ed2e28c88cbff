"""What one axis says about one resistance, in the form a decision is made from.

A `Finding` is all the diagnosis layer needs of a trend: it can be asked for its
decision at any error probability, because eliminating a step that makes r required
predictions asks for intervals at 1 - 0.05/r.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from campaign.statistics.estimate import Estimate

Axis = Literal["concentration", "solvent", "additive", "potential", "temperature", "barrier", "age"]
Decision = Literal["responds", "responds, inverse", "unresponsive", "open"]
Family = Literal["single", "tukey", "dunnett", "bonferroni"]


@dataclass(frozen=True)
class Contrast:
    """The difference `a` - `b` of ln R (or of a barrier in kJ/mol) between two levels."""

    a: str
    b: str
    estimate: Estimate


@dataclass(frozen=True)
class Finding:
    """The evidence of one axis on one response of one electrode.

    slope, slope_margin: the reaction order m and its margin (concentration only).
    contrasts: every level-to-level difference, in the unit of `contrast_margin`
        (ln ratio, margin ln 1.5; or kJ/mol).
    family: how the contrasts are made simultaneous when one of them "responds".
    n_levels: number of levels the contrasts come from (Tukey's k, Dunnett's k).
    open_because: a reason that leaves the decision open whatever the numbers say.
    confounded: a confounding warning stands against this finding.
    tested: False where the readings hold no contrast on this axis (`open_because` says why).
    correlation: of the contrasts from one control (family dunnett), where it is known.
    """

    axis: Axis
    response: str
    n_specimens: int
    n_measurements: int
    slope: Estimate | None = None
    slope_margin: float | None = None
    contrasts: tuple[Contrast, ...] = ()
    contrast_margin: float = 0.0
    family: Family = "single"
    n_levels: int = 0
    open_because: str | None = None
    confounded: bool = False
    warnings: tuple[str, ...] = field(default=())
    tested: bool = True
    correlation: tuple[tuple[float, ...], ...] | None = None

    def decision(self, alpha: float = 0.05) -> Decision:
        """Return the decision with error probability `alpha` (two-sided intervals 1 - alpha)."""
        from campaign.statistics.equivalence import decide

        if self.open_because is not None:
            return "open"
        return decide(self, alpha)
