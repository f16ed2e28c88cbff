"""The candidate steps and what each predicts for its own resistance: data, no computing.

This is the one place that knows electrochemistry; the engine only applies it. To add a
step, add a row to CANDIDATES; to add an axis, add it to AXES and to the wording of WANTED.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

Control = Literal["ion transport", "electron transfer", "host", "mixed"]
Outcome = Literal["responds", "unresponsive"]

AXES: Final = ("concentration", "solvent", "additive", "potential", "barrier", "age")
RESPONSES: Final = ("R_el", "R_sl", "R_ct", "R_lat", "sigma_w")


@dataclass(frozen=True)
class Prediction:
    """What a step predicts: `outcome` on one of `axes` (either-or where there are several).

    required: a decisive result against it eliminates the step; otherwise it is typical.
    """

    axes: tuple[str, ...]
    outcome: Outcome
    required: bool


@dataclass(frozen=True)
class Step:
    """A candidate step: the responses it is `seen_in`, the control it means, its predictions.

    needs_arc: a response whose absence eliminates the step ('' = none).
    """

    name: str
    seen_in: tuple[str, ...]
    control: Control
    predictions: tuple[Prediction, ...]
    needs_arc: str = ""

    @property
    def required(self) -> tuple[Prediction, ...]:
        """The predictions that must hold."""
        return tuple(one for one in self.predictions if one.required)


def _responds(*axes: str) -> Prediction:
    return Prediction(axes, "responds", True)


def _mostly_responds(*axes: str) -> Prediction:
    return Prediction(axes, "responds", False)


def _unresponsive(*axes: str) -> tuple[Prediction, ...]:
    return tuple(Prediction((axis,), "unresponsive", True) for axis in axes)


def _mostly_unresponsive(*axes: str) -> tuple[Prediction, ...]:
    return tuple(Prediction((axis,), "unresponsive", False) for axis in axes)


CANDIDATES: Final[tuple[Step, ...]] = (
    Step(
        "electrolyte conduction", ("R_el",), "ion transport",
        (
            _mostly_responds("concentration"), _mostly_responds("solvent"),
            *_unresponsive("potential"), *_mostly_unresponsive("age"),
        ),
    ),
    Step(
        "electronic contact", ("R_el", "R_sl"), "electron transfer",
        (
            *_unresponsive("concentration", "solvent"),
            *_mostly_unresponsive("additive", "potential", "barrier"),
        ),
    ),
    Step(
        "migration through the surface layer", ("R_sl",), "ion transport",
        (
            _responds("solvent", "additive"), *_mostly_unresponsive("potential"),
            _mostly_responds("age"),
        ),
        needs_arc="R_sl",
    ),
    Step(
        "desolvation and adsorption", ("R_ct",), "ion transport",
        (_responds("concentration"), _responds("solvent", "barrier")),
    ),
    Step(
        "coupled ion and electron transfer", ("R_ct",), "mixed",
        (
            _responds("concentration"), _mostly_responds("potential"),
            *_unresponsive("barrier"),
        ),
    ),
    Step(
        "electron transfer", ("R_ct",), "electron transfer",
        (
            *_unresponsive("concentration", "solvent"), *_mostly_unresponsive("additive"),
            _mostly_responds("potential"), *_mostly_unresponsive("barrier"),
        ),
    ),
    Step(
        "surface diffusion of adsorbed ions", ("R_lat",), "ion transport",
        (_responds("concentration"), _mostly_responds("potential")),
    ),
    Step(
        "incorporation into the lattice", ("R_lat",), "host",
        (
            *_unresponsive("concentration"), *_mostly_unresponsive("solvent"),
            _mostly_responds("potential"), *_mostly_unresponsive("barrier"),
        ),
    ),
    Step(
        "salt diffusion in the electrolyte", ("sigma_w",), "ion transport",
        (
            _responds("concentration"), _mostly_responds("solvent"),
            *_unresponsive("potential"),
        ),
    ),
    Step(
        "solid-state diffusion", ("sigma_w",), "host",
        (
            *_unresponsive("concentration", "solvent"), _mostly_responds("potential"),
            *_mostly_unresponsive("barrier"),
        ),
    ),
)  # fmt: skip


def candidates(response: str) -> tuple[Step, ...]:
    """Return the candidate steps seen in `response` (R_el, R_sl, R_ct, R_lat or sigma_w)."""
    return tuple(step for step in CANDIDATES if response in step.seen_in)


@dataclass(frozen=True)
class Contradiction:
    """Decisions that together leave no step standing, and what could explain them.

    when: (axis, decisions one of which holds) pairs, all of which must hold.
    """

    seen_in: tuple[str, ...]
    when: tuple[tuple[str, tuple[str, ...]], ...]
    reading: str


_EITHER: Final = ("responds", "responds, inverse")

CONTRADICTIONS: Final[tuple[Contradiction, ...]] = (
    Contradiction(
        ("R_ct",),
        (("concentration", ("unresponsive",)), ("solvent", _EITHER)),
        "flat in concentration but strong in solvent: a surface-layer arc merged into R_ct "
        "(refit with two arcs, or vary the film at one solvent), or solvent reorganisation in "
        "the electron transfer",
    ),
    Contradiction(
        ("R_lat", "sigma_w"),
        (("concentration", ("unresponsive",)), ("solvent", _EITHER)),
        "flat in concentration but strong in solvent: the solvent is taken up by the host or "
        "changes it, or a neighbouring arc is merged into this one",
    ),
    Contradiction(
        ("R_el", "R_sl"),
        (("potential", _EITHER), ("solvent", _EITHER)),
        "moves with potential and with solvent: a part of the charge-transfer arc may be "
        "assigned to this one",
    ),
    Contradiction(
        ("R_ct",),
        (("concentration", ("responds",)), ("solvent", ("unresponsive",)),
         ("barrier", _EITHER)),
        "the barrier moves with the solvent but the resistance at the reference temperature "
        "does not: compensating prefactors; compare at another temperature",
    ),
    Contradiction(
        ("R_sl", "R_ct", "R_lat", "sigma_w"),
        (("concentration", ("responds, inverse",)),),
        "the resistance rises with concentration: ion pairing or viscosity at high "
        "concentration, or a surface layer that the salt itself makes thicker",
    ),
)  # fmt: skip

UNEXPLAINED: Final = (
    "no candidate step predicts this combination: look for two processes merged into one arc, "
    "for a change of the cells along one axis, or for strata that are not comparable"
)

WANTED: Final[dict[str, str]] = {
    "concentration": "cells at two or more salt concentrations in one solvent, matched in "
    "ion content or potential against the ion's own electrode, and in temperature",
    "solvent": "cells in two or more solvents at one salt concentration",
    "additive": "cells with and without an additive in one electrolyte",
    "potential": "spectra of the same cells at several potentials over at least 0.1 V outside "
    "plateaus",
    "barrier": "temperature series (three or more temperatures) in two or more solvents",
    "age": "repeated spectra of the same cells over weeks at one potential and temperature",
}
"""What to measure where an axis was never varied."""
