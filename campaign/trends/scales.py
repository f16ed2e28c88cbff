"""Potentials on their reference scales: never mixed, unless a scale is asked for."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from campaign.errors import Refused
from campaign.ledger.readings import (
    BoolArray,
    ElectrodeFacts,
    FloatArray,
    IntArray,
    Readings,
    TextArray,
)
from campaign.trends.strata import factor


@dataclass(frozen=True)
class Placed:
    """Potentials `x_V` [V] of n readings on the scale coded by `scale` into `names`."""

    x_V: FloatArray
    scale: IntArray
    names: tuple[str, ...]
    warnings: tuple[str, ...] = ()


def own_reference(references: TextArray, ion: str) -> BoolArray:
    """Return where the reference [n] is the same ion's electrode (Na/Na+ for Na)."""
    from campaign.chemistry.references import is_same_ion

    answers = {name: bool(name) and is_same_ion(name, ion) for name in set(references.tolist())}
    return np.fromiter((answers[name] for name in references), np.bool_, len(references))


def place(readings: Readings, scale: str | None) -> Placed:
    """Return the potentials on their own scales, or all converted to `scale`."""
    coded = factor(readings.reference)
    if scale is None:
        return Placed(readings.potential_V, coded.codes, coded.names)
    x_V = readings.potential_V.copy()
    code = coded.codes.copy()
    names = (*coded.names, scale)
    warnings = []
    for position, name in enumerate(coded.names):
        shift, text = _shift(name, scale)
        rows = coded.codes == position
        if shift is None:
            warnings.append(text)
            continue
        x_V[rows] += shift
        code[rows] = len(coded.names)
        if text:
            warnings.append(text)
    return Placed(x_V, code, names, tuple(warnings))


def _shift(reference: str, scale: str) -> tuple[float | None, str]:
    """Return what to add [V] to a potential against `reference` to have it on `scale`."""
    from campaign.chemistry.references import convert

    if reference == scale:
        return 0.0, ""
    try:
        found = convert(0.0, reference, scale)
    except Refused as reason:
        return None, (
            f"potentials against {reference or 'an unnamed reference'} were left on their own "
            f"scale: {reason}"
        )
    text = f"potentials against {reference} were placed on the {scale} scale"
    return found.value, f"{text}: {found.caution}" if found.caution else text


def in_plateau(readings: Readings, facts: ElectrodeFacts) -> tuple[BoolArray, tuple[str, ...]]:
    """Return which readings lie in a declared two-phase plateau, and what was not checked.

    A plateau is compared on its own scale; a reading against another reference cannot be
    placed and is reported.
    """
    inside = np.zeros(len(readings), np.bool_)
    if not facts.plateaus:
        return inside, ()
    placeable = np.zeros(len(readings), np.bool_)
    for plateau in facts.plateaus:
        same = readings.reference == plateau.reference
        placeable |= same
        low, high = sorted((plateau.low_V, plateau.high_V))
        with np.errstate(invalid="ignore"):
            inside |= same & (readings.potential_V >= low) & (readings.potential_V <= high)
    missed = int((~placeable & np.isfinite(readings.potential_V)).sum())
    if not missed:
        return inside, ()
    return inside, (
        f"{missed} readings have another reference than the declared plateau, and could not be "
        "checked against it",
    )
