"""Is the chance that `next` states the one that is met, and does following it save bench hours?

Simulated campaigns with a fixed seed, through the program's own findings, proposals and
verdicts; only the ledger is left out. R_ct is the slow term; its order, solvent factors and
barriers, and the scatter between (5 to 35 %) and within cells (2 to 6 %) differ from campaign to
campaign. A quarter of the effects is exactly nothing.

Calibration: a campaign left undetermined, its first proposal made for a chance drawn from the
bins that still lack campaigns (which leaves what happens inside a bin alone), the results of the
proposed cells simulated from the truth, and whether the axis is then decided at the error
probability the proposal names. The interval of a share is the exact one of Clopper & Pearson.

Hours: the first proposal followed, and the first of what is then proposed, until the verdict is
settled, against the existing design built again, one cell of each kind at all its conditions,
until it is.

    python tests/benchmarks/planning.py [campaigns a bin] [campaigns for the hours]
"""

from __future__ import annotations

import math
import signal
import sys
import time
from dataclasses import dataclass, replace

import numpy as np

from campaign.diagnosis.lazy import trend_evidence
from campaign.diagnosis.next_cells import NewCell, condition_of, hours_of, like
from campaign.diagnosis.next_proposals import LARGEST, Plan, of_one
from campaign.diagnosis.summary import settle
from campaign.kinetics.constants import GAS_CONSTANT
from campaign.ledger.costs import Costs
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import (
    QUANTITIES,
    ElectrodeFacts,
    ElectrolyteFacts,
    Readings,
    Snapshot,
)
from campaign.statistics.coverage import exact_interval

SEED = 20260301
CRITERIA = Criteria()
COSTS = Costs()
CONCENTRATIONS = (0.1, 0.3, 1.0, 2.0)
SOLVENTS = ("PC", "EC:DMC (1:1 v/v)", "G2")
TEMPERATURES_K = (278.15, 298.15, 318.15)
POTENTIALS_V = (3.0, 3.1)
OTHERS = {"R_el": 2.0, "R_sl": 3.0, "R_lat": 4.0}
BINS = (0.5, 0.6, 0.7, 0.8, 0.9, 0.95)
DAY_s = 86400.0
MOST_ROUNDS = 12
STOP: list[int] = []  # a signal that asked for the tables as they stand
MOST_HOURS = 1500.0


@dataclass(frozen=True)
class Truth:
    """What is true of one campaign: R_ct = 100 ohm cm2 c^-order x factor x Arrhenius."""

    order: float
    factor: dict[str, float]
    barrier: dict[str, float]
    between: float
    within: float
    tilt: float

    def ln_R(self, recipe: str, temperature_K: float, potential_V: float) -> float:
        """Return ln R_ct of a cell without scatter."""
        concentration, solvent = parts(recipe)
        height = self.barrier[solvent] * 1e3 / (1e3 * GAS_CONSTANT)
        return (
            math.log(100.0) - self.order * math.log(concentration) + self.factor[solvent]
            + height * 1e3 * (1 / temperature_K - 1 / 298.15) + self.tilt * (potential_V - 3.0)
        )  # fmt: skip


def parts(recipe: str) -> tuple[float, str]:
    """Return concentration and solvent of a recipe such as '0.1 mol/L NaPF6 in PC'."""
    amount, _, rest = recipe.partition(" mol/L NaPF6 in ")
    return float(amount), rest


def recipe_of(concentration: float, solvent: str) -> str:
    """Return the recipe of a concentration in a solvent."""
    return f"{concentration:g} mol/L NaPF6 in {solvent}"


