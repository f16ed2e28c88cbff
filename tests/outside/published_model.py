"""A test campaign made from a published model of insertion kinetics, outside this project.

    python tests/outside/published_model.py FILE.csv

Three electrodes, 36 cells, one flat table in the units a laboratory might use: mm2, K, mV,
kilo-ohm with value±standard error; no form, no time of assembly. Nothing of the program is
used.

[1] Doyle, Fuller, Newman, J. Electrochem. Soc. 140 (1993) 1526: exchange current of insertion,
    i0 = F k c^(1-a) theta^a (1 - theta)^(1-a), so R_ct = R T / (F i0) has the order 1 - a in
    the concentration c of the salt.
[2] Yamada, Iriyama, Abe, Ogumi, Langmuir 25 (2009) 12766: barriers on graphite, LiClO4 in
    EC:DMC and in DMC, 58 and 40 kJ/mol.
[3] Yamada, Sagane, Iriyama, Abe, Ogumi, J. Phys. Chem. C 113 (2009) 14528: barriers at a
    lithium-lanthanum titanate, EC:DMC and DMC, about 50 and 32 kJ/mol.
[4] Nakayama et al., J. Power Sources 174 (2007) 695: barrier at LiMn2O4 in PC, 50 kJ/mol; here
    given to a sodium host, so that two ions are in the table.

The tables are generated at the published values, they are not the published data. Papers of
this kind plot ln(1/R_ct) against 1/T (from memory), so the published numbers are taken as the
ln R form; the ln(R/T) form, which is the barrier of the rate constant k, is larger by
R T, about 2.5 kJ/mol. Scatter: 15 % between specimens, 4 % between readings of one, 1 kJ/mol
between the barriers of specimens (common practice, no source).
"""

from __future__ import annotations

import csv
import io
import math
import sys
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from pathlib import Path

import numpy as np

SEED = 1993
GAS = 8.314462618  # J mol^-1 K^-1
FARADAY = 96485.33212  # C mol^-1
ROOM_K = 298.15
TEMPERATURES_K = (283.15, 298.15, 308.15, 318.15, 328.15)
OFFSETS_V = (-0.045, 0.040)  # beside the half-filling potential, at 298.15 K
BETWEEN, WITHIN, BARRIER_SPREAD = 0.15, 0.04, 1.0
R_CT_SE = 0.02

HEADER = (
    "electrode", "material", "ion", "cell", "A/mm2", "reference", "electrolyte",
    "measured_at", "E/mV", "T/K", "R_el/Ω", "R_sl/Ω", "R_ct/kΩ",
)  # fmt: skip


@dataclass(frozen=True)
class Solvent:
    """A solvent blend: published barrier [kJ/mol, ln R form] and R_ct at 298.15 K, 1 mol/L,
    half filling [ohm cm2]."""

    blend: str
    barrier_kJ_mol: float
    R_ct: float


@dataclass(frozen=True)
class Electrode:
    """An electrode of the model; `a` is the transfer coefficient of [1]."""

    label: str
    material: str
    ion: str
    salt: str
    a: float
    E_half_V: float
    concentrations: tuple[float, ...]
    copies: int
    solvents: tuple[Solvent, ...]


ELECTRODES = (
    Electrode(
        "graphite G", "graphite", "Li+", "LiClO4", 0.5, 0.200, (0.1, 0.3, 1.0), 2,
        (Solvent("EC:DMC (1:1 v/v)", 58.0, 62.0), Solvent("DMC", 40.0, 25.0)),
    ),
    Electrode(
        "titanate L", "Li-La-titanate", "Li", "LiClO4", 0.35, 1.600, (0.1, 0.3, 1.0), 2,
        (Solvent("EC:DMC (1:1 v/v)", 50.0, 110.0), Solvent("DMC", 32.0, 48.0)),
    ),
    Electrode(
        "manganate N", "Na0.44MnO2", "Na+", "NaClO4", 0.7, 2.850, (0.1, 0.25, 0.5, 1.0), 3,
        (Solvent("PC", 50.0, 85.0),),
    ),
)  # fmt: skip


@dataclass(frozen=True)
class Known:
    """What is true of one electrode in one salt and solvent blend.

    order [1]; Ea_kJ_mol: the ln R form; Ea_lnRT_kJ_mol: the ln(R/T) form.
    """

    electrode: str
    salt: str
    solvents: str
    order: float
    Ea_kJ_mol: float
    Ea_lnRT_kJ_mol: float


def form_difference() -> float:
    """Return Ea(ln R/T) - Ea(ln R) [kJ/mol]: minus the slope of ln T in 1/(R T), least squares."""
    x = np.array([1000 / (GAS * t) for t in TEMPERATURES_K])
    y = np.array([math.log(t) for t in TEMPERATURES_K])
    x = x - x.mean()
    return -float(x @ y) / float(x @ x)


def known() -> list[Known]:
    """Return the orders 1 - a of [1] and the barriers of [2]-[4] in both Arrhenius forms."""
    return [
        Known(
            electrode.label, electrode.salt, solvent.blend, 1.0 - electrode.a,
            solvent.barrier_kJ_mol, solvent.barrier_kJ_mol + form_difference(),
        )
        for electrode in ELECTRODES
        for solvent in electrode.solvents
    ]  # fmt: skip


