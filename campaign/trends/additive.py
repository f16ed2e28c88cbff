"""Additive: the ratio of the response with an additive to that of the additive-free blend."""

from __future__ import annotations

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends.pairs import ADDITIVE, PairsFit, compare
from campaign.trends.pairs import estimate as estimate_pairs
from campaign.trends.results import AxisResult
from campaign.trends.sample import Sample


def estimate(
    snapshot: Snapshot,
    criteria: Criteria,
    response: str = "R_ct",
    *,
    porous: bool = True,
    scale: str | None = None,
) -> AxisResult:
    """Return R(additive)/R(none) for every additive and amount, simultaneous (Dunnett).

    Additives are compared among themselves (Tukey-Kramer) only where no stratum holds the
    additive-free blend. Raises Refused for an unknown response.
    """
    return estimate_pairs(ADDITIVE, snapshot, criteria, response, porous, scale)


def fit(s: Sample, criteria: Criteria, by_cell: bool = False) -> PairsFit:
    """Compare the additives of one sample. Raises NoContrast."""
    return compare(s, criteria, ADDITIVE, by_cell)
