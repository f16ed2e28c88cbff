"""Concentration: the reaction order m = -d ln R / d ln c.

One estimate for each electrode, salt, solvents, additives and basis; strata hold temperature
and the state of the electrode.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import FloatArray, IntArray, Snapshot
from campaign.statistics.estimate import Estimate
from campaign.trends import between, confounding, heterogeneity, levels
from campaign.trends.bases import in_activity
from campaign.trends.between import BetweenFit, NoContrast, Reduced
from campaign.trends.conditions import electrodes
from campaign.trends.findings import Contrast, Finding
from campaign.trends.outliers import outliers
from campaign.trends.response import unit
from campaign.trends.results import (
    Adjusted,
    AxisResult,
    LeftOut,
    LevelRatio,
    OrderEstimate,
    decision_text,
    ratio_of,
    ratios_of,
)
from campaign.trends.sample import SERIES, Sample, attempt, described, draw, recipe, series, source
from campaign.trends.strata import combine

SAME_LEVEL = 0.005
"""Concentrations within 0.5 % are one level."""


@dataclass(frozen=True)
class OrderFit:
    """What a fit of the order leaves: sample used, fit, finding, levels and adjustment."""

    sample: Sample
    fit: BetweenFit
    finding: Finding
    levels: tuple[float, ...]
    adjusted: Adjusted | None


def estimate(
    snapshot: Snapshot,
    criteria: Criteria,
    response: str = "R_ct",
    *,
    porous: bool = True,
    scale: str | None = None,
    activity: bool = False,
    age_adjusted: bool = False,
) -> AxisResult:
    """Return the reaction order of every series of the campaign.

    porous, scale: see `sample.draw` and `conditions.condition`. activity: the order in the
    activity, where mean activity coefficients are tabulated for the electrolytes.
    age_adjusted: give the order with the age held beside every order, not only where
    something is confounded.
    Raises Refused for an unknown response.
    """
    found: list[OrderEstimate] = []
    left: list[LeftOut] = []
    for electrode in electrodes(snapshot):
        whole = draw(snapshot, source(snapshot, criteria, electrode, scale), response, porous)
        left += whole.left_out
        for held, part in series(replace(whole, left_out=())):
            try:
                fitted = attempt(part, lambda s: order(s, criteria, (), activity, age_adjusted))
                found.append(_record(fitted, held, criteria, activity))
            except NoContrast as reason:
                left.append(LeftOut(str(reason), len(part), electrode, **recipe(part)))
    return AxisResult("concentration", response, unit(response), tuple(found), left_out=tuple(left))


def order(
    s: Sample,
    criteria: Criteria,
    held: Sequence[str] = SERIES,
    activity: bool = False,
    age_adjusted: bool = False,
    by_cell: bool = False,
) -> OrderFit:
    """Fit the common order within strata of temperature, state and the `held` columns.

    by_cell: fit one effect a cell, see `between.fit`.
    Raises NoContrast with a reason where no stratum holds two concentrations.
    """
    with np.errstate(invalid="ignore"):
        unknown = ~(s.c.concentration > 0)
    s = s.leaving(unknown, "no concentration recorded")
    s, x = in_activity(s) if activity else (s, np.log(s.c.concentration))
    if not len(s):
        raise NoContrast(f"no readings with {s.response}")
    level, centres = levels.group_levels(np.log(s.c.concentration), SAME_LEVEL)
    if len(centres) < 2:
        raise NoContrast(f"one concentration only ({math.exp(centres[0]):.4g})")
    stratum = combine(s.c.temperature, s.state, *(getattr(s.c, name) for name in held))
    keep = between.lone(stratum, level)
    if keep.all():
        raise NoContrast("no stratum holds two concentrations under equal conditions")
    s = s.leaving(keep, between.NO_STRATUM_CONTRAST)
    x, level, stratum = x[~keep], combine(level[~keep]), combine(stratum[~keep])
    concentrations = levels.medians(s.c.concentration, level)
    group = combine(*(getattr(s.c, name) for name in held)) if held else np.zeros_like(level)
    cells = between.reduced(s, stratum) if by_cell else None
    fitted = between.fit(s, x[:, None], stratum, cells)
    parts = _Parts(x, level, concentrations, stratum, group, tuple(held), cells)
    result = _judge(s, fitted, parts, criteria)
    if result.adjusted is None and age_adjusted:
        held_too = confounding.requested(s)
        return replace(result, adjusted=_adjusted(s, parts, held_too[0]) if held_too else None)
    return result


@dataclass(frozen=True)
class _Parts:
    """Columns of the order fit: x = ln c (or ln a), level codes into `concentrations`,
    strata, and series codes `group`."""

    x: FloatArray
    level: IntArray
    concentrations: FloatArray
    stratum: IntArray
    group: IntArray
    held: tuple[str, ...]
    cells: Reduced | None


def _judge(s: Sample, fitted: BetweenFit, p: _Parts, criteria: Criteria) -> OrderFit:
    """Return the fit with its finding: contrasts, heterogeneity, confounding, warnings."""
    slope = _negative(fitted.contrast(np.ones(1)))
    contrasts, p_line = _levels(s, p)
    warnings = list(s.warnings)
    if s.n_specimens == 1:
        warnings.append("one specimen: no interval between specimens")
    elif not math.isfinite(slope.se):
        warnings.append("one specimen a condition: no interval between specimens")
    if p_line is not None and p_line < criteria.heterogeneity_p:
        warnings.append(f"ln R is not a straight line over ln c (lack of fit, p = {p_line:.2g})")
    split = _splits(s, slope.value, p, criteria)
    warnings += [f"orders differ between strata: {one.text}" for one in split]
    apart = next((one for one in split if one.apart), None)
    confounders = confounding.between_cells(s, p.x[:, None], p.stratum, criteria)
    warnings += [one.warning("concentration") for one in confounders]
    finding = Finding(
        "concentration", s.response, s.n_specimens, len(s), slope, criteria.order_margin,
        contrasts, math.log(criteria.ratio_margin), n_levels=len(p.concentrations),
        open_because=s.open_because or s.pore_open
        or (f"strata differ, {apart.text}" if apart else None),
        confounded=bool(confounders), warnings=tuple(warnings),
    )  # fmt: skip
    adjusted = _adjusted(s, p, confounders[0]) if confounders else None
    return OrderFit(s, fitted, finding, tuple(p.concentrations.tolist()), adjusted)


def _negative(e: Estimate) -> Estimate:
    return Estimate(-e.value, e.se, e.df)


def _levels(s: Sample, p: _Parts) -> tuple[tuple[Contrast, ...], float | None]:
    """Return level-to-level differences of ln R and the p value of lack of fit."""
    names = [f"{value:.6g}" for value in p.concentrations]
    fitted = levels.fit_levels(s, p.level, p.stratum, by_cell=p.cells)
    contrasts = levels.all_pairs(fitted, names)
    medians_of_x = levels.medians(p.x, p.level)
    return contrasts, heterogeneity.lack_of_fit(fitted, contrasts, medians_of_x)


def _splits(s: Sample, slope: float, p: _Parts, criteria: Criteria) -> list[heterogeneity.Split]:
    """Return the significant differences of the order between strata."""
    margin = criteria.order_margin
    found = []
    if p.held:
        first = np.unique(p.group, return_index=True)[1]

        def name(code: int) -> str:
            at = int(first[code])
            return " / ".join(
                s.c.name(c, int(getattr(s.c, c)[at])) for c in ("salt", "solvents", "additives")
            )

        found.append(
            heterogeneity.order_by_group(s, p.x, p.stratum, p.group, margin, name, p.cells)
        )
    found += heterogeneity.within_axes(
        s, -p.x[:, None], p.group, np.array([slope]), margin, ["order {:.2f}"]
    )
    return [one for one in found if one is not None and one.p < criteria.heterogeneity_p]


def _adjusted(s: Sample, p: _Parts, confounder: confounding.Confounder) -> Adjusted:
    """Return the order with the confounder's column held."""
    try:
        X = np.stack([p.x, confounder.column], axis=1)
        value = _negative(between.fit(s, X, p.stratum).contrast(np.array([1.0, 0.0])))
    except NoContrast:
        return Adjusted(confounder.name, math.nan, None)
    return Adjusted(confounder.name, value.value, value.interval())


def _record(
    fitted: OrderFit, held: dict[str, str], criteria: Criteria, activity: bool
) -> OrderEstimate:
    s, finding = fitted.sample, fitted.finding
    slope = finding.slope
    assert slope is not None
    alpha = criteria.error_probability
    return OrderEstimate(
        **described(s, held),
        order=slope.value,
        order_ci=slope.interval(1.0 - alpha),
        df=slope.df if math.isfinite(slope.se) else math.nan,
        sigma_between=fitted.fit.sigma_between,
        sigma_within=fitted.fit.sigma_within,
        decision=decision_text(finding, alpha),
        warnings=finding.warnings,
        adjusted=fitted.adjusted,
        outliers=outliers(s, fitted.fit),
        finding=finding,
        levels=fitted.levels,
        ratios=tuple(
            LevelRatio(c.a, c.b, ratio_of(e.value), ratios_of(e.interval(1.0 - alpha)))
            for c in finding.contrasts
            for e in (c.estimate,)
        ),
        in_activity=activity,
    )