def draw_truth(rng: np.random.Generator, nothing: float) -> Truth:
    """Return a truth in which each effect is nothing with probability `nothing`."""

    def effect(centre: float, spread: float) -> float:
        return 0.0 if rng.random() < nothing else float(rng.normal(centre, spread))

    flat = rng.random() < nothing
    factor = {one: 0.0 if flat else float(rng.normal(0.0, 0.5)) for one in SOLVENTS}
    level = rng.random() < nothing
    barrier = {one: 50.0 + (0.0 if level else float(rng.normal(0.0, 6.0))) for one in SOLVENTS}
    return Truth(
        effect(0.3, 0.35), factor, barrier,
        float(np.exp(rng.uniform(np.log(0.05), np.log(0.35)))),
        float(np.exp(rng.uniform(np.log(0.02), np.log(0.06)))), effect(0.0, 3.0),
    )  # fmt: skip


def measured(
    rng: np.random.Generator, truth: Truth, cells: list[NewCell], start: int
) -> list[dict[str, object]]:
    """Return one row a spectrum of cells built one a day in random order."""
    rows: list[dict[str, object]] = []
    order = rng.permutation(len(cells))
    for place, cell in zip(order, cells, strict=True):
        number = start + int(place)
        own = {name: rng.normal(0.0, truth.between) for name in ("R_ct", *OTHERS)}
        slope = rng.normal(0.0, 1.0)  # kJ/mol between cells
        for condition in cell.conditions:
            for _ in range(cell.repeats):
                mean = truth.ln_R(cell.electrolyte, condition.temperature_K, condition.potential_V)
                mean += slope / GAS_CONSTANT * 1e3 * (1 / condition.temperature_K - 1 / 298.15)
                row: dict[str, object] = {
                    "cell": f"c{number}", "electrolyte": cell.electrolyte,
                    "temperature_K": condition.temperature_K, "potential_V": condition.potential_V,
                    "measured_at": number * DAY_s + 3600.0 * len(rows), "assembled_at":
                    number * DAY_s - 3600.0,
                    "R_ct": math.exp(mean + own["R_ct"] + rng.normal(0, truth.within)),
                }  # fmt: skip
                for name, value in OTHERS.items():
                    row[name] = value * math.exp(own[name] + rng.normal(0, truth.within))
                rows.append(row)
    return rows


def snapshot(rows: list[dict[str, object]]) -> Snapshot:
    """Return rows as the ledger hands them over."""
    n = len(rows)

    def text(value: object) -> np.ndarray:
        column = np.empty(n, dtype=object)
        column[:] = value
        return column

    def column(name: str) -> np.ndarray:
        return np.array([row[name] for row in rows], dtype=object)

    def numbers(name: str) -> np.ndarray:
        return np.array([row.get(name, np.nan) for row in rows], dtype=float)

    recipes = [str(row["electrolyte"]) for row in rows]
    split = [parts(one) for one in recipes]
    blank = np.full(n, np.nan)
    readings = Readings(
        measurement=np.arange(1, n + 1), cell=column("cell"), specimen=column("cell"),
        electrode=text("film"), electrolyte=column("electrolyte"), salt=text("NaPF6"),
        solvents=np.array([one[1] for one in split], dtype=object), additives=text("none"),
        concentration=np.array([one[0] for one in split]), basis=text("mol/L"),
        aqueous=np.zeros(n, bool), area_cm2=np.ones(n), configuration=text("three-electrode"),
        reference=text("Na/Na+"), potential_V=numbers("potential_V"),
        temperature_K=numbers("temperature_K"), ion_content=blank, E_half_V=blank,
        measured_at=numbers("measured_at"), assembled_at=numbers("assembled_at"), cycle=blank,
        values={q: numbers(q) for q in QUANTITIES},
        se={q: np.full(n, np.nan) for q in QUANTITIES},
        absent={q: np.zeros(n, bool) for q in QUANTITIES},
    )  # fmt: skip
    facts = {"film": ElectrodeFacts("film", "oxide", "Na", 1)}
    return Snapshot(readings, facts, {one: ElectrolyteFacts(one) for one in set(recipes)})


def design(rng: np.random.Generator) -> list[tuple[float, str]]:
    """Return the recipes of a first campaign: some concentrations, solvents, 1 to 2 cells each."""
    c = CONCENTRATIONS[: int(rng.integers(2, 5))] if rng.random() < 0.5 else CONCENTRATIONS[1:]
    s = SOLVENTS[: int(rng.integers(2, 4))]
    replicates = int(rng.integers(1, 3))
    return [(one, other) for one in c for other in s for _ in range(replicates)]


