"""Speed beside what a person would use instead, every figure a ratio of two in one run.

    python tests/benchmarks/speed.py [start] [import] [summary] [trials] [growth] [demo]

Everything runs as whole processes, in turns, and is compared by its processor time (user +
system, as the system counts it for the finished process): on a machine that others use as
well, waiting time says little. Each figure is the median of several. One seed, one thread for
linear algebra. Prints a table and PASS or FAIL against the limits; exit 1 where one fails.

start    a command against importing what it is made of
import   100,000 rows (2,000 cells x 50, ten fitted values with their standard errors) against
         pandas.read_csv and sqlite3's executemany of the same values into the same tables and
         indices without checks and triggers
summary  1,000,000 fitted values against pandas.read_sql of the columns needed and a mean by
         groups, in time and in memory (largest resident set)
trials   the same where strong verdicts are tried without each specimen in turn
growth   the time for twice the campaign, from 10,000 to 1,000,000 fitted values
demo     each step of trends, summary and planning on the demo campaign, in seconds
"""

from __future__ import annotations

import json
import os
import sqlite3
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path

for _variable in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[_variable] = "1"

ROOT = Path(__file__).resolve().parents[2]
SEED = 20260117
CELLS, ROWS_A_CELL, VALUES_A_ROW = 2000, 50, 10
RUN = "from campaign.cli.main import main; main()"


@dataclass(frozen=True)
class Spent:
    """What a finished process took: processor time [s], largest resident set [MB]."""

    cpu_s: float
    memory_MB: float
    output: bytes


def spend(arguments: Sequence[str], *, stdin: bytes = b"", cwd: Path | None = None) -> Spent:
    """Run a process to its end; raises RuntimeError where it fails."""
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    environment.pop("CAMPAIGN_DB", None)
    with tempfile.TemporaryFile() as given, tempfile.TemporaryFile() as out:
        given.write(stdin)
        given.seek(0)
        process = subprocess.Popen(
            arguments, stdin=given, stdout=out, stderr=subprocess.STDOUT, cwd=cwd, env=environment
        )
        _, status, used = os.wait4(process.pid, 0)
        process.returncode = os.waitstatus_to_exitcode(status)
        out.seek(0)
        output = out.read()
    if process.returncode != 0:
        raise RuntimeError(f"{arguments} ended with {process.returncode}: {output[-2000:]!r}")
    return Spent(used.ru_utime + used.ru_stime, used.ru_maxrss / 1024, output)


def python(code: str, *arguments: str) -> list[str]:
    """Return the command line that runs Python code."""
    return [sys.executable, "-c", code, *arguments]


def campaign(*arguments: str) -> list[str]:
    """Return the command line of the program, as its console script runs it."""
    return python(RUN, *arguments)


@dataclass(frozen=True)
class Figure:
    """One line of the table: what was measured, against what, and its limit."""

    name: str
    value: float
    limit: float
    unit: str
    said: str

    @property
    def passes(self) -> bool:
        """Return whether the limit is kept."""
        return self.value <= self.limit


def compared(
    one: Callable[[], Spent], other: Callable[[], Spent], repeats: int
) -> tuple[float, float, list[Spent], list[Spent]]:
    """Return the median ratio of processor time and of memory of runs in turns."""
    one(), other()
    ours, theirs = [], []
    for _ in range(repeats):
        ours.append(one())
        theirs.append(other())
    pairs = list(zip(ours, theirs, strict=True))
    cpu = statistics.median(a.cpu_s / b.cpu_s for a, b in pairs)
    memory = statistics.median(a.memory_MB / b.memory_MB for a, b in pairs)
    return cpu, memory, ours, theirs


def _median_s(runs: Sequence[Spent]) -> float:
    return statistics.median(run.cpu_s for run in runs)


def _median_MB(runs: Sequence[Spent]) -> float:
    return statistics.median(run.memory_MB for run in runs)


# A large campaign ------------------------------------------------------------------------------

