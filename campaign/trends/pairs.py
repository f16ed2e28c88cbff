"""Pairwise ratios of the response between levels of a recipe: solvents, or additives.

Strata hold everything else: salt, concentration, basis, the other recipe part, temperature
and the state of the electrode. Intervals are simultaneous over the pairs.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import FloatArray, IntArray, Snapshot
from campaign.statistics.equivalence import simultaneous_interval
from campaign.statistics.estimate import Estimate
from campaign.trends import between, confounding, heterogeneity, levels
from campaign.trends.between import NoContrast, Reduced
from campaign.trends.conditions import electrodes
from campaign.trends.findings import Axis, Contrast, Family, Finding
from campaign.trends.levels import LevelFit
from campaign.trends.outliers import outliers
from campaign.trends.response import unit
from campaign.trends.results import (
    Adjusted,
    AxisResult,
    LeftOut,
    RatioEstimate,
    decision_text,
    ratio_of,
    ratios_of,
)
from campaign.trends.sample import Sample, attempt, described, draw, source, texts
from campaign.trends.strata import combine, match

SAME_CONCENTRATION = 0.005
"""Concentrations within 0.5 % are held equal."""


@dataclass(frozen=True)
class Comparison:
    """How the levels of one axis are compared.

    column: of the recipe; held: the other recipe columns; base: the level all others are
    compared with where it occurs ('' = every pair). logarithm: y is ln R, else a barrier
    in kJ/mol, one for each specimen.
    """

    axis: Axis
    column: str
    held: tuple[str, ...]
    base: str = ""
    logarithm: bool = True

    def margin(self, criteria: Criteria) -> float:
        """Return the margin of a difference, in the unit of y."""
        return (
            math.log(criteria.ratio_margin) if self.logarithm else (criteria.barrier_margin_kJ_mol)
        )

    def text(self, a: str, b: str) -> str:
        """Return how the difference of levels a and b is written, with a placeholder."""
        return (
            f"R({a})/R({b}) " + "{:.2f}"
            if self.logarithm
            else (f"barrier({a}) - barrier({b}) " + "{:.1f} kJ/mol")
        )

    def shown(self, value: float) -> float:
        """Return a difference of y as a ratio, or as it is."""
        return ratio_of(value) if self.logarithm else value


SOLVENT = Comparison("solvent", "solvents", ("salt", "additives", "basis"))
ADDITIVE = Comparison("additive", "additives", ("salt", "solvents", "basis"), base="none")
BARRIER_BY_SOLVENT = replace(SOLVENT, axis="barrier", logarithm=False)
BARRIER_BY_ADDITIVE = replace(ADDITIVE, axis="barrier", logarithm=False)


@dataclass(frozen=True)
class PairsFit:
    """What a comparison leaves: sample used, level fit, finding, adjusted ratios by pair."""

    sample: Sample
    fit: LevelFit
    finding: Finding
    adjusted: dict[tuple[str, str], Adjusted]


def estimate(
    how: Comparison, snapshot: Snapshot, criteria: Criteria, response: str, porous: bool,
    scale: str | None,
) -> AxisResult:  # fmt: skip
    """Return the pairwise ratios of every electrode. Raises Refused for an unknown response."""
    found: list[RatioEstimate] = []
    left: list[LeftOut] = []
    for electrode in electrodes(snapshot):
        whole = draw(snapshot, source(snapshot, criteria, electrode, scale), response, porous)
        left += whole.left_out
        if not len(whole):
            continue
        try:
            fitted = attempt(replace(whole, left_out=()), lambda s: compare(s, criteria, how))
        except NoContrast as reason:
            left.append(LeftOut(str(reason), len(whole), electrode))
            continue
        found += _records(fitted, criteria, how)
    return AxisResult(how.axis, response, unit(response), tuple(found), left_out=tuple(left))


def compare(s: Sample, criteria: Criteria, how: Comparison, by_cell: bool = False) -> PairsFit:
    """Compare the levels of a recipe column within strata of everything else.

    by_cell: fit one effect a cell, see `between.fit`.
    Raises NoContrast with a reason where no stratum holds two levels.
    """
    if not len(s):
        raise NoContrast(f"no readings with {s.response}")
    level = getattr(s.c, how.column)
    if len(np.unique(level)) < 2:
        raise NoContrast(f"one level of {how.column} only ({s.c.name(how.column, int(level[0]))})")
    held = _held(s, how)
    stratum = combine(held, s.c.temperature, s.state)
    lone = between.lone(stratum, level)
    if lone.all():
        raise NoContrast(f"no stratum holds two {how.column} under equal conditions")
    s = s.leaving(lone, between.NO_STRATUM_CONTRAST)
    stratum, held = combine(stratum[~lone]), combine(held[~lone])
    codes = np.unique(level[~lone])
    names = [s.c.name(how.column, int(code)) for code in codes]
    cells = between.reduced(s, stratum) if by_cell else None
    parts = _Parts(np.searchsorted(codes, level[~lone]), stratum, held, names, cells)
    return _judge(s, parts, criteria, how)


@dataclass(frozen=True)
class _Parts:
    """Columns of a comparison: level codes into `names`, strata, held recipe conditions."""

    level: IntArray
    stratum: IntArray
    held: IntArray
    names: list[str]
    cells: Reduced | None


def _held(s: Sample, how: Comparison) -> IntArray:
    concentration = match(np.log(s.c.concentration), SAME_CONCENTRATION).codes
    return combine(concentration, *(getattr(s.c, name) for name in how.held))


def _judge(s: Sample, p: _Parts, criteria: Criteria, how: Comparison) -> PairsFit:
    fitted = levels.fit_levels(s, p.level, p.stratum, by_cell=p.cells)
    contrasts, family, count = _contrasts(fitted, p.names, how)
    related = levels.correlation(fitted, contrasts, p.names) if family == "dunnett" else None
    warnings = list(s.warnings)
    if s.n_specimens == 1:
        warnings.append("one specimen: no interval between specimens")
    elif not any(math.isfinite(c.estimate.se) for c in contrasts):
        warnings.append("one specimen a condition: no interval between specimens")
    split = _splits(s, fitted, p, criteria, how)
    warnings += [f"ratios differ between strata: {one.text}" for one in split]
    apart = next((one for one in split if one.apart), None)
    confounders = confounding.between_cells(s, _dummies(p), p.stratum, criteria)
    warnings += [one.warning(how.column) for one in confounders]
    finding = Finding(
        how.axis, s.response, s.n_specimens, len(s), contrasts=contrasts,
        contrast_margin=how.margin(criteria), family=family, n_levels=count,
        open_because=s.open_because or (None if how.logarithm else s.pore_open)
        or (f"strata differ, {apart.text}" if apart else None),
        confounded=bool(confounders), warnings=tuple(warnings), correlation=related,
    )  # fmt: skip
    adjusted = _adjusted(s, p, contrasts, confounders[0], how) if confounders else {}
    return PairsFit(s, fitted, finding, adjusted)


def _dummies(p: _Parts) -> FloatArray:
    return np.asarray(p.level[:, None] == np.arange(1, len(p.names))[None, :], np.float64)


def _contrasts(
    fitted: LevelFit, names: Sequence[str], how: Comparison
) -> tuple[tuple[Contrast, ...], Family, int]:
    """Return the differences of ln R, the family that makes them simultaneous, its levels."""
    if how.base in names:
        base = names.index(how.base)
        contrasts = levels.against(fitted, base, names)
        if contrasts:
            return contrasts, "dunnett", len(contrasts) + 1
    linked = sum(len(group) for group in fitted.groups if len(group) > 1)
    return levels.all_pairs(fitted, names), "tukey", linked


def _splits(
    s: Sample, fitted: LevelFit, p: _Parts, criteria: Criteria, how: Comparison
) -> list[heterogeneity.Split]:
    """Return the significant differences of the ratios between strata."""
    margin = how.margin(criteria)
    first = np.unique(p.held, return_index=True)[1]

    def name(code: int) -> str:
        at = int(first[code])
        recipe = [s.c.name(c, int(getattr(s.c, c)[at])) for c in how.held if c != "basis"]
        return " / ".join([f"{s.c.concentration[at]:.4g} {s.c.name('basis', int(s.c.basis[at]))}",
                           *recipe])  # fmt: skip

    found = [
        heterogeneity.differences_by_group(
            s,
            p.level,
            p.stratum,
            p.held,
            margin,
            name,
            lambda a, b: how.text(p.names[a], p.names[b]),
            how.shown,
            p.cells,
        )
    ]
    group = fitted.groups[0]
    if len(fitted.groups) == 1 and len(group) == len(p.names):
        effects = np.array(
            [fitted.difference(one, 0, p.names).estimate.value for one in group if one]
        )
        texts = [how.text(p.names[one], p.names[0]) for one in group if one]
        found += heterogeneity.within_axes(
            s, _dummies(p), p.held, effects, margin, texts, how.shown
        )
    return [one for one in found if one is not None and one.p < criteria.heterogeneity_p]


def _adjusted(
    s: Sample, p: _Parts, contrasts: Sequence[Contrast], confounder: confounding.Confounder,
    how: Comparison,
) -> dict[tuple[str, str], Adjusted]:  # fmt: skip
    """Return the differences with the confounder's column held."""
    try:
        fitted = levels.fit_levels(s, p.level, p.stratum, confounder.column[:, None])
    except NoContrast:
        return {(c.a, c.b): Adjusted(confounder.name, math.nan, None) for c in contrasts}
    found = {}
    for c in contrasts:
        one = fitted.difference(p.names.index(c.a), p.names.index(c.b), p.names).estimate
        interval = one.interval()
        ci = None if interval is None else (how.shown(interval[0]), how.shown(interval[1]))
        found[c.a, c.b] = Adjusted(confounder.name, how.shown(one.value), ci)
    return found


