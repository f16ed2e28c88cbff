"""Writing what is in force as a data package, or as a workbook."""

from __future__ import annotations

import csv
import hashlib
import io
import json
import os
import shutil
from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any

from sqlalchemy import Text, select

from campaign.errors import refused
from campaign.ledger import schema
from campaign.ledger.flat.writing import guarded
from campaign.ledger.history import head
from campaign.ledger.package import layout
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

    from campaign.ledger.database import Database

Row = Mapping[str, Any]


def write_package(database: Database, folder: Path) -> dict[str, int]:
    """Write the records in force as a data package; return the rows of each table.

    Raises Refused where the folder holds something, or cannot be written.
    """
    if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
        raise refused(
            f"{folder} holds something already and it is left as it is; name a new folder",
            value=folder,
            expected="a new or empty folder",
        )
    with database.reading() as connection:
        tables = {table.name: _text_of(connection, table) for table in layout.TABLES}
        latest = head(connection)
    content = json.dumps(_descriptor(tables, latest), indent=1, ensure_ascii=False) + "\n"
    draft = folder.with_name(f".{folder.name}.{os.getpid()}")
    try:
        draft.mkdir(parents=True)
        for name, (text, _) in tables.items():
            (draft / f"{name}.csv").write_bytes(text)
        (draft / layout.DESCRIPTOR).write_text(content, encoding="utf-8")
        if folder.exists():
            folder.rmdir()
        draft.rename(folder)
    except OSError as error:
        shutil.rmtree(draft, ignore_errors=True)
        raise refused(
            f"the package cannot be written to {folder}: {error.strerror or error}",
            value=folder,
            expected="a folder that can be written",
        ) from None
    return {name: count for name, (_, count) in tables.items()}


def _text_of(connection: Connection, table: Table) -> tuple[bytes, int]:
    """Return a table in force as CSV bytes, and its number of rows."""
    names = layout.columns(table)
    texts = {name for name in names if isinstance(table.columns[name].type, Text)}
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\r\n")
    writer.writerow(names)
    count = 0
    for row in connection.execute(_query(table)).mappings():
        writer.writerow([_cell(row[name], name in texts) for name in names])
        count += 1
    return stream.getvalue().encode("utf-8"), count


def _query(table: Table) -> Any:
    """Select the rows in force; a part's owner by its record number."""
    found = layout.owner(table)
    chosen = [table.columns[name] for name in layout.columns(table)]
    if found is None:
        # by record number: an amended record keeps its place
        return select(*chosen).where(in_force(table)).order_by(table.c.record)
    name, column = found
    holder = schema.metadata.tables[name]
    shown = [holder.c.record.label(column) if c.name == column else c for c in chosen]
    return (
        select(*shown)
        .select_from(table.join(holder, holder.c.id == table.columns[column]))
        .where(in_force(table), in_force(holder))
        .order_by(holder.c.record, *(c for c in table.primary_key.columns if c.name != column))
    )


def _cell(value: Any, is_text: bool) -> str:
    if value is None:
        return ""
    if isinstance(value, float):
        return repr(value)
    return guarded(str(value)) if is_text else str(value)


def _descriptor(tables: Mapping[str, tuple[bytes, int]], latest: Row | None) -> dict[str, Any]:
    resources = [
        {
            "name": table.name,
            "path": f"{table.name}.csv",
            "profile": "tabular-data-resource",
            "title": layout.TITLES[table.name],
            "format": "csv",
            "mediatype": "text/csv",
            "encoding": "utf-8",
            "bytes": len(tables[table.name][0]),
            "hash": f"sha256:{hashlib.sha256(tables[table.name][0]).hexdigest()}",
            "schema": layout.schema_of(table),
        }
        for table in layout.TABLES
    ]
    return {
        "name": "campaign",
        "profile": "tabular-data-package",
        "title": "Electrode test campaign",
        "description": "Records in force of a campaign ledger. A text that a spreadsheet would run "
        "as a formula begins with an apostrophe.",
        "format": layout.FORMAT,
        "version": str(layout.VERSION),
        "journal": None if latest is None else {"entry": latest["entry"], "hash": latest["hash"]},
        "resources": resources,
    }
