"""What went wrong on the way, and how it was put right."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field, replace
from datetime import datetime, timedelta

import numpy as np

from maker.measuring import CIRCUIT_WATER, Reading, read
from maker.writing import instant


def find(readings: Sequence[Reading], test: Callable[[Reading], bool], nth: int) -> int:
    """Return the index of the nth reading (from 0) that passes the test."""
    return [i for i, reading in enumerate(readings) if test(reading)][nth]


def without_film_arc(reading: Reading) -> Reading:
    """Return the first, poor fit of a spectrum: the film arc merged into charge transfer."""
    values = {k: v for k, v in reading.values.items() if not k.endswith("_sl")}
    values["R_ct"] = reading.values["R_ct"] + reading.values["R_sl"]
    values["n_ct"] = reading.values["n_ct"] - 0.06
    errors = {k: v for k, v in reading.se.items() if k != "R_sl"} | {"R_ct": 0.06 * values["R_ct"]}
    return replace(reading, values=values, se=errors, chi2=reading.chi2 * 18,
                   circuit=CIRCUIT_WATER)  # fmt: skip


def spoilt(reading: Reading, factors: dict[str, float], note: str) -> Reading:
    """Return a reading gone wrong: values and errors multiplied."""
    values = {k: v * factors.get(k, 1.0) for k, v in reading.values.items()}
    errors = {k: v * factors.get(k, 1.0) for k, v in reading.se.items()}
    return replace(reading, values=values, se=errors, note=note)


def refitted(reading: Reading, month: int) -> Reading:
    """Return the good fit of a spectrum as it was done later."""
    return replace(reading, fitted_at=datetime(2026, month, 20, 15, 30), fitted_by="op-3",
                   note="refitted with the film arc")  # fmt: skip


@dataclass
class Campaign:
    """Readings by electrode, refits by file, and the corrections in order."""

    readings: dict[str, list[Reading]]
    refits: dict[str, list[Reading]] = field(default_factory=dict)
    corrections: list[dict[str, str]] = field(default_factory=list)

    def refit(self, letter: str, rows: Iterable[int], month: int) -> None:
        """Put poor fits in the tables and the good ones in a second table."""
        name = f"refits/2026-{month:02d}_refits_{letter.lower()}.csv"
        self.refits[name] = []
        for row in rows:
            good = self.readings[letter][row]
            self.readings[letter][row] = without_film_arc(good)
            self.refits[name].append(refitted(good, month))
        self.corrections.append({"action": "refit", "file": name})

    def withdraw(self, letter: str, row: int, bad: Reading, kind: str, reason: str) -> None:
        """Put a reading gone wrong in the tables and its withdrawal in the list."""
        self.readings[letter][row] = bad
        self.corrections.append(
            {
                "action": "withdraw", "kind": kind, "cell": bad.cell.label,
                "measured_at": instant(bad.measured_at), "reason": reason,
            }
        )  # fmt: skip


def go_wrong(campaign: Campaign, rng: np.random.RandomState) -> None:
    """Spoil some readings as happens in a laboratory, and list how they were put right."""
    a, b, c = (campaign.readings[letter] for letter in "ABC")
    pc_b = [i for i, r in enumerate(b) if r.cell.medium.solvents == "PC"]
    campaign.refit("A", (5, 40, 41), 5)
    campaign.refit("B", (pc_b[3], pc_b[-2]), 7)

    row = find(a, lambda r: r.temperature_C == 45.0, 6)
    bad = spoilt(a[row], {"R_ct": 2.1, "R_el": 1.3, "R_sl": 1.6}, "chamber door found open")
    campaign.withdraw("A", row, bad, "measurement", "chamber door open, cell not at 45 C")

    row = find(b, lambda r: r.cell.medium.aqueous and r.offset_V == 0.10, 2)
    bad = spoilt(b[row], {"R_ct": 0.45, "R_el": 4.0}, "bubble at the reference?")
    campaign.withdraw("B", row, bad, "measurement", "gas bubble on the reference electrode")

    row = find(c, lambda r: r.temperature_C == 25.0 and r.offset_V == 0.0, 9)
    good = c[row]
    again = read(good.cell, good.measured_at + timedelta(minutes=55), (0.0, 25.0), 2.0, rng)
    bad = spoilt(good, {"R_el": 3.4, "R_sl": 1.9, "R_ct": 1.7}, "R_el jumped")
    campaign.withdraw("C", row, bad, "measurement", "spring contact loose; measured again after")
    c.insert(row + 1, replace(again, note="contact tightened"))

    row = find(c, lambda r: r.offset_V == 0.20, 4)
    bad = replace(spoilt(c[row], {"R_sl": 0.6, "R_ct": 3.8}, ""), chi2=c[row].chi2 * 60)
    campaign.withdraw("C", row, bad, "fit", "fit did not converge; arcs split arbitrarily")
