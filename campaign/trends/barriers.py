"""Barriers within specimens: the first of two stages.

Every specimen has its own slope of ln R over 1/RT, within its own cell and state. The second
stage treats these slopes as one value a specimen; repeated readings only tell how well each
is known.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from campaign.kinetics.constants import GAS_CONSTANT
from campaign.ledger.readings import FloatArray, IntArray
from campaign.statistics.two_stage import Slopes, specimen_slopes
from campaign.trends.between import NoContrast, lone
from campaign.trends.sample import Sample
from campaign.trends.strata import combine

NO_TEMPERATURES = "cells without contrast in temperature"


@dataclass(frozen=True)
class Barriers:
    """Barriers [kJ/mol] of single specimens in single electrolytes.

    sample: the readings used; x: 1000/RT [mol/kJ] and inside: specimen, cell and state of
    each. by_specimen: one row a barrier, y [kJ/mol] and known [kJ2/mol2].
    """

    sample: Sample
    x: FloatArray
    inside: IntArray
    slopes: Slopes
    by_specimen: Sample


def usable(s: Sample) -> tuple[Sample, IntArray]:
    """Return the readings of cells with two temperatures in one state, and their strata.

    Raises NoContrast where there is none.
    """
    if not len(s):
        raise NoContrast(f"no readings with {s.response}")
    s = s.leaving(~np.isfinite(s.c.temperature_K), "no temperature recorded")
    inside = combine(s.c.specimen, s.c.cell, s.state)
    alone = lone(inside, s.c.temperature)
    if alone.all():
        raise NoContrast("no specimen was measured at two temperatures in one state")
    return s.leaving(alone, NO_TEMPERATURES), combine(inside[~alone])


def barriers(s: Sample, inside: IntArray, over_T: bool = False) -> Barriers:
    """Return the barriers of the specimens of `s`, by ln R or (over_T) by ln(R/T)."""
    x = 1000.0 / (GAS_CONSTANT * s.c.temperature_K)
    y = s.y - np.log(s.c.temperature_K) if over_T else s.y
    unit = combine(s.c.specimen, s.c.electrolyte)
    slopes = specimen_slopes(y, x, unit, inside, s.known)
    first = np.unique(unit, return_index=True)[1][slopes.specimen]
    one_each = s.take(first)
    zeros = np.zeros(len(first), np.int64)
    known = np.where(np.isfinite(slopes.variance), slopes.variance, 0.0)
    by_specimen = replace(
        one_each, y=slopes.slope, known=known, state=zeros,
        c=replace(one_each.c, temperature=zeros, cell=one_each.c.specimen),
    )  # fmt: skip
    return Barriers(s, x, inside, slopes, by_specimen)
