"""Reading flat tables for a campaign: its zone, the mapping file, and the spectra they name."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from campaign.errors import refused
from campaign.ledger.bulk import many_objects
from campaign.ledger.database import is_file
from campaign.ledger.settings import zone
from campaign.ledger.spectra import attach_spectra

if TYPE_CHECKING:
    from campaign.ledger.database import Database
    from campaign.ledger.flat.reading import FlatTable


def read_files(
    database: Database,
    files: Sequence[str],
    *,
    mapping: str | None = None,
    decimal: str | None = None,
    sheet: str | None = None,
) -> list[FlatTable]:
    """Return the flat tables read from files; faults stay in the tables.

    Raises Refused for a file that is not there or given twice, and for a mapping file that
    cannot be read.
    """
    from campaign.ledger.flat.mapping import read_mapping
    from campaign.ledger.flat.reading import read_table

    if decimal not in (None, ".", ","):
        raise refused(
            f"the decimal mark is . or , and not '{decimal}'", value=decimal, expected=". or ,"
        )
    with database.reading() as connection:
        campaign_zone = zone(connection)
    rules = read_mapping(Path(mapping)) if mapping else None
    tables = []
    seen: set[Path] = set()
    for name in files:
        path = Path(name)
        _refuse_missing(path)
        if path.resolve() in seen:
            raise refused(f"{path} is given twice; give it once", value=path)
        seen.add(path.resolve())
        with many_objects():
            table = read_table(
                path, mapping=rules, decimal=decimal, sheet=sheet, zone=campaign_zone
            )
        table.warnings += attach_spectra(table.rows, path.resolve().parent, _folder(database))
        tables.append(table)
    return tables


def _refuse_missing(path: Path) -> None:
    try:
        folder = path.is_dir()
    except (OSError, ValueError):
        folder = False  # no file system takes the name, or lets us look
    if folder:
        raise refused(
            f"{path} is a folder; name the tables in it", value=path, expected="a CSV or XLSX file"
        )
    if not is_file(path):
        raise refused(
            f"there is no file {path}; check the name and the folder",
            value=path,
            expected="a CSV or XLSX file",
        )


def _folder(database: Database) -> Path:
    path = database.where.path
    return path.resolve().parent if path is not None else Path.cwd()
