"""Do the 95 % intervals of the reaction order hold the truth in 95 % of campaigns?

Simulated campaigns with a fixed seed: 4 concentrations, cells of 15 readings in 15 strata,
scatter 15 % between specimens and 4 % within unless the case says otherwise. Beside the mixed
model stands the straight line through all points of a log-log plot, its conditions held. The
interval of a coverage is the exact one of Clopper & Pearson.

    python tests/benchmarks/coverage_order.py [campaigns]
"""

from __future__ import annotations

import sys
from dataclasses import dataclass

import numpy as np
from bar import counted
from scipy.special import stdtrit

from campaign.statistics.coverage import exact_interval
from campaign.statistics.mixed import NoContrast, fit_mixed

SEED = 20240612
ORDER = 0.5
STRATA = 15
LEVELS = np.log([0.25, 0.5, 1.0, 2.0])


@dataclass(frozen=True)
class Case:
    """One kind of campaign: cells at each concentration, scatter, share of conditions missing."""

    name: str
    cells: tuple[int, int, int, int]
    between: float = 0.15
    within: float = 0.04
    missing: float = 0.0
    known: bool = False


CASES = (
    Case("2 cells each", (2, 2, 2, 2)),
    Case("3 cells each", (3, 3, 3, 3)),
    Case("unbalanced: 1 to 4 cells, 40 % missing", (4, 1, 2, 3), missing=0.4),
    Case("2 cells each, own errors, 30 % missing", (2, 2, 2, 2), missing=0.3, known=True),
    Case("2 cells each, 1 % between", (2, 2, 2, 2), between=0.01),
    Case("2 cells each, none between", (2, 2, 2, 2), between=0.0),
    Case("1 cell each", (1, 1, 1, 1)),
)


def simulate(case: Case, rng: np.random.Generator):
    """Return y, x, specimen, stratum and known variances (or None) of one campaign."""
    level = np.repeat(np.arange(4), case.cells)
    m = level.size
    specimen = np.repeat(np.arange(m), STRATA)
    stratum = np.tile(np.arange(STRATA), m)
    x = LEVELS[level][specimen]
    keep = rng.uniform(size=x.size) >= case.missing
    y = 3 - ORDER * x + np.linspace(0, 2, STRATA)[stratum]
    y += rng.normal(0, case.between, m)[specimen] if case.between else 0.0
    y += rng.normal(0, case.within, x.size)
    known = None
    if case.known:
        error = rng.uniform(0.005, 0.05, x.size)
        y += rng.normal(0, 1, x.size) * error
        known = error[keep] ** 2
    return y[keep], x[keep], specimen[keep], stratum[keep], known


def pooled_line(y, x, stratum) -> tuple[float, float]:
    """Return slope and half width of the 95 % interval of one line through all points.

    The stratum means are taken out first: the line at its best.
    """
    count = np.bincount(stratum, minlength=STRATA)
    count = np.maximum(count, 1)
    xc = x - (np.bincount(stratum, x, STRATA) / count)[stratum]
    yc = y - (np.bincount(stratum, y, STRATA) / count)[stratum]
    slope = float(xc @ yc) / float(xc @ xc)
    rest = yc - slope * xc
    df = y.size - STRATA - 1
    se = (float(rest @ rest) / df / float(xc @ xc)) ** 0.5
    return slope, float(stdtrit(df, 0.975)) * se


def run(case: Case, campaigns: int) -> str:
    """Return one row of the table."""
    rng = np.random.default_rng([SEED, CASES.index(case)])
    hits = line_hits = 0
    values, errors, widths, line_widths = [], [], [], []
    for _ in counted(range(campaigns), campaigns, str(CASES.index(case))):
        y, x, specimen, stratum, known = simulate(case, rng)
        try:
            estimate = fit_mixed(y, -x, specimen, stratum, known).contrast([1.0])
        except NoContrast:
            continue
        interval = estimate.interval(0.95)
        if interval is None:
            continue
        hits += interval[0] <= ORDER <= interval[1]
        values.append(estimate.value)
        errors.append(estimate.se)
        widths.append(interval[1] - interval[0])
        slope, half = pooled_line(y, -x, stratum)
        line_hits += abs(slope - ORDER) <= half
        line_widths.append(2 * half)
    n = len(values)
    low, high = exact_interval(hits, n)
    bias = abs(np.mean(values) - ORDER) / np.median(errors)
    return (
        f"{case.name:40s} {n:6d}  {100 * hits / n:5.1f} ({100 * low:4.1f}-{100 * high:4.1f})  "
        f"{100 * line_hits / n:6.1f}  {bias:6.3f}  {np.median(widths):6.3f}  "
        f"{np.median(line_widths):6.3f}"
    )


def main() -> None:
    """Print the table."""
    campaigns = int(sys.argv[1]) if len(sys.argv) > 1 else 2000
    print(
        f"order {ORDER}, coverage of 95 % intervals in %, {campaigns} campaigns a case, seed {SEED}"
    )
    print(
        f"{'case':40s} {'n':>6s}  {'mixed model (exact)':19s} {'pooled':>6s}  {'bias/se':>6s}  "
        f"{'width':>6s}  {'pooled':>6s}"
    )
    for case in CASES:
        print(run(case, campaigns), flush=True)


if __name__ == "__main__":
    main()
