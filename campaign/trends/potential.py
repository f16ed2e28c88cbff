"""Potential: how the response varies with it within one electrolyte.

The decision uses the span of the level means; the law (flat, exponential, valley) only
describes. Both rest on differences within specimens, compared between specimens: repeated
readings of one cell never narrow an interval.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np

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
from campaign.trends.sample import (
    SERIES,
    Sample,
    described,
    draw,
    recipe,
    series,
    source,
    texts,
)
from campaign.trends.strata import combine

PLATEAU = "in a declared two-phase plateau"


def estimate(
    snapshot: Snapshot,
    criteria: Criteria,
    response: str = "R_ct",
    *,
    porous: bool = True,
    scale: str | None = None,
    together: bool = False,
) -> AxisResult:
    """Return span and law over the potential of every series and reference scale.

    together: all electrolytes of an electrode on one scale as one series, each specimen
    within its own. Raises Refused for an unknown response.
    """
    found: list[PotentialEstimate] = []
    left: list[LeftOut] = []
    for electrode in electrodes(snapshot):
        whole = draw(snapshot, source(snapshot, criteria, electrode, scale), response, porous)
        left += whole.left_out
        by = ("scale",) if together else (*SERIES, "scale")
        for held, part in series(replace(whole, left_out=()), by):
            try:
                found.append(_record(part, held, criteria))
            except NoContrast as reason:
                left.append(LeftOut(str(reason), len(part), electrode, **recipe(part)))
    return AxisResult("potential", response, unit(response), tuple(found), left_out=tuple(left))


def prepare(s: Sample) -> Sample:
    """Return the readings with a potential outside the declared plateaus, counted.

    Against a fixed reference the half-filling potential moves with the electrolyte; where it
    is recorded the potentials of that scale are counted from it, and shown around its median.
    """
    s = s.leaving(~np.isfinite(s.c.x_V), "no potential recorded")
    return _from_half_filling(s.leaving(s.c.plateau, PLATEAU))


def _from_half_filling(s: Sample) -> Sample:
    x_V, fixed = s.c.x_V.copy(), s.c.fixed.copy()
    warnings = []
    for code in np.unique(s.c.scale):
        rows = s.c.scale == code
        offset = s.c.offset_V[rows]
        if (s.c.own[rows] >= 0).any() or not np.isfinite(offset).all():
            continue
        half = float(np.median(s.c.x_V[rows] - offset))
        x_V[rows] = offset + half
        fixed[rows] = s.c.offset[rows]
        warnings.append(
            f"potentials against {s.c.name('scale', int(code))} were counted from the recorded "
            f"half-filling potential and are shown around its median, {half:.4g} V"
        )
    if not warnings:
        return s
    c = replace(s.c, x_V=x_V, fixed=combine(s.c.scale, fixed))
    return replace(s, c=c).warned(*warnings)


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
    value, interval = span_interval(found, alpha)
    return PotentialEstimate(
        **described(s, {**recipe(s), "basis": texts(s, "basis")}),
        law=law.name,
        span=value,
        span_ci=interval,
        **_parameters(law),
        window_V=span.window_V,
        reference=held["scale"],
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
