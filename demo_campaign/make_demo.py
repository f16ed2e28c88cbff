"""Make the demo campaign: flat tables, corrections and the truth they were made from.

    python demo_campaign/make_demo.py [FOLDER]

Invented data: a group develops sodium-ion electrodes from February to August 2026. The
script needs NumPy alone and nothing of the program, so that the truth is independent of
what it is held against. The same files, byte for byte, come out each time: the stream of
the legacy random generator is frozen by NumPy, and all formulas use the math module.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path

import numpy as np
from maker.answers import truth
from maker.measuring import measure
from maker.mishaps import Campaign, go_wrong
from maker.plan import plan_a, plan_b, plan_c, plan_d, schedule
from maker.tables import corrections_toml, tables

SEED = 20260202


def build(seed: int = SEED) -> Campaign:
    """Return the whole campaign."""
    rng = np.random.RandomState(seed)
    plans = {"A": plan_a(), "B": plan_b(), "C": plan_c(), "D": plan_d()}
    campaign = Campaign({})
    for letter, cells in plans.items():
        scheduled = schedule(letter, cells, rng)
        campaign.readings[letter] = [r for cell in scheduled for r in measure(cell, rng)]
    go_wrong(campaign, rng)
    return campaign


def make(folder: Path) -> list[Path]:
    """Write the demo into a folder and return the files written."""
    campaign = build()
    files = tables(campaign)
    files["corrections.toml"] = corrections_toml(campaign)
    files["truth.json"] = json.dumps(truth(campaign, SEED), indent=2, ensure_ascii=False) + "\n"
    written = []
    for name, text in files.items():
        path = folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(text.encode("utf-8"))
        written.append(path)
    return written


if __name__ == "__main__":
    target = Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).resolve().parent
    for file in make(target):
        print(file)
