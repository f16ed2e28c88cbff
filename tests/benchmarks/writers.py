"""Many processes log into one campaign at once; every measurement must be there.

    python tests/benchmarks/writers.py --processes 8 --logs 200
    python tests/benchmarks/writers.py --place postgresql://USER@HOST/DATABASE    (an empty one)

Each log is a transaction of its own, opened and closed as `campaign log` does. No writer may fail,
every measurement must be there once, and the journal's chain must be whole.
"""

from __future__ import annotations

import argparse
import io
import json
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]


def work(where: str, worker: int, logs: int) -> None:
    """Log in this process."""
    from campaign.ledger.database import open_database
    from campaign.ledger.importing import log_row
    from campaign.ledger.logging import read_row

    for number in range(logs):
        stated = {
            "electrode": "film", "ion": "Na", "cell": f"C{worker % 3}", "area_cm2": 1,
            "electrolyte": "1 M NaPF6 in PC", "reference": "Na/Na+", "potential_V": 3.4,
            "measured_at": f"2026-03-{worker + 1:02d}T{number // 60:02d}:{number % 60:02d}Z",
            "temperature_C": 25, "R_ct": 40 + number,
        }  # fmt: skip
        database = open_database(where)
        row = read_row(database, "-", {}, io.BytesIO(json.dumps(stated).encode()))
        assert log_row(database, row, who=f"worker {worker}").measurements == 1


def run(where: str, processes: int, logs: int) -> float:
    """Start a campaign at `where`, log from every process at once, check; return seconds."""
    from campaign.ledger.checking import check
    from campaign.ledger.database import open_database
    from campaign.ledger.filters import Filter
    from campaign.ledger.history import history
    from campaign.ledger.selecting import list_measurements
    from campaign.ledger.starting import start

    start(where, "UTC", "tester")
    begun = time.monotonic()
    started = [
        subprocess.Popen(
            [sys.executable, __file__, "--work", where, str(worker), str(logs)],
            stderr=subprocess.PIPE, env={"PYTHONPATH": str(ROOT), "PATH": "/usr/bin:/bin"},
        )
        for worker in range(processes)
    ]  # fmt: skip
    for process in started:
        errors = process.communicate()[1].decode()
        assert process.returncode == 0, errors
    took = time.monotonic() - begun
    with open_database(where).reading() as connection:
        assert len(list_measurements(connection, Filter())) == processes * logs
        entries = history(connection)
        assert not [p for p in check(connection) if p.grave]
    assert len(entries) == 1 + processes * logs
    for worker in range(processes):
        assert sum(e["who"] == f"worker {worker}" for e in entries) == logs
    return took


def main() -> None:
    """Parse the command line and run."""
    if sys.argv[1:2] == ["--work"]:
        work(sys.argv[2], int(sys.argv[3]), int(sys.argv[4]))
        return
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--processes", type=int, default=8)
    parser.add_argument("--logs", type=int, default=200)
    parser.add_argument("--place")
    asked = parser.parse_args()
    sys.path.insert(0, str(ROOT))
    with tempfile.TemporaryDirectory() as folder:
        where = asked.place or f"{folder}/campaign.sqlite"
        took = run(where, asked.processes, asked.logs)
    total = asked.processes * asked.logs
    print(f"{asked.processes} processes x {asked.logs} logs: {total} measurements, chain whole")
    print(f"{took:.0f} s, {total / took:.0f} logs a second")


if __name__ == "__main__":
    main()
