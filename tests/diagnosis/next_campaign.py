"""Simulated campaigns that leave questions open, as the arrays the ledger hands over."""

import math

import numpy as np

from campaign.ledger.readings import (
    QUANTITIES,
    ElectrodeFacts,
    ElectrolyteFacts,
    Readings,
    Snapshot,
)

DAY = 86400.0


def rows(
    seed=1, *, concentrations=(0.1, 0.5, 1.0), solvents=("PC",), cells=1, order=0.3, between=0.15,
    within=0.03, temperatures=(278.15, 298.15, 318.15), potentials=(3.0,), factors=None,
    electrode="film", term="R_ct", **held,
):  # fmt: skip
    """Return one dict a spectrum of a crossed campaign with a known order and solvent factors."""
    rng = np.random.default_rng(seed)
    found = []
    number = 0
    for solvent in solvents:
        for c in concentrations:
            for _ in range(cells):
                number += 1
                own = rng.normal(0, between)
                for T in temperatures:
                    for E in potentials:
                        y = math.log(100) - order * math.log(c) + own + rng.normal(0, within)
                        y += math.log((factors or {}).get(solvent, 1.0))
                        y += 50e3 / 8.314 * (1 / T - 1 / 298.15)
                        found.append({
                            "cell": f"{electrode} {number:02d}", "electrode": electrode,
                            "solvents": solvent, "concentration": c,
                            "electrolyte": f"{c:g} mol/L NaPF6 in {solvent}",
                            "temperature_K": T, "potential_V": E, "R_el": 2.0, "R_sl": 3.0,
                            "R_lat": 4.0, term: math.exp(y),
                            "measured_at": number * DAY, "assembled_at": number * DAY - 3600,
                            **held,
                        })  # fmt: skip
    return found


TEXTS = {
    "salt": "NaPF6", "additives": "none", "basis": "mol/L", "configuration": "three-electrode",
    "reference": "Na/Na+",
}  # fmt: skip
NUMBERS = {"area_cm2": 1.13, "ion_content": math.nan, "E_half_V": math.nan, "cycle": math.nan}


def snapshot(found, electrolytes=(), **facts):
    """Return rows as a campaign; electrolytes: further recorded ones, facts: of the electrodes."""
    n = len(found)

    def texts(name, default=None):
        column = np.empty(n, dtype=object)
        column[:] = [row.get(name, row["cell"] if default is None else default) for row in found]
        return column

    def numbers(name, default=math.nan):
        return np.array([row.get(name, default) for row in found], dtype=float)

    r = Readings(
        measurement=np.arange(1, n + 1),
        **{name: texts(name) for name in ("cell", "specimen", "electrode", "electrolyte",
                                          "solvents")},
        **{name: texts(name, default) for name, default in TEXTS.items()},
        **{name: numbers(name) for name in ("concentration", "potential_V", "temperature_K",
                                            "measured_at", "assembled_at")},
        **{name: numbers(name, default) for name, default in NUMBERS.items()},
        aqueous=np.array([row.get("aqueous", False) for row in found]),
        values={q: numbers(q) for q in QUANTITIES},
        se={q: np.full(n, np.nan) for q in QUANTITIES},
        absent={q: np.zeros(n, bool) for q in QUANTITIES},
    )  # fmt: skip
    known = {text: ElectrolyteFacts(text) for text in set(r.electrolyte.tolist())}
    known |= {one.recipe: one for one in electrolytes}
    labels = sorted(set(r.electrode.tolist()))
    electrodes = {one: ElectrodeFacts(one, "oxide", "Na", 1, **facts) for one in labels}
    return Snapshot(r, electrodes, known)