# label, orders of R_sl, R_ct and R_lat, barriers [kJ/mol], factor in DMC, change of ln R_ct a volt
ELECTRODES = (
    ("NFM film A", (0.0, 0.5, 0.0), (35.0, 55.0, 30.0), 0.5, 0.0, (2.0, 60.0, 6.0)),
    ("NFM film B", (0.0, 0.0, 0.0), (35.0, 42.0, 30.0), 1.0, 2.0, (3.0, 50.0, 8.0)),
    ("NVP film C", (0.0, 0.5, 0.0), (38.0, 50.0, 28.0), 0.6, 0.5, (50.0, 12.0, 4.0)),
    ("NVP film D", (0.0, 0.1, 0.0), (35.0, 45.0, 33.0), 1.1, 1.0, (4.0, 10.0, 70.0)),
)
CONCENTRATIONS = (0.25, 0.5, 1.0, 2.0)
BLENDS = ("EC:DMC (1:1 v/v)", "DMC", "EC:PC (1:1 v/v)")
TEMPERATURES = (5.0, 15.0, 25.0, 35.0, 45.0)
POTENTIALS = (3.0, 3.1, 3.2, 3.3, 3.4)
HEADERS = (
    "electrode,ion,cell,area_cm2,reference,electrolyte,assembled_at,measured_at,potential_V,"
    "temperature_C,R_el,R_el_se,R_sl,R_sl_se,Q_sl,n_sl,R_ct,R_ct_se,Q_ct,n_ct,R_lat,R_lat_se,"
    "Q_lat,n_lat,fitted_by"
)


