"""How often the verdict is right, open, leaning or wrong, over simulated campaigns.

    python tests/benchmarks/verdicts.py [--campaigns 500] [--seed 7] [--map 40] [--processes 2]

Every campaign is fully crossed: 3 (or 1 to 4) cells at each of 4 concentrations from 0.1 to
3 mol/L in 3 solvents, 5 temperatures, 4 potentials at 25 degC, 15 % scatter between cells and
4 % within. Four tables are printed: verdicts for seven truths, decisions at the edge of each
margin, verdicts with one cell a condition, and a map over order, solvent factor, scatter and
cells. Beside them the same campaigns are judged by straight lines through all points with
p < 0.05.

Leaving one specimen out can only turn a strong verdict into a moderate one, and both count as
named here; it is therefore switched off, which changes no figure of these tables.
A limit is met when the exact 95 % interval of the share reaches it or lies on its good side.
"""

from __future__ import annotations

import argparse
import math
import warnings
from collections import Counter
from collections.abc import Iterable
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass, replace
from functools import partial

import numpy as np
from bar import counted
from scipy import stats

from campaign.diagnosis.engine import assess
from campaign.diagnosis.signatures import candidates
from campaign.diagnosis.summary import diagnose
from campaign.diagnosis.verdict import Judged, judge
from campaign.kinetics.frumkin import isotherm_occupancy, valley_resistance
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import (
    QUANTITIES,
    ElectrodeFacts,
    ElectrolyteFacts,
    Readings,
    Snapshot,
)
from campaign.statistics.coverage import exact_interval
from campaign.trends.evidence import findings

CRITERIA = Criteria()
GAS, KELVIN = 8.314462618, 298.15
BLENDS = ("PC", "EC:DMC (1:1 v/v)", "G2")
CONCENTRATIONS = (0.1, 0.3, 1.0, 3.0)
CONDITIONS = [(KELVIN, e) for e in (2.90, 2.97, 3.03, 3.10)] + [
    (kelvin, 3.03) for kelvin in (278.15, 288.15, 308.15, 318.15)
]
BASE = {"R_el": 5.0, "R_sl": 8.0, "R_ct": 10.0, "R_lat": 6.0, "sigma_w": 0.5}
CPE = {"sl": (3e-8, 0.95), "ct": (2e-5, 0.9), "lat": (8e-3, 0.9)}


@dataclass(frozen=True)
class Truth:
    """What the dominant resistance does: order, solvent factors, barriers [kJ/mol] ..."""

    name: str
    term: str
    word: str
    order: float = 0.0
    factors: tuple[float, float, float] = (1.0, 1.0, 1.0)
    barriers: tuple[float, float, float] = (45.0, 45.0, 45.0)
    span: float | None = None  # of a potential-independent factor at the ends, or
    valley: bool = False
    drift: float = 1.0  # factor over the campaign


TRUTHS = (
    Truth("desolvation", "R_ct", "ion transport", 0.5, (1.0, 2.0, 4.0), (40.0, 52.0, 60.0)),
    Truth("coupled transfer", "R_ct", "mixed", 0.5, valley=True),
    Truth("electron transfer", "R_ct", "electron transfer", valley=True),
    Truth("film migration", "R_sl", "ion transport", 0.1, (1.0, 2.5, 4.0), drift=2.0),
    Truth("incorporation", "R_lat", "host", valley=True),
    Truth("solid-state diffusion", "sigma_w", "host", valley=True),
    Truth("contradiction", "R_ct", "conflicting", 0.0, (1.0, 3.0, 6.0), valley=True),
)


@dataclass(frozen=True)
class Design:
    """How much was built, and how much cells and readings scatter."""

    cells: int = 3
    between: float = 0.15
    within: float = 0.04


def simulate(truth: Truth, design: Design, rng: np.random.Generator) -> Snapshot:
    """Return one campaign: cells in random order, a cell every second day."""
    recipes = [
        (c, blend) for c in CONCENTRATIONS for blend in range(3) for _ in range(design.cells)
    ]
    n_cells, n_conditions = len(recipes), len(CONDITIONS)
    n = n_cells * n_conditions
    cell = np.repeat(np.arange(n_cells), n_conditions)
    kelvin = np.tile([t for t, _ in CONDITIONS], n_cells)
    potential = np.tile([e for _, e in CONDITIONS], n_cells)
    concentration = np.array([c for c, _ in recipes])[cell]
    blend = np.array([b for _, b in recipes])[cell]
    order = rng.permutation(n_cells)
    start = 86400.0 * 2 * order
    programme = rng.permuted(np.tile(np.arange(n_conditions), (n_cells, 1)), axis=1)
    age = programme.ravel() * 5 * 86400.0
    values = {name: np.full(n, np.nan) for name in QUANTITIES}
    for name, base in BASE.items():
        y = np.full(n, math.log(base)) + 30e3 / GAS * (1 / kelvin - 1 / KELVIN)
        if name == truth.term:
            y = _slow(truth, concentration, blend, kelvin, potential, age)
        scatter = rng.normal(0, design.between, n_cells)[cell] + rng.normal(0, design.within, n)
        values[name] = np.exp(y + scatter)
    for arc, (q, exponent) in CPE.items():
        values[f"Q_{arc}"], values[f"n_{arc}"] = np.full(n, q), np.full(n, exponent)
    return _snapshot(values, cell, kelvin, potential, concentration, blend, start[cell], age)


