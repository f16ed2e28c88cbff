"""Reading flat tables for a campaign: its zone, the mapping file, and the spectra they name."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from campaign.errors import refused
from campaign.ledger.database import is_file
from campaign.ledger.settings import zone

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
        table = read_table(path, mapping=rules, decimal=decimal, sheet=sheet, zone=campaign_zone)
        attach_spectra(table.rows, path.resolve().parent, _folder(database))
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


def attach_spectra(rows: Sequence[Any], near: Path, home: Path) -> None:
    """Note the digest of each spectrum file that is there.

    A spectrum is named relative to the table (`near`) or to the database (`home`); it is kept
    relative to the database where it lies below it.
    """
    for row in rows:
        name = row.values.get("spectrum")
        if not name:
            continue
        for start in (near, home):
            path = start / name
            if is_file(path):
                resolved = path.resolve()
                row.values["spectrum"] = (
                    str(resolved.relative_to(home))
                    if resolved.is_relative_to(home)
                    else str(resolved)
                )
                row.values["spectrum_sha256"] = _digest(resolved)
                break


def _digest(path: Path) -> str:
    from campaign.ledger.checking import file_digest

    try:
        return file_digest(path)
    except OSError as error:
        raise refused(
            f"the spectrum file {path} cannot be read: {error.strerror}",
            column="spectrum",
            value=path,
            expected="a readable file",
        ) from None
