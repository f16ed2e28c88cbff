"""Which cells are built, in which order, and how their specimens differ."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from datetime import datetime, timedelta

import numpy as np

from maker.films import (
    BARRIER_SPREAD,
    BETWEEN,
    FILM_A,
    FILM_B,
    FILM_C,
    FILM_D,
    MEDIA_A,
    MEDIA_B,
    MEDIA_C,
    MEDIA_D,
    QUANTITIES,
    Film,
    Medium,
)

FIRST_DAY = datetime(2026, 2, 2)
LAST_ASSEMBLY = datetime(2026, 7, 9)


@dataclass(frozen=True)
class Cell:
    """One cell of the plan; `molarity` of the salt, `ions` of Na+ a formula unit."""

    label: str
    film: Film
    medium: Medium
    salt: str
    molarity: float
    replicate: int
    reference: str = "Na/Na+"
    ions: int = 1
    area_cm2: float = 0.785
    operator: str = "op-1"
    assembled_at: datetime = FIRST_DAY
    rest_h: float = 24.0
    effects: dict[str, float] = field(default_factory=dict)

    @property
    def concentration(self) -> float:
        """Concentration of Na+ [mol/L]."""
        return self.molarity * self.ions


def series(
    film: Film, medium: Medium, salt: str, molarities: Sequence[float], replicates: int
) -> list[Cell]:
    """Return unlabelled cells: `replicates` at each molarity."""
    reference = "Ag/AgCl" if medium.aqueous else "Na/Na+"
    return [
        Cell("", film, medium, salt, c, copy, reference)
        for c in molarities
        for copy in range(1, replicates + 1)
    ]


def plan_a() -> list[Cell]:
    """Return the cells of electrode A: three solvents, four concentrations, one additive."""
    carbonate, pc, diglyme, fec = MEDIA_A
    four = (0.1, 0.25, 0.5, 1.0)
    return [
        *series(FILM_A, carbonate, "NaPF6", four, 2),
        *series(FILM_A, pc, "NaPF6", four, 1),
        *series(FILM_A, diglyme, "NaPF6", four, 2),
        *series(FILM_A, fec, "NaPF6", (1.0,), 3),
    ]


def plan_b() -> list[Cell]:
    """Return the cells of electrode B: water and two organic solvents, wide in concentration."""
    four = (0.1, 0.3, 1.0, 2.0)
    return [
        *series(FILM_B, MEDIA_B[0], "NaClO4", four, 3),
        *series(FILM_B, MEDIA_B[1], "NaClO4", four, 2),
        *series(FILM_B, MEDIA_B[2], "NaClO4", four, 2),
    ]


def plan_c() -> list[Cell]:
    """Return the cells of electrode C: additives and solvents matter."""
    carbonate, fec, vc, diglyme, pc = MEDIA_C
    return [
        *series(FILM_C, carbonate, "NaPF6", (0.1, 0.25, 0.5, 1.0), 2),
        *series(FILM_C, fec, "NaPF6", (0.5, 1.0), 2),
        *series(FILM_C, vc, "NaPF6", (1.0,), 2),
        *series(FILM_C, diglyme, "NaPF6", (0.5, 1.0), 2),
        *series(FILM_C, pc, "NaPF6", (0.5, 1.0), 2),
    ]


def plan_d() -> list[Cell]:
    """Return the cells of electrode D: four cells, hardly two of which can be compared."""
    pc, water = MEDIA_D
    aqueous = replace(series(FILM_D, water, "Na2SO4", (0.5,), 1)[0], reference="SCE", ions=2)
    return [
        *series(FILM_D, pc, "NaClO4", (1.0,), 2),
        *series(FILM_D, pc, "NaClO4", (0.5,), 1),
        aqueous,
    ]


def n_late(cell: Cell) -> int:
    """Return how often a cell's middle condition is measured again, weeks later.

    Second copies only, so that potential (first copies) and age stay apart.
    """
    if cell.replicate != 2 or cell.film is FILM_D:
        return 0
    return 3 if cell.film is FILM_C else 1


def centred(values: np.ndarray, groups: Sequence[object]) -> np.ndarray:
    """Return values less the mean of their group."""
    out = values.astype(float)
    for group in dict.fromkeys(groups):
        rows = [i for i, other in enumerate(groups) if other == group]
        out[rows] -= out[rows].mean()
    return out


def strata_of_axes(cells: Sequence[Cell]) -> list[tuple[np.ndarray, list[object]]]:
    """Return (level, stratum) columns of every axis between cells.

    Concentration also within each medium of four cells and more: the others get level 0.
    """
    ln_c = np.array([math.log(c.concentration) for c in cells])
    media = [(c.medium.solvents, c.medium.additive) for c in cells]
    axes: list[tuple[np.ndarray, list[object]]] = [(ln_c, list(media))]
    for medium in dict.fromkeys(media):
        inside = [other == medium for other in media]
        if sum(inside) >= 4:
            axes.append((ln_c, [i if not here else -1 for i, here in enumerate(inside)]))
    for part in (0, 1):
        strata: list[object] = [(c.concentration, m[1 - part])
                                for c, m in zip(cells, media, strict=True)]  # fmt: skip
        for level in dict.fromkeys(m[part] for m in media):
            axes.append((np.array([float(m[part] == level) for m in media]), strata))
    return axes


def worst_confounding(
    axes: Sequence[tuple[np.ndarray, list[object]]], order: np.ndarray, copies: np.ndarray
) -> float:
    """Return the largest |r| [1] within strata between an axis and the order of assembly.

    Cells count once, and again as often as their middle condition is measured (`copies`).
    """
    worst = 0.0
    for rows in (np.arange(len(order)), np.repeat(np.arange(len(order)), copies)):
        for level, strata in axes:
            groups = [strata[i] for i in rows]
            x, y = centred(level[rows], groups), centred(order[rows], groups)
            scale = math.sqrt(float(x @ x) * float(y @ y))
            worst = max(worst, abs(float(x @ y)) / scale if scale > 1e-9 else 0.0)
    return worst


def restricted_order(cells: Sequence[Cell], rng: np.random.RandomState) -> np.ndarray:
    """Return a random order that keeps every axis apart from time: |r| < 0.4.

    Restricted randomisation: with few cells a free shuffle often confounds an axis with
    the calendar, so a shuffle is mended by random exchanges. The tiny electrode D keeps
    whatever comes.
    """
    order = rng.permutation(len(cells)).astype(float)
    axes = strata_of_axes(cells)
    copies = np.array([1 + n_late(cell) for cell in cells])
    worst = worst_confounding(axes, order, copies)
    while len(cells) > 5 and worst >= 0.4:
        i, j = rng.randint(len(cells), size=2)
        trial = order.copy()
        trial[[i, j]] = trial[[j, i]]
        if (now := worst_confounding(axes, trial, copies)) <= worst:
            order, worst = trial, now
    return order


def working_instant(fraction: float, rng: np.random.RandomState) -> datetime:
    """Return an instant on a working day, `fraction` of the way through the campaign."""
    day = FIRST_DAY + (LAST_ASSEMBLY - FIRST_DAY) * fraction
    day = day.replace(hour=0, minute=0, second=0, microsecond=0)
    while day.weekday() > 4:
        day += timedelta(days=1)
    return day + timedelta(minutes=int(rng.randint(9 * 12, 17 * 12)) * 5)


def schedule(letter: str, cells: Sequence[Cell], rng: np.random.RandomState) -> list[Cell]:
    """Return the cells labelled in order of assembly, with dates, areas and own effects."""
    order = restricted_order(cells, rng)
    rests = 24.0 + 24.0 * (restricted_order(cells, rng) / len(cells))
    out = []
    for rank in range(len(cells)):
        i = int(np.flatnonzero(order == rank)[0])
        effects = {name: BETWEEN * float(rng.standard_normal()) for name in QUANTITIES}
        effects["R_el"] *= 0.7
        effects["barrier"] = BARRIER_SPREAD * float(rng.standard_normal())
        for name in ("Q_sl", "Q_ct", "Q_lat"):
            effects[name] = 0.08 * float(rng.standard_normal())
        for name, middle in (("n_sl", 0.90), ("n_ct", 0.88), ("n_lat", 0.93)):
            effects[name] = middle + 0.01 * float(rng.standard_normal())
        out.append(
            replace(
                cells[i],
                label=f"{letter}{rank + 1:02d}",
                area_cm2=(0.503, 0.785, 1.131)[int(rng.randint(3))],
                operator=f"op-{1 + int(rng.randint(3))}",
                assembled_at=working_instant((rank + 0.5) / len(cells), rng),
                rest_h=round(float(rests[i]), 1),
                effects=effects,
            )
        )
    return out
