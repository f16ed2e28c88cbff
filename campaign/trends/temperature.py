"""Temperature: Arrhenius barriers in both forms, and their differences.

Ea of `ln R` (common in papers) and of `ln(R/T)` (from R_ct = RT/zF i0) are always both given.
"""

from __future__ import annotations

import math
from dataclasses import replace
from functools import partial

import numpy as np

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.statistics.random_effects import Combined, combine
from campaign.trends import confounding, heterogeneity, strata
from campaign.trends.barriers import Barriers, barriers, usable
from campaign.trends.between import NoContrast
from campaign.trends.conditions import electrodes
from campaign.trends.pairs import (
    BARRIER_BY_ADDITIVE,
    BARRIER_BY_SOLVENT,
    SAME_CONCENTRATION,
    Comparison,
    PairsFit,
    compare,
    simultaneous,
)
from campaign.trends.response import unit
from campaign.trends.results import (
    Adjusted,
    AxisResult,
    BarrierDifference,
    BarrierEstimate,
    LeftOut,
    decision_text,
)
from campaign.trends.sample import Sample, attempt, described, draw, recipe, series, source


def estimate(
    snapshot: Snapshot,
    criteria: Criteria,
    response: str = "R_ct",
    *,
    porous: bool = True,
    scale: str | None = None,
) -> AxisResult:
    """Return the barriers of every series and the differences between electrolytes.

    Differences: every pair of solvents (Tukey-Kramer), additives against the additive-free
    blend (Dunnett), each within what else is held. Raises Refused for an unknown response.
    """
    found: list[BarrierEstimate] = []
    left: list[LeftOut] = []
    differences: list[BarrierDifference] = []
    for electrode in electrodes(snapshot):
        whole = draw(snapshot, source(snapshot, criteria, electrode, scale), response, porous)
        left += whole.left_out
        whole = replace(whole, left_out=())
        for held, part in series(whole):
            try:
                found.append(attempt(part, partial(_record, held=held, criteria=criteria)))
            except NoContrast as reason:
                left.append(LeftOut(str(reason), len(part), electrode, **recipe(part)))
        for how in (BARRIER_BY_SOLVENT, BARRIER_BY_ADDITIVE):
            differences += _differences(whole, criteria, how)
    return AxisResult(
        "temperature", response, unit(response), tuple(found), tuple(differences), tuple(left)
    )


def fit(s: Sample, criteria: Criteria, how: Comparison = BARRIER_BY_SOLVENT) -> PairsFit:
    """Compare the barriers of solvents or additives. Raises NoContrast."""
    s, inside = usable(s)
    column = getattr(s.c, how.column)
    if len(np.unique(column)) < 2:
        name = s.c.name(how.column, int(column[0]))
        raise NoContrast(f"barriers in one level of {how.column} only ({name})")
    found = barriers(s, inside)
    fitted = compare(found.by_specimen, criteria, how)
    within = confounding.within_cells(s, found.x, inside, criteria)
    finding = replace(
        fitted.finding,
        n_measurements=len(s),
        confounded=fitted.finding.confounded or bool(within),
        warnings=(*fitted.finding.warnings, *(one.warning("temperature") for one in within)),
    )
    return replace(fitted, finding=finding)


def _record(s: Sample, held: dict[str, str], criteria: Criteria) -> BarrierEstimate:
    s, inside = usable(s)
    alpha = criteria.error_probability
    found = barriers(s, inside)
    plain = _combined(found)
    over_T = _combined(barriers(s, inside, over_T=True))
    within = confounding.within_cells(s, found.x, inside, criteria)
    warnings = [*s.warnings, *(one.warning("temperature") for one in within)]
    if s.n_specimens == 1:
        warnings.append("one specimen: no interval between specimens")
    split = _by_concentration(found, criteria)
    if split is not None and split.p < criteria.heterogeneity_p:
        warnings.append(f"barriers differ with concentration: {split.text}")
    reason = s.open_because or s.pore_open
    return BarrierEstimate(
        **described(s, held),
        Ea_kJ_mol=plain.estimate.value,
        Ea_ci=plain.estimate.interval(1.0 - alpha),
        Ea_lnRT_kJ_mol=over_T.estimate.value,
        Ea_lnRT_ci=over_T.estimate.interval(1.0 - alpha),
        df=plain.estimate.df if plain.k > 1 else math.nan,
        sigma_between=plain.tau,
        sigma_within=found.slopes.sigma_within,
        decision=f"open: {reason}" if reason else None,
        warnings=tuple(warnings),
        adjusted=_adjusted(found, within[0], alpha) if within else None,
    )


def _by_concentration(found: Barriers, criteria: Criteria) -> heterogeneity.Split | None:
    """Test whether specimens at different concentrations have different barriers."""
    rows = found.by_specimen
    level = strata.combine(strata.match(np.log(rows.c.concentration), SAME_CONCENTRATION).codes)
    names = [f"{rows.c.concentration[level == i][0]:.4g}" for i in range(int(level.max()) + 1)]
    margin = criteria.barrier_margin_kJ_mol
    return heterogeneity.between_groups(rows.y, level, margin, names, "{:.1f} kJ/mol")


def _combined(found: Barriers) -> Combined:
    """Return the mean barrier over specimens: one value a specimen, REML, Hartung-Knapp."""
    rows = found.by_specimen
    if rows.n_specimens == len(rows):
        return combine(found.slopes.slope, found.slopes.variance)
    # a specimen moved through several electrolytes of the series counts once
    code = strata.combine(rows.c.specimen)
    count = np.bincount(code)
    return combine(strata.means(rows.y, code), np.bincount(code, rows.known) / count**2)


def _adjusted(found: Barriers, confounder: confounding.Confounder, alpha: float) -> Adjusted:
    corrected = confounding.without_drift(
        found.sample, confounder, found.inside, found.sample.c.temperature
    )
    if corrected is None:
        return Adjusted(confounder.name, math.nan, None)
    e = _combined(barriers(corrected, found.inside)).estimate
    return Adjusted(confounder.name, e.value, e.interval(1.0 - alpha))


def _differences(s: Sample, criteria: Criteria, how: Comparison) -> list[BarrierDifference]:
    try:
        fitted = attempt(s, lambda part: fit(part, criteria, how))
    except NoContrast:
        return []
    finding, alpha = fitted.finding, criteria.error_probability
    return [
        BarrierDifference(
            electrode=s.electrode,
            compared=how.column,
            a=c.a,
            b=c.b,
            difference_kJ_mol=c.estimate.value,
            difference_ci=simultaneous(c.estimate, finding, alpha),
            df=c.estimate.df if math.isfinite(c.estimate.se) else math.nan,
            n_specimens=finding.n_specimens,
            decision=decision_text(replace(finding, contrasts=(c,)), alpha),
            warnings=finding.warnings,
        )
        for c in finding.contrasts
    ]
