"""Random small campaigns with gaps everywhere: every axis answers, in plain JSON."""

from __future__ import annotations

import json

import numpy as np
import pytest
from simulated_campaign import START, snapshot

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrodeFacts, Plateau
from campaign.trends import (
    additive,
    age,
    concentration,
    evidence,
    potential,
    solvent,
    temperature,
)

MODULES = (concentration, solvent, additive, temperature, potential, age)


def pick(rng, values, chances=None):
    return values[int(rng.choice(len(values), p=chances))]


def random_cell(rng, i: int, n_cells: int) -> dict:
    return {
        "cell": f"c{i}",
        "specimen": f"s{rng.integers(0, n_cells)}" if rng.random() < 0.3 else f"c{i}",
        "concentration": pick(rng, (0.1, 1.0, 3.0, np.nan), (0.3, 0.4, 0.25, 0.05)),
        "solvents": pick(rng, ("PC", "DMC", "AN")),
        "additives": pick(rng, ("none", "FEC 2 wt%", "VC 1 wt%")),
        "salt": pick(rng, ("NaPF6", "NaClO4"), (0.9, 0.1)),
        "basis": pick(rng, ("mol/L", "mol/kg"), (0.9, 0.1)),
        "reference": pick(rng, ("Na/Na+", "Ag/AgCl", ""), (0.6, 0.3, 0.1)),
        "configuration": pick(
            rng, ("three-electrode", "symmetric", "two-electrode"), (0.8, 0.1, 0.1)
        ),
        "assembled_at": pick(rng, (np.nan, START, START + 86400 * rng.uniform(0, 50))),
    }


def random_reading(rng, cell: dict, continuous: bool) -> dict:
    row = dict(cell)
    row["temperature_K"] = pick(rng, (298.15, 308.15, 318.15, np.nan), (0.6, 0.2, 0.15, 0.05))
    row["potential_V"] = (
        rng.uniform(2.9, 3.1)
        if continuous
        else pick(rng, (3.0, 3.1, 3.004, np.nan), (0.5, 0.3, 0.15, 0.05))
    )
    if rng.random() < 0.2:
        row["ion_content"] = pick(rng, (0.5, 0.52, 0.9))
    if rng.random() < 0.2:
        row["E_half_V"] = pick(rng, (2.9, 3.0))
    row["measured_at"] = START + 86400 * rng.uniform(0, 60) if rng.random() < 0.9 else np.nan
    for quantity in ("R_el", "R_sl", "R_ct", "R_lat", "sigma_w"):
        if rng.random() < 0.8:
            row[quantity] = np.exp(rng.normal(3, 1)) if rng.random() < 0.9 else 10.0
            if rng.random() < 0.5:
                row[quantity + "_se"] = row[quantity] * pick(rng, (0.01, 1e-9, 5.0))
        elif quantity in ("R_sl", "R_lat"):
            row["absent"] = (*row.get("absent", ()), quantity)
    return row


def random_campaign(rng):
    n_cells = int(rng.integers(1, 6))
    cells = [random_cell(rng, i, n_cells) for i in range(n_cells)]
    continuous = rng.random() < 0.2
    rows = [random_reading(rng, pick(rng, cells), continuous) for _ in range(rng.integers(1, 30))]
    facts = ElectrodeFacts(
        "film", "NaMO2", "Na", 1,
        pore_resistance_ohm_cm2=20.0 if rng.random() < 0.2 else None,
        plateaus=(Plateau(3.05, 3.2, "Na/Na+"),) if rng.random() < 0.2 else (),
    )  # fmt: skip
    return snapshot(rows, facts)


@pytest.mark.filterwarnings("error::RuntimeWarning")
@pytest.mark.parametrize("seed", range(20))
def test_every_axis_answers(seed):
    campaign = random_campaign(np.random.default_rng(seed))
    rows = set(campaign.readings.measurement.tolist())
    for response in ("R_ct", "R_int", "sigma_w"):
        for module in MODULES:
            result = module.estimate(campaign, Criteria(), response)
            json.dumps(result.as_dict(), allow_nan=False)
            for e in result.estimates:
                assert e.n_measurements == len(e.rows) == len(set(e.rows))
                assert set(e.rows) <= rows and 1 <= e.n_specimens <= e.n_measurements
        found = evidence.findings(campaign, Criteria(), "film", response)
        assert tuple(found) == evidence.AXES
        for finding in found.values():
            assert finding.tested or finding.open_because
            # a smaller error probability never decides more
            if finding.decision(0.05) == "open":
                assert finding.decision(0.01) == "open"
