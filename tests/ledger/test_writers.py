"""Two programs write at once: every measurement is there and the chain is whole."""

import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
PROCESSES, LOGS = 8, 20

SCRIPT = """
import io, json, sys
from campaign.ledger.database import open_database
from campaign.ledger.importing import log_row
from campaign.ledger.logging import read_row

path, worker, logs = sys.argv[1], int(sys.argv[2]), int(sys.argv[3])
for number in range(logs):
    given = {
        "electrode": "E", "ion": "Na", "cell": f"C{worker % 3}", "area_cm2": 1,
        "electrolyte": "1 M NaPF6 in PC", "reference": "Na/Na+",
        "measured_at": f"2026-03-{worker + 1:02d}T10:{number:02d}Z", "potential_V": 3.4,
        "temperature_C": 25, "R_ct": 40 + number,
    }
    database = open_database(path)
    row = read_row(database, "-", {}, io.BytesIO(json.dumps(given).encode()))
    assert log_row(database, row, who=f"worker {worker}").measurements == 1
"""


def test_eight_writers_lose_nothing_and_break_no_chain(bench):
    started = [
        subprocess.Popen(
            [sys.executable, "-c", SCRIPT, bench.where, str(worker), str(LOGS)],
            cwd=ROOT,
            stderr=subprocess.PIPE,
        )
        for worker in range(PROCESSES)
    ]
    for process in started:
        _, errors = process.communicate(timeout=120)
        assert process.returncode == 0, errors.decode()
    assert len(bench.measurements()) == PROCESSES * LOGS
    assert len(bench.history()) == 1 + PROCESSES * LOGS
    assert [c["cell"] for c in bench.cells()] == ["C0", "C1", "C2"]
    assert bench.problems() == []
    who = [entry["who"] for entry in bench.history()[1:]]
    assert all(who.count(f"worker {worker}") == LOGS for worker in range(PROCESSES))


def test_a_writer_that_fails_half_way_leaves_nothing(bench, make_row, monkeypatch):
    """As if the power went between the journal entry and its rows."""
    from campaign.ledger import journal

    before = bench.digest()

    def fail(*_):
        raise OSError("no space left on device")

    monkeypatch.setattr(journal, "end_rows", fail)
    try:
        bench.enter(make_row(1))
    except OSError:
        pass
    else:
        raise AssertionError("the failure was swallowed")
    monkeypatch.undo()
    assert bench.digest() == before
    assert bench.enter(make_row(1)).measurements == 1
