"""Age: the drift of ln R since assembly, within specimens.

Readings of one cell at equal temperature and potential are followed over time; the drift is
given over the greatest age the electrode's cells reached. R_sl also against the square root
of age, the law of a film that grows by diffusion through itself.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.statistics.estimate import Estimate
from campaign.statistics.random_effects import Combined, combine
from campaign.statistics.two_stage import Slopes, specimen_slopes
from campaign.trends.between import NoContrast, lone
from campaign.trends.conditions import DAY_s, electrodes
from campaign.trends.findings import Contrast, Finding
from campaign.trends.heterogeneity import Split, between_groups
from campaign.trends.response import unit
from campaign.trends.results import (
    AgeEstimate,
    AxisResult,
    LeftOut,
    decision_text,
    ratio_of,
    ratios_of,
)
from campaign.trends.sample import Sample, described, draw, recipe, series, source
from campaign.trends.strata import combine as code

LEAST_SPAN_d = 1.0
"""Ages must span this [d] before `unresponsive` says anything (common practice)."""

TOO_YOUNG = "ages span less than a day"

LOG_LINEAR, SQUARE_ROOT = "log-linear", "square-root"


@dataclass(frozen=True)
class AgeFit:
    """The drift of one sample: rate [1/d or 1/sqrt d], total drift of ln R, greatest age [d]."""

    sample: Sample
    slopes: Slopes
    combined: Combined
    drift: Estimate
    age_d: float
    finding: Finding


def estimate(
    snapshot: Snapshot,
    criteria: Criteria,
    response: str = "R_ct",
    *,
    porous: bool = True,
    scale: str | None = None,
) -> AxisResult:
    """Return the drift of every series. Raises Refused for an unknown response."""
    found: list[AgeEstimate] = []
    left: list[LeftOut] = []
    laws = (LOG_LINEAR, SQUARE_ROOT) if response == "R_sl" else (LOG_LINEAR,)
    for electrode in electrodes(snapshot):
        whole = draw(snapshot, source(snapshot, criteria, electrode, scale), response, porous)
        left += whole.left_out
        for held, part in series(replace(whole, left_out=())):
            try:
                found += [_record(fit(part, criteria, law), held, criteria, law) for law in laws]
            except NoContrast as reason:
                left.append(LeftOut(str(reason), len(part), electrode, **recipe(part)))
    return AxisResult("age", response, unit(response), tuple(found), left_out=tuple(left))


def fit(s: Sample, criteria: Criteria, law: str = LOG_LINEAR) -> AgeFit:
    """Fit the drift within specimens. Raises NoContrast where no reading was repeated later."""
    if not len(s):
        raise NoContrast(f"no readings with {s.response}")
    s = s.leaving(~np.isfinite(s.c.age_s), "no time of measurement recorded")
    age_d = np.maximum(s.c.age_s, 0.0) / DAY_s
    x = np.sqrt(age_d) if law == SQUARE_ROOT else age_d
    inside = code(s.c.cell, s.c.temperature, s.c.scale, s.c.fixed)
    once = lone(inside, np.unique(x, return_inverse=True)[1])
    if once.all():
        raise NoContrast("no cell was measured twice under equal conditions")
    s = s.leaving(once, "not measured again under equal conditions")
    x, inside, age_d = x[~once], inside[~once], age_d[~once]
    slopes = specimen_slopes(s.y, x, code(s.c.specimen), inside, s.known)
    together = combine(slopes.slope, slopes.variance)
    greatest = float(x.max())
    rate = together.estimate
    drift = Estimate(rate.value * greatest, rate.se * greatest, rate.df)
    oldest = float(age_d.max())
    finding = _finding(s, criteria, slopes, drift, oldest)
    return AgeFit(s, slopes, together, drift, oldest, finding)


def _finding(
    s: Sample, criteria: Criteria, slopes: Slopes, drift: Estimate, oldest: float
) -> Finding:
    warnings = list(s.warnings)
    unknown = int((~s.c.age_since_assembly).sum())
    if unknown:
        warnings.append(
            f"{unknown} readings have no time of assembly: their age counts from the cell's first "
            "measurement"
        )
    if len(slopes.slope) == 1:
        warnings.append("one specimen: no interval between specimens")
    split = _by_series(s, slopes, oldest, criteria)
    apart = None
    if split is not None and split.p < criteria.heterogeneity_p:
        warnings.append(f"drifts differ between electrolytes: {split.text}")
        apart = f"strata differ, {split.text}" if split.apart else None
    plain = Finding(
        "age", s.response, len(slopes.slope), len(s),
        contrasts=(Contrast(f"{oldest:.3g} d", "new", drift),),
        contrast_margin=math.log(criteria.ratio_margin), n_levels=2, warnings=tuple(warnings),
        open_because=apart,
    )  # fmt: skip
    if oldest >= LEAST_SPAN_d or plain.decision(criteria.error_probability) == "responds":
        return plain
    return replace(plain, open_because=TOO_YOUNG)


def _by_series(s: Sample, slopes: Slopes, oldest: float, criteria: Criteria) -> Split | None:
    """Test whether the drift over the greatest age is the same in every electrolyte."""
    first = np.unique(s.c.specimen, return_index=True)[1][slopes.specimen]
    columns = ("salt", "solvents", "additives")
    group = code(*(getattr(s.c, column)[first] for column in columns))
    at = first[np.unique(group, return_index=True)[1]]
    names = [
        " / ".join(s.c.name(column, int(getattr(s.c, column)[row])) for column in columns)
        for row in at
    ]
    margin = math.log(criteria.ratio_margin)
    return between_groups(slopes.slope * oldest, group, margin, names, "factor {:.2f}", ratio_of)


def spans_enough(s: Sample) -> bool:
    """Return True where the greatest age reaches LEAST_SPAN_d."""
    known = s.c.age_s[np.isfinite(s.c.age_s)]
    return bool(len(known)) and float(known.max()) >= LEAST_SPAN_d * DAY_s


def _record(fitted: AgeFit, held: dict[str, str], criteria: Criteria, law: str) -> AgeEstimate:
    s, alpha = fitted.sample, criteria.error_probability
    rate, drift = fitted.combined.estimate, fitted.drift
    return AgeEstimate(
        **described(s, held),
        law=law,
        drift=ratio_of(drift.value),
        drift_ci=ratios_of(drift.interval(1.0 - alpha)),
        rate=rate.value,
        rate_ci=rate.interval(1.0 - alpha),
        rate_unit="1/d" if law == LOG_LINEAR else "1/sqrt(d)",
        age_span_d=fitted.age_d,
        df=rate.df if fitted.combined.k > 1 else math.nan,
        sigma_between=fitted.combined.tau,
        sigma_within=fitted.slopes.sigma_within,
        decision=decision_text(fitted.finding, alpha),
        warnings=fitted.finding.warnings,
        finding=fitted.finding,
    )