def first_cells(recipes: list[tuple[float, str]], temperatures: tuple[float, ...]) -> list[NewCell]:
    """Return the cells of a design: every one at all temperatures, and a second potential."""
    blank = snapshot([{"cell": "x", "electrolyte": recipe_of(1.0, "PC"), "temperature_K": 298.15,
                       "potential_V": 3.0, "measured_at": 0.0, "assembled_at": 0.0}])  # fmt: skip
    at = condition_of(blank.readings, [0])
    conditions = [replace(at, temperature_K=one) for one in temperatures]
    conditions += [replace(at, potential_V=one) for one in POTENTIALS_V[1:]]
    return [like(blank.readings, [0], "film", recipe_of(*one), conditions) for one in recipes]


@dataclass(frozen=True)
class Campaign:
    """A simulated campaign: truth, readings so far, its cells."""

    truth: Truth
    rows: list[dict[str, object]]
    cells: list[NewCell]

    def grown(self, rng: np.random.Generator, cells: list[NewCell]) -> Campaign:
        """Return the campaign with further cells measured."""
        more = measured(rng, self.truth, cells, len(self.cells))
        return Campaign(self.truth, [*self.rows, *more], [*self.cells, *cells])


def begin(rng: np.random.Generator, nothing: float) -> Campaign:
    """Return a campaign as first laid out."""
    truth = draw_truth(rng, nothing)
    temperatures = TEMPERATURES_K if rng.random() < 0.7 else (278.15, 298.15)
    cells = first_cells(design(rng), temperatures)
    return Campaign(truth, [], []).grown(rng, cells)


def word_of(campaign: Campaign) -> str:
    """Return the verdict as it stands."""
    return settle(snapshot(campaign.rows), CRITERIA, "film", trend_evidence).verdict.word


def one_trial(
    rng: np.random.Generator, nothing: float, asked: tuple[float, float] = (0.5, 0.93)
) -> tuple[str, float, bool] | None:
    """Return axis, stated chance and whether it was decided; None where not left undetermined.

    asked: range the chance the proposal is made for is drawn from.
    """
    campaign = begin(rng, nothing)
    taken = snapshot(campaign.rows)
    outcome = settle(taken, CRITERIA, "film", trend_evidence)
    if outcome.verdict.word != "undetermined":
        return None
    plan = Plan(COSTS, chance=float(rng.uniform(*asked)), affordable_h=400.0,
                seed=int(rng.integers(2**31)), draws=1000)  # fmt: skip
    proposals = of_one(taken, CRITERIA, "film", plan, outcome=outcome).proposals
    if not proposals or proposals[0].chance is None or proposals[0].axis == LARGEST:
        return None
    first = proposals[0]
    after = snapshot(campaign.grown(rng, list(first.cells)).rows)
    finding = trend_evidence(after, CRITERIA, "film", first.response)[first.axis]
    return first.axis, float(first.chance or 0.0), finding.decision(first.alpha) != "open"