def _slow(truth, concentration, blend, kelvin, potential, age):
    base = 40.0 if truth.term == "sigma_w" else 120.0
    y = math.log(base) - truth.order * np.log(concentration)
    y = y + np.log(np.array(truth.factors))[blend]
    y = y + np.array(truth.barriers)[blend] * 1e3 / GAS * (1 / kelvin - 1 / KELVIN)
    y = y + math.log(truth.drift) * age / age.max()
    if truth.valley:
        known = {e: math.log(float(valley_resistance(e, 3.0, 0.0, 1.0, KELVIN)))
                 for e in np.unique(potential)}  # fmt: skip
        y = y + np.array([known[e] for e in potential])
    if truth.span is not None:
        low, high = potential.min(), potential.max()
        y = y + math.log(truth.span) * (potential - low) / (high - low)
    return y


def _snapshot(values, cell, kelvin, potential, concentration, blend, start, age):
    n = len(cell)

    def text(items: Iterable[str]) -> np.ndarray:
        column = np.empty(n, dtype=object)
        column[:] = list(items)
        return column

    solvents = [BLENDS[b] for b in blend]
    recipes = [f"{c:g} mol/L NaPF6 in {s}" for c, s in zip(concentration, solvents, strict=True)]
    names = [f"s{c}" for c in cell]
    same = partial(np.full, n)
    readings = Readings(
        measurement=np.arange(1, n + 1), cell=text(names), specimen=text(names),
        electrode=text(["film"] * n), electrolyte=text(recipes), salt=text(["NaPF6"] * n),
        solvents=text(solvents), additives=text(["none"] * n), concentration=concentration,
        basis=text(["mol/L"] * n), aqueous=np.zeros(n, bool), area_cm2=same(1.0),
        configuration=text(["three-electrode"] * n), reference=text(["Na/Na+"] * n),
        potential_V=potential, temperature_K=kelvin,
        ion_content=np.array([float(isotherm_occupancy(e, 3.0, 0.0, KELVIN)) for e in potential]),
        E_half_V=same(np.nan), measured_at=start + age, assembled_at=start - 3600.0,
        cycle=same(np.nan), values=values, se={q: same(np.nan) for q in QUANTITIES},
        absent={q: np.zeros(n, bool) for q in QUANTITIES},
    )  # fmt: skip
    known = {recipe: ElectrolyteFacts(recipe) for recipe in dict.fromkeys(recipes)}
    return Snapshot(readings, {"film": ElectrodeFacts("film", "NaMO2", "Na", 1)}, known)


# Straight lines through all points -----------------------------------------------------------


@dataclass(frozen=True)
class Line:
    """A decision as it is drawn today: p below alpha responds, anything else does not."""

    p: float
    tested: bool = True

    def decision(self, alpha: float = 0.05) -> str:
        """Return responds or unresponsive."""
        return "responds" if self.p < alpha else "unresponsive"


def pooled_word(snapshot: Snapshot, term: str) -> str:
    """Return the verdict of lines and analyses of variance that take readings as independent.

    At their best: the mean of each temperature and potential is taken out first.
    """
    r = snapshot.readings
    y = np.log(r.values[term])
    stratum = np.unique(r.temperature_K * 1e3 + r.potential_V, return_inverse=True)[1]
    held = _centred(y, stratum)
    cold = r.potential_V == 3.03
    warm = r.temperature_K == KELVIN
    recipe = np.unique(r.electrolyte.astype(str), return_inverse=True)[1]
    age = r.measured_at - r.assembled_at
    lines = {
        "concentration": Line(stats.linregress(np.log(r.concentration), held).pvalue),
        "solvent": Line(_anova(held, r.solvents)),
        "potential": Line(_anova(_centred(y, recipe)[warm], r.potential_V[warm])),
        "barrier": Line(_slopes_differ(1 / r.temperature_K[cold], y[cold], r.solvents[cold])),
        "age": Line(stats.linregress(_centred(age, stratum), held).pvalue),
    }
    return judge(Judged(term, lines, assess(candidates(term), lines))).word


