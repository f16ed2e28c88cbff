"""Solvent: pairwise ratios R(a)/R(b), and the regression on donor number."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends import between
from campaign.trends.between import NoContrast
from campaign.trends.conditions import electrodes
from campaign.trends.pairs import SOLVENT, PairsFit, compare
from campaign.trends.pairs import estimate as estimate_pairs
from campaign.trends.results import AxisResult, DonorEstimate
from campaign.trends.sample import Sample, attempt, described, draw, source
from campaign.trends.strata import combine

LEAST_SOLVENTS = 3


def estimate(
    snapshot: Snapshot,
    criteria: Criteria,
    response: str = "R_ct",
    *,
    porous: bool = True,
    scale: str | None = None,
    donor: bool = False,
) -> AxisResult:
    """Return R(a)/R(b) of every pair of solvents, simultaneous (Tukey-Kramer).

    donor: add the regression of ln R on the donor number of the solvents [kcal/mol] where
    an electrode has at least three single solvents with one. Raises Refused for an unknown
    response.
    """
    result = estimate_pairs(SOLVENT, snapshot, criteria, response, porous, scale)
    if not donor:
        return result
    found, warnings = [], []
    for electrode in electrodes(snapshot):
        whole = draw(snapshot, source(snapshot, criteria, electrode, scale), response, porous)
        try:
            found.append(attempt(whole, lambda s: on_donor_number(s, criteria)))
        except NoContrast as reason:
            warnings.append(f"{electrode}: no regression on donor number, {reason}")
    return replace(result, donor=tuple(found), warnings=(*result.warnings, *warnings))


def fit(s: Sample, criteria: Criteria, by_cell: bool = False) -> PairsFit:
    """Compare the solvents of one sample. Raises NoContrast."""
    return compare(s, criteria, SOLVENT, by_cell)


def donor_numbers(names: tuple[str, ...]) -> dict[str, float]:
    """Return the donor numbers [kcal/mol] of the blends that are one tabulated solvent."""
    from campaign.chemistry.species import find

    known = {}
    for name in names:
        species = find(name)
        if species is not None and species.donor_number is not None:
            known[name] = float(species.donor_number)
    return known


def on_donor_number(s: Sample, criteria: Criteria) -> DonorEstimate:
    """Return the change of ln R per kcal/mol of donor number, within strata.

    A donor number is that of one pure solvent (Gutmann); blends have none and are left out.
    Raises NoContrast with fewer than three.
    """
    if not len(s):
        raise NoContrast(f"no readings with {s.response}")
    known = donor_numbers(s.c.names["solvents"])
    values = np.array([known.get(name, np.nan) for name in s.c.names["solvents"]])
    x = values[s.c.solvents]
    s = s.leaving(~np.isfinite(x), "solvent without a tabulated donor number")
    x = x[np.isfinite(x)]
    if len(np.unique(x)) < LEAST_SOLVENTS:
        raise NoContrast("fewer than three solvents with a tabulated donor number")
    stratum = combine(
        np.unique(s.c.concentration, return_inverse=True)[1], s.c.salt, s.c.additives, s.c.basis,
        s.c.temperature, s.state,
    )  # fmt: skip
    fitted = between.fit(s, x[:, None], stratum)
    slope = fitted.contrast(np.ones(1))
    used = {s.c.name("solvents", int(code)) for code in np.unique(s.c.solvents)}
    return DonorEstimate(
        **described(s, {}),
        slope=slope.value,
        slope_ci=slope.interval(1.0 - criteria.error_probability),
        donor_numbers={name: known[name] for name in sorted(used)},
        df=slope.df if math.isfinite(slope.se) else math.nan,
        sigma_between=fitted.sigma_between,
        sigma_within=fitted.sigma_within,
        decision=None,
        warnings=(
            *s.warnings,
            "donor numbers are those of the pure solvents (Gutmann), in kcal/mol; the slope is "
            "d ln R per kcal/mol and describes these solvents only",
        ),
    )
