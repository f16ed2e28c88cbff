"""Backups: SQLite's online backup, verified before it is called one."""

from __future__ import annotations

import sqlite3
from contextlib import closing
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

from sqlalchemy import select

from campaign.errors import refused
from campaign.ledger import schema
from campaign.ledger.checking import check
from campaign.ledger.copying import Copied, copy_campaign
from campaign.ledger.database import Database, Place
from campaign.ledger.history import head, size
from campaign.ledger.starting import discard, refuse_taken

if TYPE_CHECKING:
    from sqlalchemy import Connection


def backup(database: Database, target: str | None = None) -> Copied:
    """Write a verified backup to a new SQLite file; return where, how much and the head.

    Works while others write. A campaign on a server is copied into a SQLite file. Raises
    Refused where the file exists or the copy does not pass its check.
    """
    path = Path(target) if target else _default(database)
    if database.where.path is None:
        return copy_campaign(database, str(path))
    refuse_taken(path)
    try:
        online_copy(database.where.path, path)
        return _verified(database, path)
    except OSError as error:
        discard(path)
        raise refused(f"the backup cannot be written to {path}: {error.strerror}") from error
    except BaseException:
        discard(path)
        raise


def _default(database: Database) -> Path:
    stamp = datetime.now(UTC).strftime("%Y%m%dT%H%M%SZ")
    if database.where.path is None:
        return Path(f"campaign-backup-{stamp}.sqlite")
    own = database.where.path
    return own.with_name(f"{own.stem}-backup-{stamp}.sqlite")


def online_copy(source: Path, target: Path) -> None:
    """Copy a SQLite database page by page under its own locks; raises Refused on failure."""
    try:
        with (
            closing(sqlite3.connect(f"file:{source}?mode=ro", uri=True)) as origin,
            closing(sqlite3.connect(target)) as copy,
        ):
            origin.backup(copy)
    except sqlite3.Error as error:
        raise refused(f"the backup cannot be written to {target}: {error}", value=target) from error


def _verified(database: Database, path: Path) -> Copied:
    copy = Database(Place(path=path))
    with copy.reading() as connection:
        grave = [p for p in check(connection) if p.grave and "spectrum" not in p.message]
        last = head(connection)
        entries, rows = size(connection)
    if grave or last is None:
        said = f"{grave[0].about}: {grave[0].message}" if grave else "its journal is empty"
        raise refused(
            f"the backup does not pass its check ({said}); it was removed; run 'campaign check'",
            value=path,
        )
    with database.reading() as connection:
        if not _holds(connection, last["hash"]):
            raise refused("the backup's journal is not part of this campaign's", value=path)
    return Copied(copy.where, entries, rows, last["hash"])


def _holds(connection: Connection, hash_text: str) -> bool:
    table = schema.journal
    return connection.execute(select(table.c.id).where(table.c.hash == hash_text)).first() is not None
