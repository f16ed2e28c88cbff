"""Building the demo campaign from the flat tables that ship with the program."""

from __future__ import annotations

import shutil
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from sqlalchemy import select

from campaign.errors import refused
from campaign.ledger import schema
from campaign.ledger.database import Database, open_database
from campaign.ledger.files import read_files
from campaign.ledger.importing import Choices, import_tables
from campaign.ledger.settings import in_force
from campaign.ledger.starting import start
from campaign.ledger.withdrawing import withdraw

if TYPE_CHECKING:
    from sqlalchemy import Connection

ZONE = "Europe/Paris"
FILE = "campaign.sqlite"
WHO = "demo"


@dataclass(frozen=True)
class Built:
    """Where the demo is; fresh: it was built now and not found there."""

    database: Path
    tables: Path
    fresh: bool


def shipped_folder() -> Path:
    """Return the folder of the demo's tables: packaged in a wheel, beside it in a checkout."""
    package = Path(__file__).resolve().parent.parent
    for folder in (package / "demo_campaign", package.parent / "demo_campaign"):
        if (folder / "tables").is_dir():
            return folder
    raise refused("this installation of the program lacks its demo; install it again")


def build(folder: Path) -> Built:
    """Build the demo campaign in a folder, or find the one built there before.

    Raises Refused where the folder holds something else.
    """
    database = folder / FILE
    tables = folder / "tables"
    if database.exists():
        _refuse_other(open_database(str(database)), folder)
        return Built(database, tables, fresh=False)
    if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
        raise refused(
            f"{folder} is not empty and holds no demo campaign; name another folder",
            value=folder,
            expected="an empty or new folder",
        )
    _fill(folder, database)
    return Built(database, tables, fresh=True)


def _refuse_other(database: Database, folder: Path) -> None:
    """Refuse a campaign that the demo did not start."""
    table = schema.journal
    with database.reading() as connection:
        starter = connection.execute(select(table.c.who).where(table.c.id == 1)).scalar()
    if starter != WHO:
        raise refused(
            f"{folder} holds a campaign of yours, which is left as it is; name another folder",
            value=folder,
            expected="an empty or new folder",
        )


def _fill(folder: Path, path: Path) -> None:
    made = not folder.exists()
    shipped = shipped_folder()
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name in ("tables", "refits"):
            shutil.copytree(shipped / name, folder / name)
        start(str(path), ZONE, WHO)
        database = open_database(str(path))
        files = sorted(str(file) for file in (folder / "tables").iterdir())
        import_tables(database, read_files(database, files), who=WHO)
        corrections = tomllib.loads((shipped / "corrections.toml").read_text(encoding="utf-8"))
        for step in corrections["corrections"]:
            _correct(database, folder, step)
    except OSError as error:
        raise refused(
            f"the demo cannot be built in {folder}: {error.strerror or error}", value=folder
        ) from error
    except BaseException:
        if made:
            shutil.rmtree(folder, ignore_errors=True)
        raise


def _correct(database: Database, folder: Path, step: Mapping[str, Any]) -> None:
    if step["action"] == "refit":
        tables = read_files(database, [str(folder / step["file"])])
        import_tables(database, tables, Choices(refit=True), who=WHO)
        return
    with database.reading() as connection:
        number = _measurement(connection, step["cell"], step["measured_at"])
        if step["kind"] == "fit":
            number = _fit(connection, number)
    withdraw(database, step["kind"], str(number), step["reason"], WHO)


def _measurement(connection: Connection, cell: str, instant: str) -> int:
    from campaign.ledger.instants import format_utc, parse_instant

    m, c = schema.measurement, schema.cell
    utc = format_utc(parse_instant(instant, ZONE).utc)
    found = connection.execute(
        select(m.c.record)
        .select_from(m.join(c, c.c.record == m.c.cell))
        .where(c.c.label == cell, m.c.measured_at == utc, in_force(m), in_force(c))
    ).scalar_one()
    return int(found)


def _fit(connection: Connection, measurement: int) -> int:
    fit = schema.fit
    found = connection.execute(
        select(fit.c.record).where(fit.c.measurement == measurement, in_force(fit))
    ).scalar_one()
    return int(found)