def exchange_current(k: float, c: float, theta: float, a: float) -> float:
    """Return i0 [A cm^-2] of [1]; k carries the units that make it so, c in [mol/L]."""
    return FARADAY * k * c ** (1 - a) * theta**a * (1 - theta) ** (1 - a)


def charge_transfer(
    electrode: Electrode, solvent: Solvent, c: float, T_K: float, E_V: float, excess: float = 0.0
) -> float:
    """Return R_ct = R T / (F i0) [ohm cm2]; `excess` is added to the barrier [kJ/mol].

    theta follows the Nernst equation against the same ion's electrode in the same
    electrolyte, so it does not move with c. k is an Arrhenius law set by R_ct at 298.15 K,
    1 mol/L and half filling.
    """
    theta = 1 / (1 + math.exp((E_V - electrode.E_half_V) * FARADAY / (GAS * T_K)))
    k_room = GAS * ROOM_K / (FARADAY * solvent.R_ct) / exchange_current(1.0, 1.0, 0.5, electrode.a)
    barrier = (solvent.barrier_kJ_mol + form_difference() + excess) * 1000
    k = k_room * math.exp(-barrier / GAS * (1 / T_K - 1 / ROOM_K))
    return GAS * T_K / (FARADAY * exchange_current(k, c, theta, electrode.a))


def recipe(salt: str, c: float, blend: str, copy: int) -> str:
    """Return the electrolyte, in different spellings for different copies of a cell."""
    return f"{c:g} M {salt} in {blend}" if copy % 2 else f"{c:.2f} mol/L {salt} in {blend}"


def plus_minus(value: float, se: float) -> str:
    """Return value±se, the error to one digit or two (two where it begins with 1)."""
    first = math.floor(math.log10(se))
    places = max((1 if se < 2 * 10**first else 0) - first, 0)
    return f"{value:.{places}f}±{se:.{places}f}"


def cell_rows(
    electrode: Electrode, solvent: Solvent, c: float, copy: int, label: str,
    start: datetime, rng: np.random.RandomState,
) -> list[tuple[str, ...]]:  # fmt: skip
    """Return the rows of one cell: five temperatures at half filling, two more potentials."""
    own, own_el, own_sl = (BETWEEN * float(v) for v in rng.standard_normal(3))
    excess = BARRIER_SPREAD * float(rng.standard_normal())
    area = (0.785, 1.131)[int(rng.randint(2))]
    points = [(T, 0.0) for T in TEMPERATURES_K] + [(ROOM_K, offset) for offset in OFFSETS_V]
    rows = []
    at = start
    for i in rng.permutation(len(points)):
        T_K, offset = points[i]
        E_V = electrode.E_half_V + offset
        noise = rng.standard_normal(4)
        scatter = own + WITHIN * float(noise[0]) + R_CT_SE * float(noise[1])
        ohm = charge_transfer(electrode, solvent, c, T_K, E_V, excess) * math.exp(scatter) / area
        cold = 1 / T_K - 1 / ROOM_K
        el = 5.0 / c**0.7 * math.exp(own_el + 1500 * cold + 0.02 * float(noise[2])) / area
        sl = 6.0 * math.exp(own_sl + 4500 * cold + WITHIN * float(noise[3])) / area
        rows.append(
            (
                electrode.label, electrode.material, electrode.ion, label, f"{area * 100:g}",
                f"{electrode.ion.rstrip('+')}/{electrode.ion.rstrip('+')}+",
                recipe(electrode.salt, c, solvent.blend, copy), f"{at:%Y-%m-%d %H:%M}",
                f"{E_V * 1000:.0f}", f"{T_K:.2f}", plus_minus(el, 0.01 * el),
                plus_minus(sl, 0.03 * sl), plus_minus(ohm / 1000, R_CT_SE * ohm / 1000),
            )
        )  # fmt: skip
        at += timedelta(minutes=150 + 5 * int(rng.randint(12)))
    return rows


def rows(seed: int = SEED) -> list[tuple[str, ...]]:
    """Return all rows under HEADER; cells are built in random order, two or three days apart."""
    rng = np.random.RandomState(seed)
    plan = [
        (electrode, solvent, c, copy)
        for electrode in ELECTRODES
        for solvent in electrode.solvents
        for c in electrode.concentrations
        for copy in range(electrode.copies)
    ]
    out = []
    at = datetime(2025, 3, 3, 9, 30)
    for number, i in enumerate(rng.permutation(len(plan)), start=1):
        electrode, solvent, c, copy = plan[i]
        label = f"{electrode.label[-1]}-{number:02d}"
        out += cell_rows(electrode, solvent, c, copy, label, at, rng)
        at += timedelta(days=2 + int(rng.randint(2)), minutes=5 * int(rng.randint(24)))
    return out


def table(seed: int = SEED) -> str:
    """Return the flat table as CSV text."""
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(HEADER)
    writer.writerows(rows(seed))
    return stream.getvalue()


def main(arguments: Sequence[str]) -> None:
    """Write the table to the file named, and print what is true of it."""
    Path(arguments[0]).write_text(table(), encoding="utf-8")
    for truth in known():
        print(truth)


if __name__ == "__main__":
    main(sys.argv[1:])
