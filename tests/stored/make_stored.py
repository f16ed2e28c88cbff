"""Make the stored database of this program's schema: python tests/stored/make_stored.py

Run once when a revision is released, and keep what it writes for good: NNNN.sql holds a whole
campaign of that revision as SQL text, with an import, a refit, an amendment and withdrawals in it.
Tests load every file here and upgrade it. A file of an older revision is never made again; it is
what people have on their disks.
"""

from __future__ import annotations

import sqlite3
import sys
import tempfile
from contextlib import closing
from pathlib import Path

HERE = Path(__file__).resolve().parent
HEAD = "electrode,material,ion,form,cell,specimen,area_cm2,configuration,reference,electrolyte,"
HEAD += "assembled_at,measured_at,potential_V,temperature_C,R_el,R_sl,Q_sl,n_sl,R_ct,R_ct_se,note\n"
FILM = "film,NaMO2,Na,thin film"
FIRST = HEAD + "".join(
    f"{FILM},C{c},C{c},1.1{c},{kind},Na/Na+,{recipe},2026-03-0{c}T08:00+01:00,"
    f"2026-03-{10 * c + d:02d}T10:00+01:00,3.{d},{20 + d},4.{d},{film},{q},{n},{40 + c * d},0.8,\n"
    for c, kind, recipe in (
        (1, "three-electrode", '"1 M NaPF6 in EC:DMC (1:1 v/v) + 2 wt% FEC"'),
        (2, "two-electrode", "0.5 M NaClO4 in PC"),
    )
    for d, film, q, n in ((1, "absent", "", ""), (2, 7.5, 2e-6, 0.9), (3, 7.9, "", ""))
)
SECOND = FIRST.replace(",42,0.8,", ",43.5,0.7,")


def build(path: Path, folder: Path) -> None:
    """Make the campaign with this program."""
    from campaign.ledger.amending import amend
    from campaign.ledger.criteria_writing import set_criteria
    from campaign.ledger.database import open_database
    from campaign.ledger.files import read_files
    from campaign.ledger.importing import Choices, import_tables
    from campaign.ledger.starting import start
    from campaign.ledger.withdrawing import withdraw

    start(str(path), "Europe/Paris", "tester")
    database = open_database(str(path))
    for name, text, refit in (("first.csv", FIRST, False), ("second.csv", SECOND, True)):
        (folder / name).write_text(text, encoding="utf-8")
        tables = read_files(database, [str(folder / name)])
        import_tables(database, tables, Choices(refit=refit), who="tester")
    amend(database, "cell", "C1", {"area_cm2": "1.12", "note": "µm rule"}, "measured", "tester")
    set_criteria(database, {"ratio_margin": 1.6}, reason="agreed in the group", who="tester")
    withdraw(database, "measurement", "2", "bubble", "tester")
    withdraw(database, "cell", "C2", "leaked", "tester")


def main() -> None:
    """Write NNNN.sql unless it is there."""
    sys.path.insert(0, str(HERE.parents[1]))
    from campaign.ledger.database import REVISION

    target = HERE / f"{REVISION}.sql"
    if target.exists():
        sys.exit(f"{target} is there and is never made again")
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "campaign.sqlite"
        build(path, Path(folder))
        with closing(sqlite3.connect(path)) as connection:
            text = "\n".join(connection.iterdump()) + "\n"
    target.write_text(text, encoding="utf-8")
    print(f"{target}: {len(text.splitlines())} lines")


if __name__ == "__main__":
    main()
