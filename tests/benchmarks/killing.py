"""Kill writers at random moments and look at what is left.

    python tests/benchmarks/killing.py --kills 200 --seed 1

A process imports, amends, upgrades or watches a folder; it says when it is about to begin, and is
killed (SIGKILL) after a random part of the time that the whole takes. Afterwards the campaign
must hold all of it or nothing, pass its check, and take the same work again. Prints how many
kills came before, amid and after the work, so that a run that never hits anything shows.
"""

from __future__ import annotations

import argparse
import random
import shutil
import signal
import subprocess
import sys
import tempfile
import time
from dataclasses import dataclass, field
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
HEAD = (
    "electrode,ion,cell,area_cm2,electrolyte,reference,measured_at,potential_V,temperature_C,"
    "R_el,R_ct,R_ct_se\n"
)
NEXT = '''
import sqlalchemy as sa
from alembic import op

revision = "{number}"
down_revision = "{last}"


def upgrade():
    op.add_column("cell", sa.Column("separator", sa.Text))
    op.create_index("cell_by_separator", "cell", ["separator"])
'''


def rows(first: int, count: int) -> str:
    """Rows of distinct instants, on five cells."""
    return HEAD + "".join(
        f"film,Na,C{n % 5},1.13,1 M NaPF6 in PC,Na/Na+,"
        f"2026-0{1 + n // 5000}-{1 + n // 200 % 25:02d}T{n // 10 % 20:02d}:{n % 10 * 5:02d}Z,"
        f"3.4,25,4.1,{40 + n % 17},0.8\n"
        for n in range(first, first + count)
    )


def say_ready() -> None:
    sys.stdout.write("ready\n")
    sys.stdout.flush()


def with_next_revision(folder: Path) -> None:
    """Make this process a program one revision ahead."""
    from campaign.ledger import database, migrating, upgrading

    made = folder / "migrations"
    last = database.REVISION
    number = f"{int(last) + 1:04d}"
    if not made.exists():
        shutil.copytree(migrating.migrations_folder(), made)
        text = NEXT.format(number=number, last=last)
        (made / "versions" / f"{number}_next.py").write_text(text)
    migrating.migrations_folder = lambda: made
    database.REVISION = upgrading.REVISION = number


def child(action: str, folder: Path) -> None:
    """Do one piece of work in this process."""
    from campaign.ledger.amending import amend
    from campaign.ledger.database import open_database
    from campaign.ledger.files import read_files
    from campaign.ledger.importing import import_tables
    from campaign.ledger.migrating import migrations_folder

    path = str(folder / "campaign.sqlite")
    assert migrations_folder().is_dir()
    if action == "upgrade":
        import alembic.command
        import alembic.config  # noqa: F401

        from campaign.ledger.upgrading import upgrade

        with_next_revision(folder)
        say_ready()
        upgrade(path, "tester")
    elif action == "watch":
        from campaign.ledger.watching import How, prepare, sweep

        say_ready()
        prepare(folder / "tables")
        for taken in sweep(open_database(path), folder / "tables", How(who="tester"), 0.0):
            assert not taken.faults, taken.faults
    elif action == "amend":
        say_ready()
        for area in ("1.21", "1.22", "1.23"):
            amend(open_database(path), "cell", "C1", {"area_cm2": area}, "measured again")
    else:
        say_ready()
        database = open_database(path)
        tables = read_files(database, [str(folder / "tables" / "new.csv")])
        import_tables(database, tables, who="tester")


@dataclass
class Campaigns:
    """A campaign as it is before the work, copied afresh for every kill."""

    base: Path
    count: int = 400
    took: dict[str, float] = field(default_factory=dict)

    def build(self) -> None:
        from campaign.ledger.database import open_database
        from campaign.ledger.files import read_files
        from campaign.ledger.importing import import_tables
        from campaign.ledger.starting import start

        (self.base / "tables").mkdir(parents=True)
        start(str(self.base / "campaign.sqlite"), "UTC", "tester")
        old = self.base / "old.csv"
        old.write_text(rows(0, 50))
        database = open_database(str(self.base / "campaign.sqlite"))
        import_tables(database, read_files(database, [str(old)]), who="tester")
        (self.base / "tables" / "new.csv").write_text(rows(50, self.count))

    def copy(self, folder: Path) -> None:
        shutil.rmtree(folder, ignore_errors=True)
        shutil.copytree(self.base, folder)


def begin(action: str, folder: Path) -> subprocess.Popen[bytes]:
    """Start the work and return once it is about to begin."""
    process = subprocess.Popen(
        [sys.executable, __file__, "--child", action, str(folder)],
        cwd=ROOT, stdout=subprocess.PIPE, stderr=subprocess.PIPE,
        env={"PYTHONPATH": str(ROOT), "PATH": "/usr/bin:/bin"},
    )  # fmt: skip
    assert process.stdout is not None
    if process.stdout.readline() != b"ready\n":
        raise AssertionError(process.communicate()[1].decode())
    return process