def _centred(values, codes):
    return values - (np.bincount(codes, values) / np.bincount(codes))[codes]


def _anova(y, groups) -> float:
    return float(stats.f_oneway(*(y[groups == g] for g in sorted(set(groups.tolist())))).pvalue)


def _slopes_differ(x, y, groups) -> float:
    names = sorted(set(groups.tolist()))
    x = x - x.mean()
    each = sum(_rss(np.column_stack([np.ones((groups == g).sum()), x[groups == g]]),
                    y[groups == g]) for g in names)  # fmt: skip
    dummies = np.column_stack([(groups == g).astype(float) for g in names])
    common = _rss(np.column_stack([dummies, x]), y)
    extra, left = len(names) - 1, len(y) - 2 * len(names)
    return float(stats.f.sf((common - each) / extra / (each / left), extra, left))


def _rss(X, y) -> float:
    residual = y - X @ np.linalg.lstsq(X, y, rcond=None)[0]
    return float(residual @ residual)


# Counting ------------------------------------------------------------------------------------


def outcome(truth: Truth, design: Design, seed: tuple[int, ...]) -> tuple[str, str]:
    """Return how one campaign ends: by the program, and by pooled straight lines."""
    warnings.simplefilter("ignore")
    snapshot = simulate(truth, design, np.random.default_rng(seed))
    (found,) = diagnose(snapshot, CRITERIA, leave_one_out=False)
    line = pooled_word(snapshot, truth.term)
    pooled = "right" if line == truth.word else line if line == "undetermined" else "wrong"
    if line == "conflicting" and truth.word != "conflicting":
        pooled = "conflicting"
    return _class(found.verdict.word, found.verdict.strength, truth.word), pooled


def _class(word: str, strength: str | None, right: str) -> str:
    if word == right:
        return "lean right" if strength == "weak" else "right"
    if word in ("undetermined", "conflicting"):
        return word
    return "lean wrong" if strength == "weak" else "wrong"


def tallied(pool, truth, design, campaigns, seed):
    """Return the counts over campaigns of one truth, by the program and by pooled lines."""
    seeds = [(seed, k) for k in range(campaigns)]
    ends = pool.map(partial(outcome, truth, design), seeds, chunksize=10)
    ends = list(counted(ends, campaigns, truth.name or "field"))
    return Counter(a for a, _ in ends), Counter(b for _, b in ends)


CLASSES = ("right", "lean right", "undetermined", "conflicting", "lean wrong", "wrong")


def verdict_table(pool, design, campaigns, seed) -> None:
    """Print one line a truth."""
    head = "".join(f"{name:>14}" for name in CLASSES)
    print(f"{'truth':22}{head}   lines: right wrong | wrong <= 2 %, right >= 90 %")
    for number, truth in enumerate(TRUTHS):
        ours, lines = tallied(pool, truth, design, campaigns, 1000 * seed + number)
        cells = "".join(f"{100 * ours[name] / campaigns:13.1f}%" for name in CLASSES)
        wrong = exact_interval(ours["wrong"], campaigns)
        right = exact_interval(ours["right"], campaigns)
        passes = wrong[0] <= 0.02 and right[1] >= 0.90
        low = "met" if passes else "wrong met" if wrong[0] <= 0.02 else "NOT MET"
        print(
            f"{truth.name:22}{cells}  {100 * lines['right'] / campaigns:6.1f}%"
            f"{100 * lines['wrong'] / campaigns:6.1f}% | {low}",
            flush=True,
        )


EDGES = (
    ("concentration", Truth("", "R_ct", "", order=0.15)),
    ("solvent", Truth("", "R_ct", "", factors=(1.0, 1.0, 1.5))),
    ("potential", Truth("", "R_ct", "", span=1.5)),
    ("barrier", Truth("", "R_ct", "", barriers=(45.0, 45.0, 53.0))),
    ("age", Truth("", "R_ct", "", drift=1.5)),
)


def edge_decision(axis: str, truth: Truth, design: Design, seed: tuple[int, ...]) -> str:
    """Return the decision of one axis in one campaign at the edge of its margin."""
    warnings.simplefilter("ignore")
    snapshot = simulate(truth, design, np.random.default_rng(seed))
    return str(findings(snapshot, CRITERIA, "film", truth.term)[axis].decision())


def edge_table(pool, design, campaigns, seed) -> None:
    """Print how often each diagnostic decides at the very edge of its margin."""
    print(f"\n{'at the margin':16}{'unresponsive':>14}{'responds':>12}   <= 5 % and <= 2.5 %")
    for number, (axis, truth) in enumerate(EDGES):
        seeds = [(1000 * seed + 100 + number, k) for k in range(campaigns)]
        decided = pool.map(partial(edge_decision, axis, truth, design), seeds, chunksize=10)
        ends = Counter(counted(decided, campaigns, axis))
        flat, moved = ends["unresponsive"], ends["responds"] + ends["responds, inverse"]
        met = (
            exact_interval(flat, campaigns)[0] <= 0.05
            and exact_interval(moved, campaigns)[0] <= 0.025
        )
        print(
            f"{axis:16}{100 * flat / campaigns:13.1f}%{100 * moved / campaigns:11.1f}%   "
            f"{'met' if met else 'NOT MET'}",
            flush=True,
        )


