"""Entering a data package that this program wrote into an empty campaign."""

from __future__ import annotations

import csv
import hashlib
import io
import json
from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any

from sqlalchemy import Integer, Text, func, select

from campaign.errors import Refused, refused
from campaign.ledger import schema
from campaign.ledger.flat.columns import unguarded
from campaign.ledger.journal import Entry, Pen, writing
from campaign.ledger.package import layout
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

    from campaign.ledger.database import Database

Row = dict[str, Any]

LARGEST = 1 << 28  # bytes of one file


def is_package(name: str) -> bool:
    """Return whether a name given to `import` means a data package."""
    path = Path(name)
    return path.name == layout.DESCRIPTOR or (path.is_dir() and (path / layout.DESCRIPTOR).exists())


def import_package(
    database: Database, name: str, who: str | None = None, *, dry_run: bool = False
) -> dict[str, int]:
    """Enter a package as one journal entry; return the rows of each table.

    Record numbers stay as they were. Raises Refused for a package of another kind, a file that
    was changed since, or a campaign that holds records already.
    """
    path = Path(name)
    folder = path if path.is_dir() else path.parent
    tables = _read(folder)
    counts = {}
    with writing(database, who=who, dry_run=dry_run) as pen:
        _refuse_filled(pen.connection)
        entry = pen.entry("import", f"data package {folder.name or folder.resolve().name}")
        for table in layout.TABLES:
            rows = tables[table.name]
            for row in rows:
                _enter(pen, entry, table, row)
            counts[table.name] = len(rows)
    return counts


def _refuse_filled(connection: Connection) -> None:
    for table in layout.TABLES:
        if table.name == "setting":
            continue
        if connection.execute(select(func.count()).select_from(table)).scalar():
            raise refused(
                "a data package is entered into an empty campaign, and this one holds records; "
                "start another with 'campaign --db NAME init'",
                value=table.name,
                expected="a campaign without records",
            )


def _enter(pen: Pen, entry: Entry, table: Table, row: Row) -> None:
    if table.name == "setting":
        _replace_setting(pen, entry, row)
        return
    if "record" in row:
        row["id"] = row["record"]
    pen.make(entry, table, row)


def _replace_setting(pen: Pen, entry: Entry, row: Row) -> None:
    table = schema.setting
    known = (
        pen.connection.execute(select(table).where(table.c.name == row["name"], in_force(table)))
        .mappings()
        .first()
    )
    if known is not None and known["value"] == row["value"]:
        return
    successor = {"name": row["name"], "value": row["value"]}
    if known is not None:
        entry.end(table, dict(known))
        successor["record"] = known["record"]
    pen.make(entry, table, successor)


def _read(folder: Path) -> dict[str, list[Row]]:
    descriptor = _descriptor(folder / layout.DESCRIPTOR)
    resources = descriptor.get("resources")
    found = {
        str(one.get("name")): one
        for one in (resources if isinstance(resources, list) else [])
        if isinstance(one, dict)
    }
    return {
        table.name: _rows(folder / f"{table.name}.csv", table, found.get(table.name, {}))
        for table in layout.TABLES
    }


def _descriptor(path: Path) -> Row:
    try:
        found = json.loads(_content(path).decode("utf-8"))
    except (ValueError, RecursionError):
        raise _no_package(path, "it is not JSON") from None
    if not isinstance(found, dict) or found.get("format") != layout.FORMAT:
        raise _no_package(path, "it describes a package of another kind")
    if found.get("version") != str(layout.VERSION):
        raise _no_package(
            path, f"it is of version {str(found.get('version'))[:20]}, this program reads "
            f"{layout.VERSION}"
        )  # fmt: skip
    return found


def _no_package(path: Path, why: str) -> Refused:
    return refused(
        f"{path} cannot be entered: {why}",
        file=str(path),
        expected="a data package written by 'campaign export'",
    )


def _content(path: Path) -> bytes:
    try:
        if path.stat().st_size > LARGEST:
            raise _no_package(path, "it is larger than any campaign")
        return path.read_bytes()
    except OSError as error:
        raise _no_package(path, f"{error.strerror or error}") from None


def _rows(path: Path, table: Table, stated: Mapping[str, Any]) -> list[Row]:
    content = _content(path)
    digest = f"sha256:{hashlib.sha256(content).hexdigest()}"
    if stated.get("hash") != digest:
        raise refused(
            f"{path.name} was changed since the package was written: its SHA-256 is not the one "
            "stated; corrections belong into the ledger, with 'campaign amend'",
            file=str(path),
            value=digest,
            expected=str(stated.get("hash")),
        )
    names = layout.columns(table)
    try:
        reader = csv.reader(io.StringIO(content.decode("utf-8"), newline=""), strict=True)
        header = next(reader, None)
        if header != names:
            raise _no_package(path, f"its columns are not {', '.join(names)}")
        return [_row(table, names, cells) for cells in reader]
    except (csv.Error, UnicodeDecodeError, ValueError) as error:
        raise _no_package(path, str(error)) from None


def _row(table: Table, names: list[str], cells: list[str]) -> Row:
    if len(cells) != len(names):
        raise ValueError(f"a row has {len(cells)} cells where {len(names)} belong")
    return {
        name: _value(table.columns[name].type, text)
        for name, text in zip(names, cells, strict=True)
    }


def _value(kind: Any, text: str) -> Any:
    if text == "":
        return None
    if isinstance(kind, Integer):
        return int(text)
    if isinstance(kind, Text):
        return unguarded(text)
    return float(text)