def state(path: Path) -> tuple[int, int, str, str]:
    """Entries, measurements in force, area of C1 and schema revision; the check must pass."""
    from campaign.ledger.checking import check
    from campaign.ledger.database import Database, Place

    with Database(Place(path=path)).reading() as connection:
        grave = [p for p in check(connection) if p.grave and p.kind != "rules"]
        assert not grave, grave

        def one(query: str) -> object:
            return connection.exec_driver_sql(query).scalar()

        return (
            int(str(one("SELECT count(*) FROM journal"))),
            int(str(one("SELECT count(*) FROM measurement WHERE ended_by IS NULL"))),
            str(one("SELECT area_cm2 FROM cell WHERE label = 'C1' AND ended_by IS NULL")),
            str(one("SELECT version_num FROM schema_revision")),
        )


def allowed(action: str, count: int, revision: str) -> list[tuple[int, int, str, str]]:
    """The whole states a campaign may be left in, the first being before the work."""
    before = (2, 50, "1.13", revision)
    if action == "amend":
        areas = ("1.21", "1.22", "1.23")
        return [before, *((3 + n, 50, area, revision) for n, area in enumerate(areas))]
    if action == "upgrade":
        return [before, (3, 50, "1.13", f"{int(revision) + 1:04d}")]
    return [before, (3, 50 + count, "1.13", revision)]


def kill_once(campaigns: Campaigns, action: str, draw: random.Random, folder: Path) -> str:
    """Kill one piece of work; return whether that was before, amid or after its writing."""
    from campaign.ledger.database import REVISION

    if action not in campaigns.took:
        campaigns.copy(folder)
        process = begin(action, folder)
        start = time.monotonic()
        errors = process.communicate()[1].decode()
        assert process.returncode == 0, errors
        campaigns.took[action] = time.monotonic() - start
        states = allowed(action, campaigns.count, REVISION)
        assert state(folder / "campaign.sqlite") == states[-1]
    campaigns.copy(folder)
    process = begin(action, folder)
    time.sleep(draw.random() * 0.8 * campaigns.took[action])  # the rest is the process's end
    process.send_signal(signal.SIGKILL)
    process.communicate()
    path = folder / "campaign.sqlite"
    log = path.with_name("campaign.sqlite-wal")
    hot = log.exists() and log.stat().st_size > 0
    states = allowed(action, campaigns.count, REVISION)
    left = state(path)
    assert left in states, f"{action}: {left} is neither of {states}"
    for backup in folder.glob("*before-upgrade*.sqlite"):
        assert state(backup) == states[0], backup
    if action != "amend":
        again = begin(action, folder)
        errors = again.communicate()[1].decode()
        assert again.returncode == 0, errors
        assert state(path) == states[-1]
    if action == "watch":
        assert [p.name for p in (folder / "tables" / "done").iterdir()] == ["new.csv"]
    if left == states[-1]:
        return "after"
    return "amid" if hot or left != states[0] else "before"


ACTIONS = ("import", "amend", "upgrade", "watch")


def run(kills: int, seed: int, count: int = 400) -> dict[str, dict[str, int]]:
    """Kill in turn; return how often each work was hit before, amid and after its writing."""
    draw = random.Random(seed)
    found: dict[str, dict[str, int]] = {}
    with tempfile.TemporaryDirectory() as made:
        campaigns = Campaigns(Path(made) / "base", count)
        campaigns.build()
        for number in range(kills):
            action = ACTIONS[number % len(ACTIONS)]
            when = kill_once(campaigns, action, draw, Path(made) / "work")
            hits = found.setdefault(action, {"before": 0, "amid": 0, "after": 0})
            hits[when] += 1
    return found


def main() -> None:
    """Parse the command line and run."""
    if sys.argv[1:2] == ["--child"]:
        child(sys.argv[2], Path(sys.argv[3]))
        return
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--kills", type=int, default=200)
    parser.add_argument("--seed", type=int, default=1)
    asked = parser.parse_args()
    sys.path.insert(0, str(ROOT))
    start = time.monotonic()
    found = run(asked.kills, asked.seed)
    print(f"{asked.kills} kills, seed {asked.seed}: all or nothing each time, every check passed")
    print(f"{'work':10}{'before':>8}{'amid':>8}{'after':>8}")
    for action, hits in found.items():
        print(f"{action:10}{hits['before']:8}{hits['amid']:8}{hits['after']:8}")
    print(f"{time.monotonic() - start:.0f} s")


if __name__ == "__main__":
    main()
