"""Findings in words: the numbers behind a decision, in one phrase."""

from __future__ import annotations

import math
from typing import Protocol

from campaign.statistics.estimate import Estimate
from campaign.trends.findings import Contrast, Family


class Decider(Protocol):
    """All the diagnosis needs of the evidence of one axis (see trends.findings.Finding)."""

    def decision(self, alpha: float = ...) -> str:
        """Return responds, `responds, inverse`, unresponsive or open."""
        ...


def is_testable(finding: Decider | None) -> bool:
    """Return whether the campaign has the levels for this axis, decided or not."""
    return finding is not None and bool(getattr(finding, "tested", True))


def why_open(finding: Decider | None) -> str:
    """Return the stated reason that leaves a finding open ('' = none stated)."""
    return str(getattr(finding, "open_because", None) or "")


def bounds(estimate: Estimate, alpha: float) -> tuple[float, float] | None:
    """Return the two-sided interval at 1 - alpha, in the unit of the estimate."""
    return estimate.interval(1 - alpha)


def _spread(value: float, interval: tuple[float, float] | None) -> str:
    if interval is None:
        return f"{value:.3g} (no interval)"
    return f"{value:.3g} [{interval[0]:.3g}, {interval[1]:.3g}]"


def contrast_interval(
    finding: Decider | None, contrast: Contrast, alpha: float
) -> tuple[float, float] | None:
    """Return the 1 - alpha interval of one contrast, simultaneous over the finding's contrasts."""
    family: Family = getattr(finding, "family", "single")
    if family == "single":
        return bounds(contrast.estimate, alpha)
    from campaign.statistics.equivalence import simultaneous_interval

    contrasts: tuple[Contrast, ...] = getattr(finding, "contrasts", ())
    levels = int(getattr(finding, "n_levels", 0))
    related = getattr(finding, "correlation", None)
    return simultaneous_interval(contrast.estimate, family, levels, len(contrasts), alpha, related)


def largest(finding: Decider | None) -> Contrast | None:
    """Return the contrast furthest from zero, or None where there is none."""
    contrasts: tuple[Contrast, ...] = getattr(finding, "contrasts", ())
    known = [one for one in contrasts if math.isfinite(one.estimate.value)]
    return max(known, key=lambda one: abs(one.estimate.value)) if known else None


def telling(finding: Decider | None, alpha: float) -> Contrast | None:
    """Return the contrast whose interval is furthest from zero, else the largest one."""
    contrasts: tuple[Contrast, ...] = getattr(finding, "contrasts", ())

    def clearance(one: Contrast) -> float:
        interval = contrast_interval(finding, one, alpha)
        return 0.0 if interval is None else max(interval[0], -interval[1], 0.0)

    clear = [one for one in contrasts if clearance(one) > 0]
    return max(clear, key=clearance) if clear else largest(finding)


def numbers(axis: str, finding: Decider | None, alpha: float = 0.05) -> str:
    """Return the estimate behind a decision in one phrase, '' where there is none."""
    slope: Estimate | None = getattr(finding, "slope", None)
    if slope is not None:
        return f"order {_spread(slope.value, bounds(slope, alpha))}"
    contrast = telling(finding, alpha)
    if contrast is None:
        return ""
    estimate, pair = contrast.estimate, f"{contrast.a} against {contrast.b}"
    interval = contrast_interval(finding, contrast, alpha)
    if axis == "barrier":
        return f"difference {_spread(estimate.value, interval)} kJ/mol, {pair}"
    ratio = None if interval is None else (exponential(interval[0]), exponential(interval[1]))
    return f"factor {_spread(exponential(estimate.value), ratio)}, {pair}"


def exponential(value: float) -> float:
    """Return e^value, held finite."""
    return math.exp(min(value, 700.0))


def listed(words: tuple[str, ...] | list[str], last: str = "and") -> str:
    """Return words as a phrase: 'a', 'a and b', 'a, b and c'."""
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} {last} {words[-1]}"
