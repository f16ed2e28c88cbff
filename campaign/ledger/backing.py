"""Backups: SQLite's online backup, verified before it is called one."""

from __future__ import annotations

import sqlite3
from contextlib import closing
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

from sqlalchemy import select

from campaign.errors import refused
from campaign.ledger import schema
from campaign.ledger.checking import check, damage
from campaign.ledger.copying import Copied, copy_campaign
from campaign.ledger.database import Database, Place
from campaign.ledger.history import head, size
from campaign.ledger.starting import made_whole, refuse_taken

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
        with made_whole(path) as draft:
            online_copy(database.where.path, draft)
            made = _verified(database, Place(path=draft, alias=path))
    except OSError as error:
        raise refused(f"the backup cannot be written to {path}: {error.strerror}") from error
    return Copied(Place(path=path), made.entries, made.rows, made.head)


def _default(database: Database) -> Path:
    stamp = datetime.now(UTC).strftime("%Y%m%dT%H%M%SZ")
    if database.where.path is None:
        return Path(f"campaign-backup-{stamp}.sqlite")
    own = database.where.path
    return own.with_name(f"{own.stem}-backup-{stamp}.sqlite")


def online_copy(source: Path, target: Path) -> None:
    """Copy a SQLite database page by page under its own locks; raises Refused on failure."""
    with Database(Place(path=source)).reading() as connection:
        origin: Any = connection.connection.dbapi_connection
        try:
            with closing(sqlite3.connect(target)) as copy:
                origin.backup(copy)
        except sqlite3.Error as error:
            raise refused(
                f"the backup cannot be written: {error}; check the room on its disk",
                value=target,
            ) from error


def _verified(database: Database, where: Place) -> Copied:
    copy = Database(where)
    with copy.reading() as connection:
        grave = damage(check(connection))
        last = head(connection)
        entries, rows = size(connection)
    if grave or last is None:
        said = f"{grave[0].about}: {grave[0].message}" if grave else "its journal is empty"
        raise refused(
            f"the backup does not pass its check ({said}); it was removed; run 'campaign check'",
            value=where.shown,
        )
    with database.reading() as connection:
        if not _holds(connection, last["hash"]):
            raise refused("the backup's journal is not part of this campaign's", value=where.shown)
    return Copied(copy.where, entries, rows, last["hash"])


def _holds(connection: Connection, hash_text: str) -> bool:
    table = schema.journal
    found = connection.execute(select(table.c.id).where(table.c.hash == hash_text)).first()
    return found is not None