def calibrate(wanted: int, nothing: float, most: int) -> None:
    """Print stated and met chance in bins, `wanted` campaigns each, `most` trials at most."""
    found: list[list[tuple[str, float, bool]]] = [[] for _ in BINS[1:]]
    trials = 0
    began = time.process_time()
    while trials < most and min(len(one) for one in found) < wanted and not STOP:
        rng = np.random.default_rng([SEED, trials, round(100 * nothing)])
        trials += 1
        wanting = [place for place, one in enumerate(found) if len(one) < wanted]
        short = wanting[trials % len(wanting)]
        result = one_trial(rng, nothing, (BINS[short] - 0.03, BINS[short + 1]))
        if result is None:
            continue
        place = int(np.searchsorted(BINS, result[1], side="right")) - 1
        if 0 <= place < len(found) and len(found[place]) < wanted:
            found[place].append(result)
    print(f"\n{nothing:.0%} of the effects are nothing; {trials} campaigns begun, "
          f"{time.process_time() - began:.0f} s")  # fmt: skip
    print("stated       campaigns  mean stated   met    95 % interval    difference  by axis")
    for low, high, results in zip(BINS, BINS[1:], found, strict=False):
        if not results:
            continue
        stated = float(np.mean([one[1] for one in results]))
        met = int(sum(one[2] for one in results))
        interval = exact_interval(met, len(results))
        axes = {}
        for axis, chance, hit in results:
            axes.setdefault(axis, []).append((chance, hit))
        told = ", ".join(
            f"{axis} {np.mean([h for _, h in v]):.2f}/{np.mean([c for c, _ in v]):.2f} ({len(v)})"
            for axis, v in sorted(axes.items())
        )
        share = met / len(results)
        print(f"{low:.2f}-{high:.2f} {len(results):>11}  {stated:>10.3f}  {share:>6.3f}"
              f"  {interval[0]:>6.3f}-{interval[1]:.3f}  {share - stated:>+10.3f}  "
              f"{told}", flush=True)  # fmt: skip


def follow(rng: np.random.Generator, campaign: Campaign) -> float:
    """Return the bench hours until the verdict is settled by following `next` (inf: never)."""
    spent = 0.0
    for step in range(MOST_ROUNDS):
        taken = snapshot(campaign.rows)
        planned = of_one(taken, CRITERIA, "film", Plan(COSTS, seed=step, draws=1000))
        if planned.verdict != "undetermined":
            return spent
        useful = [one for one in planned.proposals if one.cells]
        if not useful or spent > MOST_HOURS:
            return math.inf
        spent += hours_of(useful[0].cells, COSTS)
        campaign = campaign.grown(rng, list(useful[0].cells))
    return spent if word_of(campaign) != "undetermined" else math.inf


def repeat(rng: np.random.Generator, campaign: Campaign) -> float:
    """Return the bench hours until the verdict is settled by building the design again."""
    once = list(dict.fromkeys(campaign.cells))
    spent = 0.0
    while word_of(campaign) == "undetermined":
        if spent > MOST_HOURS:
            return math.inf
        spent += hours_of(once, COSTS)
        campaign = campaign.grown(rng, once)
    return spent


def compare(wanted: int, nothing: float) -> None:
    """Print the bench hours of following `next` and of repeating the design."""
    pairs: list[tuple[float, float]] = []
    trial = 0
    began = time.process_time()
    while len(pairs) < wanted and not STOP:
        rng = np.random.default_rng([SEED, 7, trial])
        trial += 1
        campaign = begin(rng, nothing)
        if word_of(campaign) != "undetermined":
            continue
        pairs.append((follow(rng, campaign), repeat(rng, campaign)))
    mine, again = np.array(pairs).T
    ratio = np.median(mine) / np.median(again)
    both = np.isfinite(mine) & np.isfinite(again)
    own = float(np.median(mine[both] / again[both]))
    print(f"\nHours until settled, {len(pairs)} campaigns ({time.process_time() - began:.0f} s)")
    print(f"following next:      median {np.median(mine):.1f} h, "
          f"not settled {np.mean(~np.isfinite(mine)):.1%}")  # fmt: skip
    print(f"repeating the design: median {np.median(again):.1f} h, "
          f"not settled {np.mean(~np.isfinite(again)):.1%}")  # fmt: skip
    print(f"ratio of medians {ratio:.2f}; median ratio where both settle {own:.2f}", flush=True)


def main() -> None:
    """Run with the sizes given on the command line."""
    wanted = int(sys.argv[1]) if len(sys.argv) > 1 else 300
    hours = int(sys.argv[2]) if len(sys.argv) > 2 else 200
    signal.signal(signal.SIGTERM, lambda number, _: STOP.append(number))
    if hours:
        compare(hours, 0.25)
    for nothing in (0.25, 0.0) if wanted else ():
        calibrate(wanted, nothing, 100 * wanted)


if __name__ == "__main__":
    main()