def write_table(path: Path, cells: int, shuffled: bool = False) -> None:
    """Write the flat table of an invented campaign: `cells` cells, 50 rows each.

    Each cell is measured from the lowest temperature to the highest, or in random order.
    """
    import numpy as np

    rng = np.random.default_rng(SEED)
    T = np.repeat(TEMPERATURES, 10)
    E = np.tile(np.repeat(POTENTIALS, 2), 5)
    per_kT = 1000.0 / 8.314462618 * (1.0 / (T + 273.15) - 1.0 / 298.15)
    start = np.datetime64("2026-01-05T08:00")
    with path.open("w", encoding="utf-8") as out:
        out.write(HEADERS + "\n")
        for number in range(cells):
            name, orders, barriers, factor, slope, sizes = ELECTRODES[number % 4]
            step = number // 4
            c, blend = CONCENTRATIONS[step % 4], BLENDS[step // 4 % 3]
            own = rng.normal(0.0, 0.12, 3)
            R = np.empty((3, ROWS_A_CELL))
            for arc in range(3):
                log = np.log(sizes[arc]) - orders[arc] * np.log(c) + barriers[arc] * per_kT
                if arc == 1:
                    log = log + slope * (E - 3.2)
                    log = log + (np.log(factor) if blend == "DMC" else 0.0)
                R[arc] = np.exp(log + own[arc] + rng.normal(0.0, 0.03, ROWS_A_CELL))
            R_el = 4.0 / c**0.5 * np.exp(rng.normal(0.0, 0.02, ROWS_A_CELL))
            made = start + np.timedelta64(int(rng.integers(0, 200 * 24)), "h")
            turn = rng.permutation(ROWS_A_CELL) if shuffled else np.arange(ROWS_A_CELL)
            at = made + np.timedelta64(6, "h") * (4 + turn)
            fixed = f"{name},Na,C{number:05d},0.785,Na/Na+,{c:g} M NaPF6 in {blend},{made}+01:00"
            noise = rng.uniform(0.9, 1.1, (4, ROWS_A_CELL))
            for i in range(ROWS_A_CELL):
                r1, r2, r3 = R[0, i] / 0.785, R[1, i] / 0.785, R[2, i] / 0.785
                q1, q2, q3 = 1e-6 * noise[0, i], 2e-5 * noise[1, i], 5e-3 * noise[2, i]
                out.write(
                    f"{fixed},{at[i]}+01:00,{E[i]:.3f},{T[i] + noise[3, i] - 1:.2f},"
                    f"{R_el[i]:.5g},{0.01 * R_el[i]:.3g},{r1:.5g},{0.02 * r1:.3g},{q1:.5g},0.92,"
                    f"{r2:.5g},{0.015 * r2:.3g},{q2:.5g},0.88,"
                    f"{r3:.5g},{0.03 * r3:.3g},{q3:.5g},0.85,M. Weber\n"
                )


def made(folder: Path, cells: int, shuffled: bool = False) -> tuple[Path, Path]:
    """Return the flat table and the database of a campaign, made where they are missing."""
    name = f"{'shuffled-' if shuffled else ''}{cells}"
    table, database = folder / f"table-{name}.csv", folder / f"campaign-{name}.sqlite"
    if not table.exists():
        write_table(table, cells, shuffled)
    if not database.exists():
        spend(campaign("init", "--db", str(database), "--zone", "Europe/Paris"))
        spend(campaign("import", "--db", str(database), str(table)))
    return table, database


# Start-up --------------------------------------------------------------------------------------


def start(folder: Path) -> list[Figure]:
    """Compare small commands with importing what they are made of."""
    demo = folder / "demo"
    if not demo.exists():
        spend(campaign("demo", str(demo)), cwd=folder)
    database = str(next(demo.glob("*.sqlite")))
    cell = json.loads(spend(campaign("list", "cells", "--json", "--db", database)).output)
    label = cell["rows"][0]["cell"]
    minute = iter(range(100_000))

    def log() -> Spent:
        n = next(minute)
        row = {
            "cell": label, "measured_at": f"2026-11-{1 + n // 1440:02d}T{n // 60 % 24:02d}:"
            f"{n % 60:02d}+01:00", "potential_V": 3.42, "temperature_C": 25, "R_el": 4.1,
            "R_ct": "41.2(8)",
        }  # fmt: skip
        return spend(campaign("log", "-", "--db", database), stdin=json.dumps(row).encode())

    parts = "import sqlalchemy.orm, typer"
    cases: tuple[tuple[str, Callable[[], Spent], str, float], ...] = (
        ("campaign log", log, parts, 1.5),
        ("campaign list cells", lambda: spend(campaign("list", "cells", "--db", database)),
         parts, 1.5),
        ("campaign list measurements --electrode",
         lambda: spend(campaign("list", "measurements", "--db", database, "--since",
                                "2026-06-01")), parts, 1.5),
        ("campaign --help", lambda: spend(campaign("--help")), "import typer", 2.0),
    )  # fmt: skip
    figures = []
    for name, run, code, limit in cases:
        ratio, _, ours, theirs = compared(run, lambda code=code: spend(python(code)), 15)
        said = f"{_median_s(ours):.3f} s against {_median_s(theirs):.3f} s for '{code}'"
        figures.append(Figure(name, ratio, limit, "x", said))
    return figures


# Import ----------------------------------------------------------------------------------------

PLAIN_IMPORT = """
import sqlite3, sys
import numpy as np
import pandas as pd

table, path = sys.argv[1:]
frame = pd.read_csv(table)

def instants(column):
    at = pd.to_datetime(column, utc=True).dt.tz_localize(None).to_numpy("datetime64[us]")
    return [text + "Z" for text in np.datetime_as_string(at, unit="us").tolist()]

def listed(column):
    return column.astype(object).where(column.notna(), None).tolist()

def insert(connection, name, columns):
    marks = ",".join("?" * len(columns))
    names = ",".join(f'"{n}"' for n in columns)
    connection.executemany(
        f'insert into "{name}" ({names}) values ({marks})', zip(*columns.values())
    )

connection = sqlite3.connect(path, isolation_level=None)
connection.execute("pragma foreign_keys = off")
connection.execute("pragma synchronous = full")
connection.execute("begin")
n = len(frame)
one = [1] * n
first = frame.drop_duplicates("cell")
k = len(first)
electrodes = {label: i + 1 for i, label in enumerate(first["electrode"].unique())}
recipes = {key: i + 1 for i, key in enumerate(first["electrolyte"].unique())}
numbers = {label: i + 1 for i, label in enumerate(first["cell"])}
of = list(range(1, len(electrodes) + 1))
insert(connection, "electrode", {"id": of, "record": of, "label": list(electrodes),
       "ion": ["Na"] * len(of), "charge": [1] * len(of), "entry": [1] * len(of)})
of = list(range(1, len(recipes) + 1))
insert(connection, "electrolyte", {"id": of, "record": of, "key": list(recipes),
       "written": list(recipes), "salt_key": list(recipes), "solvent_key": list(recipes),
       "additive_key": list(recipes), "basis": list(recipes), "aqueous": [0] * len(of),
       "entry": [1] * len(of)})
of = list(range(1, k + 1))
insert(connection, "cell", {"id": of, "record": of, "label": first["cell"].tolist(),
       "electrode": [electrodes[e] for e in first["electrode"]],
       "electrolyte": [recipes[e] for e in first["electrolyte"]],
       "specimen": first["cell"].tolist(), "area_cm2": first["area_cm2"].tolist(),
       "configuration": ["three-electrode"] * k, "reference": first["reference"].tolist(),
       "assembled_at": instants(first["assembled_at"]), "assembled_offset": [60] * k,
       "entry": [1] * k})
ids = list(range(1, n + 1))
insert(connection, "measurement", {"id": ids, "record": ids,
       "cell": frame["cell"].map(numbers).tolist(), "measured_at": instants(frame["measured_at"]),
       "measured_offset": [60] * n, "potential_V": listed(frame["potential_V"]),
       "temperature_K": (frame["temperature_C"] + 273.15).tolist(), "entry": one})
insert(connection, "fit", {"id": ids, "record": ids, "measurement": ids,
       "fitted_by": listed(frame["fitted_by"]), "entry": one})
quantities = ["R_el", "R_sl", "Q_sl", "n_sl", "R_ct", "Q_ct", "n_ct", "R_lat", "Q_lat", "n_lat"]
values = frame[quantities].to_numpy().ravel().tolist()
errors = np.column_stack([
    frame[q + "_se"] if q + "_se" in frame else np.full(n, np.nan) for q in quantities
]).astype(object)
errors[pd.isna(errors)] = None
errors = errors.ravel().tolist()
m = len(values)
insert(connection, "fitted_value", {"fit": np.repeat(ids, len(quantities)).tolist(),
       "quantity": quantities * n, "value": values, "se": errors, "entry": [1] * m})
connection.execute("commit")
"""


def _bare(path: Path, like: Path) -> None:
    """Make the tables and indices of a campaign without its checks, links and triggers."""
    known = sqlite3.connect(like)
    bare = sqlite3.connect(path)
    for pragma in ("journal_mode", "page_size"):
        bare.execute(f"pragma {pragma} = {known.execute(f'pragma {pragma}').fetchone()[0]}")
    names = [
        name
        for (name,) in known.execute("select name from sqlite_master where type = 'table'")
        if not name.startswith("sqlite_")
    ]
    for name in names:
        described = known.execute(f'pragma table_info("{name}")').fetchall()
        columns = [f'"{column}" {kind}' for _, column, kind, _, _, _ in described]
        key = [f'"{row[1]}"' for row in sorted(described, key=lambda row: row[5]) if row[5]]
        columns += [f"primary key ({', '.join(key)})"] if key else []
        sql = known.execute("select sql from sqlite_master where name = ?", (name,)).fetchone()[0]
        without = " without rowid" if "WITHOUT ROWID" in sql.upper() else ""
        bare.execute(f'create table "{name}" ({", ".join(columns)}){without}')
    for (sql,) in known.execute(
        "select sql from sqlite_master where type = 'index' and sql is not null"
    ):
        bare.execute(sql)
    bare.commit()
    bare.close()
    known.close()


def imported(folder: Path) -> list[Figure]:
    """Compare importing a flat table with reading and inserting it without any check."""
    table, like = made(folder, CELLS)
    target = folder / "target.sqlite"

    def clear() -> None:
        for old in folder.glob("target.sqlite*"):
            old.unlink()

    def own() -> Spent:
        clear()
        spend(campaign("init", "--db", str(target)))
        return spend(campaign("import", "--db", str(target), str(table)))

    def plain() -> Spent:
        clear()
        _bare(target, like)
        return spend(python(PLAIN_IMPORT, str(table), str(target)))

    ratio, _, ours, theirs = compared(own, plain, 3)
    with sqlite3.connect(target) as connection:
        count = connection.execute("select count(*) from fitted_value").fetchone()[0]
    clear()
    if count != CELLS * ROWS_A_CELL * VALUES_A_ROW:
        raise RuntimeError(f"{count} values were inserted")
    said = f"{_median_s(ours):.1f} s against {_median_s(theirs):.1f} s"
    return [Figure(f"import of {CELLS * ROWS_A_CELL:,} rows", ratio, 3.0, "x", said)]


# Summary ---------------------------------------------------------------------------------------

PLAIN_SUMMARY = """
import sqlite3, sys
import pandas as pd

frame = pd.read_sql('''
    select e.label as electrode, y.key as electrolyte, c.label as cell, m.potential_V,
           m.temperature_K, v.quantity, v.value, v.se
    from fitted_value v join fit f on f.id = v.fit
    join measurement m on m.record = f.measurement join cell c on c.record = m.cell
    join electrode e on e.record = c.electrode join electrolyte y on y.record = c.electrolyte
    where f.ended_by is null and m.ended_by is null and c.ended_by is null
      and e.ended_by is null and y.ended_by is null
''', sqlite3.connect(sys.argv[1]))
print(frame.groupby(["electrode", "electrolyte", "quantity"])["value"].mean())
"""


def summary(folder: Path) -> list[Figure]:
    """Compare the whole summary with reading the values and a mean by groups."""
    _, database = made(folder, CELLS)
    cpu, memory, ours, theirs = compared(
        lambda: spend(campaign("summary", "--db", str(database))),
        lambda: spend(python(PLAIN_SUMMARY, str(database))),
        5,
    )
    values = f"{CELLS * ROWS_A_CELL * VALUES_A_ROW:,} values"
    return [
        Figure(f"summary over {values}, time", cpu, 1.5, "x",
               f"{_median_s(ours):.2f} s against {_median_s(theirs):.2f} s"),
        Figure(f"summary over {values}, memory", memory, 0.5, "x",
               f"{_median_MB(ours):.0f} MB against {_median_MB(theirs):.0f} MB"),
    ]  # fmt: skip


def trials(folder: Path) -> list[Figure]:
    """Compare the summary of cells measured in random order, whose verdicts can be strong.

    A strong verdict is tried without each specimen: every trial estimates the axes anew.
    """
    figures = []
    for cells in (CELLS // 16, CELLS // 4):
        _, database = made(folder, cells, shuffled=True)
        cpu, _, ours, theirs = compared(
            lambda database=database: spend(campaign("summary", "--db", str(database))),
            lambda database=database: spend(python(PLAIN_SUMMARY, str(database))),
            1,
        )
        said = f"{_median_s(ours):.2f} s against {_median_s(theirs):.2f} s"
        name = f"summary with trials, {cells} specimens"
        figures.append(Figure(name, cpu, 1.5, "x", said))
    return figures


# Growth ----------------------------------------------------------------------------------------


def growth(folder: Path) -> list[Figure]:
    """Measure how much longer each command takes for twice the campaign."""
    sizes = [CELLS // 2**k for k in (7, 6, 5, 4, 3, 2, 1, 0)]
    commands: dict[str, Callable[[Path, Path], Spent]] = {
        "import": _timed_import,
        "trend concentration": lambda _, db: spend(
            campaign("trend", "concentration", "--json", "--db", str(db))
        ),
        "trend temperature": lambda _, db: spend(
            campaign("trend", "temperature", "--json", "--db", str(db))
        ),
        "summary": lambda _, db: spend(campaign("summary", "--json", "--db", str(db))),
    }
    if (ROOT / "campaign" / "cli" / "report.py").exists():
        target = str(folder / "report.html")
        commands["report"] = lambda _, db: spend(campaign("report", target, "--db", str(db)))
    figures = []
    for name, run in commands.items():
        times = []
        for cells in sizes:
            table, database = made(folder, cells)
            repeats = 1 if name == "import" and cells > 500 else 3
            times.append(_median_s([run(table, database) for _ in range(repeats)]))
        ratios = [
            (b / a) ** (1.0 / _doublings(m, n))
            for (m, a), (n, b) in zip(
                zip(sizes, times, strict=True), list(zip(sizes, times, strict=True))[1:],
                strict=False,
            )
        ]  # fmt: skip
        said = ", ".join(f"{t:.2f}" for t in times) + " s for " + ", ".join(map(str, sizes))
        said += " cells"
        figures.append(Figure(f"{name}, twice the campaign", max(ratios), 2.2, "x", said))
    return figures


def _doublings(small: int, large: int) -> float:
    from math import log2

    return log2(large / small)


def _timed_import(table: Path, _: Path) -> Spent:
    target = table.parent / "target.sqlite"
    for old in table.parent.glob("target.sqlite*"):
        old.unlink()
    spend(campaign("init", "--db", str(target)))
    return spend(campaign("import", "--db", str(target), str(table)))


# The demo campaign -----------------------------------------------------------------------------


def demo(folder: Path) -> list[Figure]:
    """Time each step on the demo campaign, in one process after its imports."""
    place = folder / "demo"
    if not place.exists():
        spend(campaign("demo", str(place)), cwd=folder)
    os.environ["PYTHONPATH"] = str(ROOT)
    sys.path.insert(0, str(ROOT))
    from campaign.diagnosis.reading import summarise
    from campaign.trends import evidence
    from campaign.trends.conditions import electrodes
    from campaign.trends.reading import AXES, read_campaign, rebuilt
    from campaign.trends.response import RESPONSES

    database = str(next(place.glob("*.sqlite")))
    taken, criteria = read_campaign(database)
    steps: dict[str, Callable[[], object]] = {}
    for axis in AXES:
        steps[f"trend {axis}"] = lambda axis=axis: rebuilt(axis, database)
    for label in electrodes(taken):
        steps[f"all findings of {label}"] = lambda label=label: evidence.of_electrode(
            taken, criteria, label, RESPONSES
        )
    steps["summary"] = lambda: summarise(database)
    started = spend(campaign("list", "electrodes", "--db", database)).cpu_s
    figures = []
    for name, step in steps.items():
        step()
        times = []
        for _ in range(5):
            begun = time.process_time()
            step()
            times.append(time.process_time() - begun)
        # the summary is many steps: its time is shown, and no limit was set for it
        limit = float("inf") if name == "summary" else 1.0
        figures.append(Figure(f"demo: {name}", statistics.median(times), limit, "s", ""))
    runs = [spend(campaign("next", "--json", "--db", database)).cpu_s for _ in range(3)]
    figures.append(
        Figure("demo: next, whole process", statistics.median(runs), 1.0, "s",
               f"of it {started:.2f} s to start and read")
    )  # fmt: skip
    return figures


PARTS: dict[str, Callable[[Path], list[Figure]]] = {
    "start": start,
    "import": imported,
    "summary": summary,
    "trials": trials,
    "growth": growth,
    "demo": demo,
}


def main() -> int:
    """Measure the parts asked for (all by default) and print the table."""
    chosen = [name for name in sys.argv[1:] if name in PARTS] or list(PARTS)
    kept = os.environ.get("SPEED_FOLDER")
    failed = 0
    with tempfile.TemporaryDirectory() as temporary:
        folder = Path(kept or temporary)
        folder.mkdir(exist_ok=True, parents=True)
        for name in chosen:
            for figure in PARTS[name](folder):
                verdict = "PASS" if figure.passes else "FAIL"
                failed += not figure.passes
                print(
                    f"{verdict}  {figure.name:<44} {figure.value:6.2f} {figure.unit} "
                    f"(at most {figure.limit:g})  {figure.said}",
                    flush=True,
                )
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main())
