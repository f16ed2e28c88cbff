"""Do the intervals of every axis hold the truth in 95 % of campaigns?

Simulated campaigns with a fixed seed, estimated through the trends as a ledger would hand
them over: 15 % scatter between cells, 4 % within, barriers that differ by 2 kJ/mol between
cells. Simultaneous cases ask that all intervals of a campaign hold at once. Beside each
stands what is drawn today: one straight line (or plain t interval) through all readings. The
interval of a coverage is the exact one of Clopper & Pearson.

    python tests/benchmarks/coverage_trends.py [campaigns]
"""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from scipy.special import stdtrit

sys.path.insert(0, str(Path(__file__).parents[1] / "trends"))

from bar import counted
from simulated_campaign import GAS, simulate, snapshot

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Readings
from campaign.statistics.coverage import exact_interval
from campaign.statistics.random_effects import combine
from campaign.trends import concentration, potential, temperature
from campaign.trends.barriers import barriers, usable
from campaign.trends.pairs import (
    SOLVENT,
    compare,
    simultaneous,
)
from campaign.trends.sample import Sample, Source, comparable, draw, source

SEED = 20240613
CRITERIA = Criteria()
ORDER, BARRIER = 0.5, 50.0
SOLVENTS = {"A": 1.0, "B": 2.0, "C": 1.5}
Interval = tuple[float, float]
Answer = tuple[list[tuple[Interval, float]], list[tuple[Interval, float]], float, float]
"""Our intervals with their truths, those of today, and one estimate less truth with its SE."""


@dataclass(frozen=True)
class Plan:
    """A campaign whose readings are drawn again and again: what is held, and the truth."""

    readings: Readings
    coded: Source
    log_factor: np.ndarray
    barrier_sd: float = 2.0
    slope_sd: float = 0.0

    @classmethod
    def of(cls, missing: float = 0.0, barrier_sd=2.0, slope_sd=0.0, **settings) -> Plan:
        rows = simulate(np.random.default_rng(0), **settings)
        chance = np.random.default_rng(7)
        gone = {(row["cell"], row["temperature_K"]): chance.random() < missing for row in rows}
        rows = [row for row in rows if not gone[row["cell"], row["temperature_K"]]]
        held = snapshot(rows)
        factors = settings.get("solvents") or {}
        log_factor = np.log([factors.get(row["solvents"], 1.0) for row in rows])
        coded = source(held, CRITERIA, "film")
        return cls(held.readings, coded, log_factor, barrier_sd, slope_sd)

    def draw(self, rng: np.random.Generator) -> Sample:
        """Return one campaign with new cells and new readings."""
        c = self.coded.conditions
        m = len(c.names["specimen"])
        height = BARRIER + rng.normal(0, self.barrier_sd, m)[c.specimen]
        y = (
            4.6 + self.log_factor - ORDER * np.log(c.concentration)
            + rng.normal(0, 0.15, m)[c.specimen]
            + height * 1e3 / GAS * (1 / c.temperature_K - 1 / 298.15)
            + rng.normal(0, self.slope_sd, m)[c.specimen] * (c.x_V - 3.0)
            + rng.normal(0, 0.04, len(c))
        )  # fmt: skip
        values = {**self.readings.values, "R_ct": np.exp(y)}
        readings = replace(self.readings, values=values)
        origin = replace(self.coded, readings=readings)
        from campaign.ledger.readings import Snapshot

        return comparable(draw(Snapshot(readings, {}, {}), origin, "R_ct"))


def line(x: np.ndarray, y: np.ndarray) -> Interval:
    """Return the 95 % interval of the slope of one line through all points."""
    xc = x - x.mean()
    slope = float(xc @ y) / float(xc @ xc)
    rest = y - y.mean() - slope * xc
    half = stdtrit(len(y) - 2, 0.975) * (rest @ rest / (len(y) - 2) / (xc @ xc)) ** 0.5
    return (slope - half, slope + half)


def order(s: Sample) -> Answer:
    found = concentration.order(s, CRITERIA, ()).finding.slope
    room = s.y - BARRIER * 1e3 / GAS * (1 / s.c.temperature_K - 1 / 298.15)
    today = line(-np.log(s.c.concentration), room)
    return [(found.interval(), ORDER)], [(today, ORDER)], found.value - ORDER, found.se


def barrier(s: Sample) -> Answer:
    used, inside = usable(s)
    found = barriers(used, inside)
    e = combine(found.slopes.slope, found.slopes.variance).estimate
    return [(e.interval(), BARRIER)], [(line(found.x, used.y), BARRIER)], e.value - BARRIER, e.se


