"""Decisions: "responds", "unresponsive" or "open", never inferred from "not significant".

"Unresponsive" is shown by two one-sided tests: a 1 - 2 alpha interval inside the margin [1];
for several differences every one must be inside, an intersection-union test, which needs no
adjustment [2]. "Responds" needs one interval wholly beyond the margin; picked out of several
differences it must be simultaneous.

[1] Schuirmann, J. Pharmacokinet. Biopharm. 15 (1987) 657.
[2] Berger & Hsu, Statist. Sci. 11 (1996) 283.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Literal, Protocol

from campaign.statistics.estimate import Estimate

Decision = Literal["responds", "responds, inverse", "unresponsive", "open"]
Family = Literal["single", "tukey", "dunnett", "bonferroni"]
Interval = tuple[float, float]
Correlation = Sequence[Sequence[float]]


class Difference(Protocol):
    """Anything with an estimate of a difference between two levels."""

    @property
    def estimate(self) -> Estimate:
        """The difference."""


class Evidence(Protocol):
    """What a decision is made from; see `campaign.trends.findings.Finding`."""

    @property
    def slope(self) -> Estimate | None:
        """The reaction order m, where the axis has one."""

    @property
    def slope_margin(self) -> float | None:
        """Its margin."""

    @property
    def contrasts(self) -> Sequence[Difference]:
        """Every difference between levels."""

    @property
    def contrast_margin(self) -> float:
        """Their margin, in their unit."""

    @property
    def family(self) -> Family:
        """How they are made simultaneous."""

    @property
    def n_levels(self) -> int:
        """Number of levels they come from."""

    @property
    def correlation(self) -> Correlation | None:
        """Correlation of the differences from a control, where it is known."""


def beyond(interval: Interval | None, margin: float) -> int:
    """Return +1 for an interval wholly above +margin, -1 wholly below -margin, else 0."""
    if interval is None:
        return 0
    if interval[0] > margin:
        return 1
    return -1 if interval[1] < -margin else 0


def inside(interval: Interval | None, margin: float) -> bool:
    """Whether an interval lies inside +-margin."""
    return interval is not None and -margin < interval[0] and interval[1] < margin


def simultaneous_interval(
    estimate: Estimate,
    family: Family,
    n_levels: int,
    n_comparisons: int,
    alpha: float,
    correlation: Correlation | None = None,
) -> Interval | None:
    """Return the two-sided 1 - alpha interval that holds for all differences together.

    correlation: of the differences from a control; where it is not known none is assumed,
    which is on the safe side (Sidak, J. Am. Stat. Assoc. 62 (1967) 626).
    """
    import numpy as np

    from campaign.statistics.comparisons import critical

    if not (math.isfinite(estimate.se) and estimate.df > 0):
        return None
    known = np.eye(n_comparisons) if correlation is None else np.asarray(correlation, float)
    factor = critical(
        family,
        alpha,
        estimate.df,
        n_levels,
        correlation=known if family == "dunnett" else None,
        n_comparisons=n_comparisons,
    )
    return estimate.value - factor * estimate.se, estimate.value + factor * estimate.se


def decide(evidence: Evidence, alpha: float = 0.05) -> Decision:
    """Return the decision with error probability `alpha`.

    With a slope: responds or responds, inverse by its 1 - alpha interval; unresponsive where
    its 1 - 2 alpha interval and those of all differences are inside their margins.
    Without: responds where a simultaneous 1 - alpha interval is wholly beyond the margin;
    unresponsive where every 1 - 2 alpha interval is inside. An estimate without interval can
    neither respond nor be shown to be inside; without any evidence the decision is open.
    Raises ValueError unless 0 < alpha < 1/2.
    """
    if not 0 < alpha < 0.5:
        raise ValueError(f"an error probability of {alpha}; expected between 0 and 0.5")
    differences = [contrast.estimate for contrast in evidence.contrasts]
    margin = evidence.contrast_margin
    if evidence.slope is not None:
        if evidence.slope_margin is None:
            return "open"
        side = beyond(evidence.slope.interval(1 - alpha), evidence.slope_margin)
        if side:
            return "responds" if side > 0 else "responds, inverse"
        flat = inside(evidence.slope.interval(1 - 2 * alpha), evidence.slope_margin)
        level = all(inside(each.interval(1 - 2 * alpha), margin) for each in differences)
        return "unresponsive" if flat and level else "open"
    if not differences:
        return "open"
    count = len(differences)
    for each in differences:
        if not beyond(each.interval(1 - alpha), margin):
            continue  # the simultaneous interval is wider, and slow to find
        joint = simultaneous_interval(
            each, evidence.family, evidence.n_levels, count, alpha, evidence.correlation
        )
        if beyond(joint, margin):
            return "responds"
    if all(inside(each.interval(1 - 2 * alpha), margin) for each in differences):
        return "unresponsive"
    return "open"
