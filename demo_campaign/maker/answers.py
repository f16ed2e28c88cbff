"""The truth the tables were made from, and the verdicts they should give."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import asdict

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
    TEMPERATURES_C,
    WITHIN,
    Film,
    Medium,
)
from maker.mishaps import Campaign
from maker.physics import GAS


def slope_in_lnR(barrier_lnRT: float) -> float:
    """Return the ln R form [kJ/mol] of a barrier of ln(R/T) over the five temperatures."""
    kelvin = [t + 273.15 for t in TEMPERATURES_C]
    x = np.array([1000 / (GAS * t) for t in kelvin])
    y = np.array([barrier_lnRT * float(v) for v in x]) + np.array([math.log(t) for t in kelvin])
    x = x - x.mean()
    return float(x @ y) / float(x @ x)


def barrier_truth(film: Film, media: Sequence[Medium]) -> list[dict[str, object]]:
    """Return true barriers of R_ct by solvent blend and additive, in both forms [kJ/mol]."""
    rows = []
    for medium in media:
        barrier = film.barrier_ct if medium.barrier_kJ_mol is None else medium.barrier_kJ_mol
        rows.append(
            {
                "solvents": medium.solvents, "additives": medium.additive or "none",
                "Ea_lnRT_kJ_mol": barrier, "Ea_kJ_mol": round(slope_in_lnR(barrier), 3),
            }
        )  # fmt: skip
    return rows


def factors(media: Sequence[Medium], name: str) -> list[dict[str, object]]:
    """Return the factors of R_sl or R_ct of each medium relative to the first."""
    return [
        {
            "solvents": m.solvents, "additives": m.additive or "none",
            "factor": round(getattr(m, name) / getattr(media[0], name), 6),
        }
        for m in media
    ]  # fmt: skip


EXPECTED = {
    "A": {
        "slow_step": "desolvation and adsorption", "dominant": "R_ct",
        "verdict": "ion transport", "strength": ["strong", "moderate"],
        "decisions": {"concentration": "responds", "solvent": "responds",
                      "potential": "responds", "barrier": "responds"},
    },
    "B": {
        "slow_step": "electron transfer", "dominant": "R_ct",
        "verdict": "electron transfer", "strength": ["strong", "moderate"],
        "decisions": {"concentration": "unresponsive", "solvent": "unresponsive",
                      "potential": "responds", "barrier": "unresponsive"},
    },
    "C": {
        "slow_step": "migration through the surface layer", "dominant": "R_sl",
        "verdict": "ion transport", "strength": ["strong", "moderate"],
        "decisions": {"solvent": "responds", "additive": "responds",
                      "potential": "unresponsive", "age": "responds"},
    },
    "D": {
        "slow_step": "electron transfer and incorporation, of nearly equal share",
        "dominant": None, "verdict": "undetermined", "strength": [None], "decisions": {},
    },
}  # fmt: skip


def truth(campaign: Campaign, seed: int) -> dict[str, object]:
    """Return the parameters the tables were made from and the verdicts they should give."""
    films = {"A": (FILM_A, MEDIA_A), "B": (FILM_B, MEDIA_B), "C": (FILM_C, MEDIA_C),
             "D": (FILM_D, MEDIA_D)}  # fmt: skip
    electrodes = {}
    for letter, (film, media) in films.items():
        rows = campaign.readings[letter]
        electrodes[film.label] = {
            "expected": EXPECTED[letter],
            "n_cells": len({r.cell.label for r in rows}),
            "n_measurements": len(rows),
            "order": {"R_sl": film.order_sl, "R_ct": film.order_ct},
            "factors_R_sl": factors(media, "factor_sl"),
            "factors_R_ct": factors(media, "factor_ct"),
            "barriers_R_ct": barrier_truth(film, media),
            "barrier_R_sl_kJ_mol": film.barrier_sl,
            "potential_law_R_ct": film.potential_law,
            "E0_V": film.E0_V,
            "g": film.g if film.potential_law == "valley" else None,
            "parameters": asdict(film),
        }
    return {
        "seed": seed,
        "scatter": {"sigma_between": BETWEEN, "sigma_within": WITHIN,
                    "barrier_kJ_mol": BARRIER_SPREAD},
        "n_measurements": sum(len(rows) for rows in campaign.readings.values()),
        "n_withdrawn_measurements": sum(s.get("kind") == "measurement"
                                        for s in campaign.corrections),
        "n_withdrawn_fits": sum(s.get("kind") == "fit" for s in campaign.corrections),
        "n_refits": sum(len(rows) for rows in campaign.refits.values()),
        "electrodes": electrodes,
    }  # fmt: skip