@dataclass(frozen=True)
class Stated:
    """A decision known from the truth."""

    word: str
    tested: bool = True

    def decision(self, alpha: float = 0.05) -> str:
        """Return the stated decision whatever alpha."""
        return self.word


def stated_word(order: float, factor: float) -> str:
    """Return the verdict the candidate table gives when every decision is the true one."""
    decided = {
        "concentration": Stated("responds" if order > 0.15 else "unresponsive"),
        "solvent": Stated("responds" if factor > 1.5 else "unresponsive"),
        "potential": Stated("responds"),
        "barrier": Stated("unresponsive"),
    }
    return judge(Judged("R_ct", decided, assess(candidates("R_ct"), decided))).word


def graded_map(pool, campaigns, seed) -> None:
    """Print shares of right, undetermined, lean and wrong over the map's fields."""
    print(
        "\nmap: barrier equal in all solvents, valley in potential; truth from the candidate "
        "table\nshares in %: right/undetermined or conflicting/lean/wrong; * nearer to a margin "
        "than 0.1 in order or a factor 1.25"
    )
    far, far_lines, worst = Counter(), Counter(), 0.0
    for between in (0.10, 0.20, 0.30):
        for cells in (1, 2, 3, 4):
            print(f"\nscatter {between:.0%}, {cells} cells a condition; columns: solvent factor")
            factors = (1.1, 1.5, 2.0, 3.0, 4.0)
            print("order " + "".join(f"{f:>18g}" for f in factors))
            for order in (0.0, 0.1, 0.2, 0.4, 0.8):
                line = f"{order:5.1f} "
                for number, factor in enumerate(factors):
                    word = stated_word(order, factor)
                    truth = Truth("", "R_ct", word, order, (1.0, math.sqrt(factor), factor),
                                  valley=True)  # fmt: skip
                    field = int(1e6 * seed + 1e5 * between + 1e3 * cells + 100 * order + number)
                    ours, lines = tallied(pool, truth, Design(cells, between), campaigns, field)
                    near = abs(order - 0.15) < 0.1 - 1e-9 or 1.2 - 1e-9 < factor < 1.875 + 1e-9
                    if not near:
                        far += ours
                        far_lines += lines
                        worst = max(worst, ours["wrong"] / campaigns)
                    line += f"{_field(ours, campaigns) + ('*' if near else ' '):>18}"
                print(line, flush=True)
    n = sum(far.values())
    low, high = exact_interval(far["wrong"], n)
    print(
        f"\nfar from the margins: wrong in {far['wrong']} of {n} campaigns "
        f"({100 * low:.2f} to {100 * high:.2f} %), worst field {100 * worst:.1f} %; straight lines "
        f"wrong in {far_lines['wrong']} ({100 * far_lines['wrong'] / n:.0f} %)"
    )


def _field(ours: Counter, campaigns: int) -> str:
    open_ = ours["undetermined"] + ours["conflicting"]
    lean = ours["lean right"] + ours["lean wrong"]
    return "/".join(
        f"{100 * count / campaigns:.0f}" for count in (ours["right"], open_, lean, ours["wrong"])
    )


def main() -> None:
    """Run the tables asked for."""
    asked = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    asked.add_argument("--campaigns", type=int, default=500)
    asked.add_argument("--map", type=int, default=40, help="campaigns a field; 0: no map")
    asked.add_argument("--seed", type=int, default=7)
    asked.add_argument("--processes", type=int, default=2)
    asked.add_argument("--only", choices=("verdicts", "edges", "few", "map"))
    given = asked.parse_args()
    design = Design()
    wanted = {given.only} if given.only else {"verdicts", "edges", "few", "map"}
    with ProcessPoolExecutor(given.processes) as pool:
        print(f"{given.campaigns} campaigns a line, 36 cells, seed {given.seed}")
        if "verdicts" in wanted:
            verdict_table(pool, design, given.campaigns, given.seed)
        if "edges" in wanted:
            edge_table(pool, design, given.campaigns, given.seed)
        if "few" in wanted:
            print("\none cell a condition (12 cells)")
            verdict_table(pool, replace(design, cells=1), given.campaigns, given.seed + 1)
        if "map" in wanted and given.map:
            graded_map(pool, given.map, given.seed)


if __name__ == "__main__":
    main()
