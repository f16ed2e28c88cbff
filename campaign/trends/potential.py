"""Potential: how the response varies with it within one electrolyte.

The decision uses the span of the level means; the law (flat, exponential, valley) only
describes. Both rest on differences within specimens, compared between specimens: repeated
readings of one cell never narrow an interval.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends import spans
from campaign.trends.between import NoContrast
from campaign.trends.conditions import electrodes
from campaign.trends.findings import Finding
from campaign.trends.laws import Law, choose
from campaign.trends.pairs import simultaneous
from campaign.trends.response import unit
from campaign.trends.results import (
    AxisResult,
    LeftOut,
    PotentialEstimate,
    decision_text,
    ratio_of,
    ratios_of,
)
from campaign.trends.sample import Sample, described, draw, series, source

PLATEAU = "in a declared two-phase plateau"


def estimate(
    snapshot: Snapshot,
    criteria: Criteria,
    response: str = "R_ct",
    *,
    porous: bool = True,
    scale: str | None = None,
) -> AxisResult:
    """Return span and law over the potential of every series and reference scale.

    Raises Refused for an unknown response.
    """
    found: list[PotentialEstimate] = []
    left: list[LeftOut] = []
    for electrode in electrodes(snapshot):
        whole = draw(snapshot, source(snapshot, criteria, electrode, scale), response, porous)
        left += whole.left_out
        by = ("salt", "solvents", "additives", "basis", "scale")
        for held, part in series(replace(whole, left_out=()), by):
            try:
                found.append(_record(part, held, criteria))
            except NoContrast as reason:
                where = {name: held[name] for name in ("salt", "solvents", "additives")}
                left.append(LeftOut(str(reason), len(part), electrode, **where))
    return AxisResult("potential", response, unit(response), tuple(found), left_out=tuple(left))


def prepare(s: Sample) -> Sample:
    """Return the readings with a potential outside the declared plateaus, counted."""
    s = s.leaving(~_finite(s), "no potential recorded")
    return s.leaving(s.c.plateau, PLATEAU)


def _finite(s: Sample) -> spans.BoolArray:
    import numpy as np

    return np.asarray(np.isfinite(s.c.x_V), np.bool_)


def finding(s: Sample, criteria: Criteria) -> tuple[Sample, Finding, spans.Span]:
    """Return the sample used, the finding and the span of one or more electrolytes.

    Raises NoContrast with a reason where no specimen was measured at two potentials.
    """
    s = prepare(s)
    if not len(s):
        raise NoContrast(f"no readings with {s.response} and a potential outside a plateau")
    s, span = spans.span(s, criteria)
    warnings = [*s.warnings, *span.warnings]
    split = [one for one in span.splits if one.p < criteria.heterogeneity_p]
    warnings += [f"spans differ between electrolytes: {one.text}" for one in split]
    apart = next((one for one in split if one.apart), None)
    if s.n_specimens == 1:
        warnings.append("one specimen: no interval between specimens")
    plain = Finding(
        "potential", s.response, span.n_specimens, len(s), contrasts=span.contrasts,
        contrast_margin=math.log(criteria.ratio_margin), family="tukey", n_levels=span.n_levels,
        open_because=f"strata differ, {apart.text}" if apart else None,
        confounded=bool(span.confounders), warnings=tuple(warnings),
    )  # fmt: skip
    if span.window_V >= criteria.potential_window_V - 1e-9:
        return s, plain, span
    text = (
        f"the potentials span {span.window_V * 1e3:.0f} mV, less than the "
        f"{criteria.potential_window_V * 1e3:.0f} mV a decision needs"
    )
    plain = replace(plain, warnings=(*plain.warnings, text))
    if plain.decision(criteria.error_probability) == "responds":
        return s, plain, span
    return s, replace(plain, open_because="window too narrow"), span


def _record(s: Sample, held: dict[str, str], criteria: Criteria) -> PotentialEstimate:
    s, found, span = finding(s, criteria)
    alpha = criteria.error_probability
    law = choose(s, alpha)
    reference = held.pop("scale")
    value, interval = span_interval(found, alpha)
    return PotentialEstimate(
        **described(s, held),
        law=law.name,
        span=value,
        span_ci=interval,
        **_parameters(law),
        window_V=span.window_V,
        reference=reference,
        aicc=law.aicc,
        levels=span.levels,
        df=span.df,
        sigma_between=span.sigma_between,
        sigma_within=span.sigma_within,
        decision=decision_text(found, alpha),
        warnings=(*found.warnings, *law.warnings),
        adjusted=span.adjusted,
        finding=found,
    )


def _parameters(law: Law) -> dict[str, Any]:
    names = ("E0_V", "E0_ci", "g", "g_ci", "slope_per_V", "slope_ci")
    return {name: getattr(law, name) for name in names}


def span_interval(found: Finding, alpha: float) -> tuple[float, tuple[float, float] | None]:
    """Return the largest ratio of two level means and its interval.

    From the simultaneous intervals of all differences: the largest lower and the largest
    upper limit of |difference| bound the span with the same confidence.
    """
    value = max(abs(c.estimate.value) for c in found.contrasts)
    limits = [
        limit
        for c in found.contrasts
        if (limit := simultaneous(c.estimate, found, alpha)) is not None
    ]
    if not limits:
        return ratio_of(value), None
    low = max(0.0, *(max(a, -b) for a, b in limits))
    high = max(max(-a, b) for a, b in limits)
    return ratio_of(value), ratios_of((low, high))
