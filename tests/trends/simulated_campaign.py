"""Simulated campaigns with a known truth, as the arrays the ledger hands to the trends."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from campaign.ledger.readings import (
    QUANTITIES,
    ElectrodeFacts,
    ElectrolyteFacts,
    Readings,
    Snapshot,
)

GAS = 8.314462618
FARADAY = 96485.332

START = 1.7e9


def readings(rows: list[dict]) -> Readings:
    """Build Readings from one dict a measurement; what a row does not say is not recorded."""
    texts = {
        "cell": "c1", "specimen": None, "electrode": "film", "salt": "NaPF6", "electrolyte": None,
        "solvents": "EC:DMC (1:1 v/v)", "additives": "none", "basis": "mol/L",
        "configuration": "three-electrode", "reference": "Na/Na+",
    }  # fmt: skip
    numbers = {
        "concentration": 1.0, "area_cm2": 1.0, "potential_V": 3.0, "temperature_K": 298.15,
        "ion_content": np.nan, "E_half_V": np.nan, "measured_at": None, "assembled_at": START,
        "cycle": np.nan,
    }  # fmt: skip

    def text(row: dict, name: str, default: str | None) -> str:
        if name in row:
            return row[name]
        if name == "specimen":
            return row.get("cell", "c1")
        if name == "electrolyte":
            parts = ("salt", "solvents", "additives")
            return f"{row.get('concentration', 1.0)} " + " ".join(
                row.get(part, texts[part]) for part in parts
            )
        return default

    columns: dict = {
        name: np.array([text(row, name, default) for row in rows], dtype=object)
        for name, default in texts.items()
    }
    for name, default in numbers.items():
        columns[name] = np.array(
            [
                row.get(name, START + 60.0 * i if default is None else default)
                for i, row in enumerate(rows)
            ],
            dtype=float,
        )
    return Readings(
        measurement=np.arange(1, len(rows) + 1),
        aqueous=np.zeros(len(rows), bool),
        values={q: np.array([row.get(q, np.nan) for row in rows], float) for q in QUANTITIES},
        se={q: np.array([row.get(q + "_se", np.nan) for row in rows], float) for q in QUANTITIES},
        absent={
            q: np.array([q in row.get("absent", ()) for row in rows], bool) for q in QUANTITIES
        },
        **columns,
    )


def snapshot(rows: list[dict], facts: ElectrodeFacts | None = None, electrolytes=()) -> Snapshot:
    """Wrap rows as a campaign with one recorded electrode (`film`, Na) unless told otherwise."""
    facts = facts or ElectrodeFacts("film", "NaMO2", "Na", 1)
    known = {e.recipe: e for e in electrolytes}
    r = readings(rows)
    for name in r.electrolyte:
        known.setdefault(name, ElectrolyteFacts(name))
    return Snapshot(r, {facts.label: facts}, known)


def simulate(
    rng: np.random.Generator,
    *,
    order: float = 0.5,
    barrier: float = 50.0,
    concentrations=(0.1, 0.3, 1.0, 3.0),
    solvents=None,
    additives=None,
    cells: int = 3,
    temperatures=(278.15, 288.15, 298.15, 308.15, 318.15),
    potentials=(3.0,),
    repeats: int = 3,
    between: float = 0.15,
    within: float = 0.04,
    barrier_sd: float = 0.0,
    potential_law=lambda E: 0.0 * E,
    slope_sd: float = 0.0,
    drift_per_day: float = 0.0,
    ages=None,
    quantity: str = "R_ct",
    base: float = 100.0,
    se: float | None = 0.01,
    **held,
) -> list[dict]:
    """Return rows of a crossed campaign: ln R = ln base - order ln c + barriers + scatter.

    solvents, additives: factor of R by name; barrier may be a dict by solvent [kJ/mol].
    """
    solvents = solvents or {"EC:DMC (1:1 v/v)": 1.0}
    additives = additives or {"none": 1.0}
    rows = []
    number = 0
    for solvent, factor in solvents.items():
        height = barrier[solvent] if isinstance(barrier, dict) else barrier
        for additive, more in additives.items():
            for c in concentrations:
                for _ in range(cells):
                    number += 1
                    cell = f"cell {number}"
                    u = rng.normal(0, between)
                    mine = height + rng.normal(0, barrier_sd)
                    tilt = rng.normal(0, slope_sd)
                    count = 0
                    for T in temperatures:
                        for E in potentials:
                            for k in range(repeats):
                                count += 1
                                age = 60.0 * count if ages is None else ages(rng, count, k)
                                y = (
                                    np.log(base * factor * more) - order * np.log(c) + u
                                    + mine * 1e3 / GAS * (1 / T - 1 / 298.15)
                                    + float(potential_law(np.asarray(E))) + tilt * (E - 3.0)
                                    + drift_per_day * age / 86400 + rng.normal(0, within)
                                )  # fmt: skip
                                row = {
                                    "cell": cell, "solvents": solvent, "additives": additive,
                                    "concentration": c, "temperature_K": T, "potential_V": E,
                                    "assembled_at": START, "measured_at": START + age,
                                    quantity: np.exp(y), **held,
                                }  # fmt: skip
                                if se is not None:
                                    row[quantity + "_se"] = se * np.exp(y)
                                rows.append(row)
    return rows


def with_facts(campaign: Snapshot, **changes) -> Snapshot:
    """Return the campaign with changed facts of its electrode `film`."""
    return replace(campaign, electrodes={"film": replace(campaign.electrodes["film"], **changes)})
