"""How long the report of a large invented campaign takes, and how large it is.

    python tests/benchmarks/report_time.py [MEASUREMENTS]

Prints the seconds of import and report, and the size of the page. Seeded.
"""

from __future__ import annotations

import csv
import os
import sys
import tempfile
import time
from datetime import datetime, timedelta
from pathlib import Path

import numpy as np

SEED = 20260314
SOLVENTS = {"PC": 0.0, "EC:DMC (1:1 v/v)": -0.4, "G2": 0.5}
CONCENTRATIONS = (0.25, 0.5, 1.0, 2.0)
TEMPERATURES = (5.0, 15.0, 25.0, 35.0, 45.0)
POTENTIALS = (3.0, 3.05, 3.1, 3.15, 3.2)


def rows(count: int, rng: np.random.Generator) -> list[dict[str, object]]:
    """Return flat-table rows: electrodes in turn, every cell at all conditions."""
    found: list[dict[str, object]] = []
    start = datetime(2025, 1, 6, 9)
    cell = 0
    while len(found) < count:
        electrode = f"batch {cell % 6 + 1}"
        solvent = list(SOLVENTS)[cell // 6 % 3]
        c = CONCENTRATIONS[cell // 18 % 4]
        level = rng.normal(0, 0.15) + SOLVENTS[solvent] - 0.5 * np.log(c)
        at = start + timedelta(hours=31 * cell)
        for T in TEMPERATURES:
            for E in POTENTIALS:
                at += timedelta(hours=2)
                y = level + 5500 * (1 / (T + 273.15) - 1 / 298.15) + 40 * (E - 3.1) ** 2
                value = 100 * np.exp(y + rng.normal(0, 0.04))
                found.append({
                    "electrode": electrode, "material": "invented oxide", "ion": "Na",
                    "cell": f"X{cell:04d}", "area_cm2": 1.13, "reference": "Na/Na+",
                    "electrolyte": f"{c} M NaPF6 in {solvent}", "assembled_at": start + timedelta(
                        hours=31 * cell), "measured_at": at, "potential_V": E, "temperature_C": T,
                    "R_el": 4.0, "R_el_se": 0.1, "R_sl": 0.2 * value, "R_sl_se": 0.004 * value,
                    "Q_sl": 1e-6, "n_sl": 0.9, "R_ct": value, "R_ct_se": 0.02 * value,
                    "Q_ct": 2e-5, "n_ct": 0.86, "R_lat": 0.1 * value, "R_lat_se": 0.004 * value,
                    "Q_lat": 1e-3, "n_lat": 0.85, "sigma_w": 5.0, "sigma_w_se": 0.2,
                })  # fmt: skip
        cell += 1
    return found[:count]


def write(path: Path, count: int) -> None:
    """Write the flat table of an invented campaign."""
    made = rows(count, np.random.default_rng(SEED))
    with path.open("w", newline="", encoding="utf-8") as stream:
        writer = csv.DictWriter(stream, list(made[0]))
        writer.writeheader()
        writer.writerows(made)


def main() -> None:
    """Build, import, report; print what each took."""
    from campaign.ledger.database import open_database
    from campaign.ledger.files import read_files
    from campaign.ledger.importing import import_tables
    from campaign.ledger.starting import start

    count = int(sys.argv[1]) if len(sys.argv) > 1 else 10_000
    with tempfile.TemporaryDirectory() as folder:
        table, db = Path(folder, "big.csv"), str(Path(folder, "big.sqlite"))
        write(table, count)
        start(db, "UTC", "benchmark")
        before = time.perf_counter()
        database = open_database(db)
        import_tables(database, read_files(database, [str(table)]), who="benchmark")
        print(f"import of {count} rows: {time.perf_counter() - before:.1f} s")
        from campaign.present.report.page import write_report

        page = Path(folder, "report.html")
        before, used = time.perf_counter(), os.times()
        write_report(page, db)
        now = os.times()
        print(
            f"report: {time.perf_counter() - before:.1f} s "
            f"({now.user - used.user + now.system - used.system:.1f} s of processor), "
            f"{page.stat().st_size / 1e6:.2f} MB"
        )


if __name__ == "__main__":
    main()