def solvents(s: Sample) -> Answer:
    finding = compare(s, CRITERIA, SOLVENT).finding
    held = s.y + ORDER * np.log(s.c.concentration)
    held = held - BARRIER * 1e3 / GAS * (1 / s.c.temperature_K - 1 / 298.15)
    ours, today = [], []
    for c in finding.contrasts:
        truth = float(np.log(SOLVENTS[c.a] / SOLVENTS[c.b]))
        ours.append((simultaneous(c.estimate, finding, 0.05), truth))
        names = s.c.names["solvents"]
        a, b = (held[s.c.solvents == names.index(name)] for name in (c.a, c.b))
        se = (a.var(ddof=1) / len(a) + b.var(ddof=1) / len(b)) ** 0.5
        today.append(((a.mean() - b.mean() - 2.0 * se, a.mean() - b.mean() + 2.0 * se), truth))
    first = finding.contrasts[0]
    return ours, today, first.estimate.value - ours[0][1], first.estimate.se


def differences(s: Sample) -> Answer:
    finding = temperature.fit(s, CRITERIA).finding
    ours = [(simultaneous(c.estimate, finding, 0.05), 0.0) for c in finding.contrasts]
    used, inside = usable(s)
    x = barriers(used, inside).x
    today = []
    for c in finding.contrasts:
        names = s.c.names["solvents"]
        ends = [line(x[rows], used.y[rows]) for rows in
                (used.c.solvents == names.index(name) for name in (c.a, c.b))]  # fmt: skip
        middle = [sum(end) / 2 for end in ends]
        half = sum(((end[1] - end[0]) / 2) ** 2 for end in ends) ** 0.5
        today.append(((middle[0] - middle[1] - half, middle[0] - middle[1] + half), 0.0))
    first = finding.contrasts[0].estimate
    return ours, today, first.value, first.se


def potentials(s: Sample) -> Answer:
    _, finding, _ = potential.finding(s, CRITERIA)
    ours = [(simultaneous(c.estimate, finding, 0.05), 0.0) for c in finding.contrasts]
    first = finding.contrasts[0].estimate
    room = s.y + ORDER * np.log(s.c.concentration)
    return ours, [(line(s.c.x_V, room), 0.0)], first.value, first.se


def cases() -> Iterator[tuple[str, Plan, Callable[[Sample], Answer]]]:
    """Yield the cases: name, campaign, what is estimated."""
    yield "order, 2 cells each of 4 concentrations", Plan.of(cells=2), order
    yield "order, 3 cells each of 4 concentrations", Plan.of(cells=3), order
    yield "order, unbalanced (35 % of conditions missing)", Plan.of(0.35, cells=3), order
    one = {"concentrations": (1.0,)}
    yield "barrier, 4 specimens", Plan.of(cells=4, **one), barrier
    three = Plan.of(cells=2, repeats=1, solvents=SOLVENTS)
    yield "solvent ratios, simultaneous, 24 cells", three, solvents
    yield "barrier differences, simultaneous, 24 cells", three, differences
    window = {"potentials": (2.8, 2.9, 3.0, 3.1, 3.2), "temperatures": (298.15,)}
    plan = Plan.of(slope_sd=1.0, cells=4, **one, **window)
    yield "potential levels, simultaneous, 4 specimens", plan, potentials


def run(name: str, plan: Plan, answer: Callable[[Sample], Answer], campaigns: int, k: int) -> str:
    """Return one row of the table."""
    rng = np.random.default_rng([SEED, k])
    ours = today = 0
    errors, sizes = [], []
    for _ in counted(range(campaigns), campaigns, name):
        mine, theirs, error, se = answer(plan.draw(rng))
        ours += all(low <= truth <= high for (low, high), truth in mine)
        today += all(low <= truth <= high for (low, high), truth in theirs)
        errors.append(error)
        sizes.append(se)
    low, high = exact_interval(ours, campaigns)
    bias = abs(np.mean(errors)) / np.median(sizes)
    return (
        f"{name:48s} {100 * ours / campaigns:5.1f} ({100 * low:4.1f}-{100 * high:4.1f})  "
        f"{100 * today / campaigns:6.1f}  {bias:6.3f}"
    )


def main() -> None:
    """Print the table."""
    campaigns = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    print(f"coverage of 95 % intervals in %, {campaigns} campaigns a case, seed {SEED}")
    print(f"{'case':48s} {'here (exact interval)':19s} {'today':>6s}  {'bias/se':>6s}")
    for k, (name, plan, answer) in enumerate(cases()):
        print(run(name, plan, answer, campaigns, k), flush=True)


if __name__ == "__main__":
    main()