def simultaneous(e: Estimate, finding: Finding, alpha: float) -> tuple[float, float] | None:
    """Return the simultaneous interval of one of a finding's contrasts, in its unit."""
    count = len(finding.contrasts)
    return simultaneous_interval(
        e, finding.family, finding.n_levels, count, alpha, finding.correlation
    )


def _records(fitted: PairsFit, criteria: Criteria, how: Comparison) -> list[RatioEstimate]:
    s, finding, alpha = fitted.sample, fitted.finding, criteria.error_probability
    shown = outliers(s, fitted.fit.fit)
    held = {name: texts(s, name) for name in how.held}
    common = {**described(s, held), "warnings": finding.warnings}
    return [
        RatioEstimate(
            **common,
            a=c.a,
            b=c.b,
            ratio=ratio_of(c.estimate.value),
            ratio_ci=ratios_of(simultaneous(c.estimate, finding, alpha)),
            df=c.estimate.df if math.isfinite(c.estimate.se) else math.nan,
            sigma_between=fitted.fit.fit.sigma_between,
            sigma_within=fitted.fit.fit.sigma_within,
            decision=decision_text(replace(finding, contrasts=(c,)), alpha),
            adjusted=fitted.adjusted.get((c.a, c.b)),
            outliers=shown,
            finding=finding,
        )
        for c in finding.contrasts
    ]
