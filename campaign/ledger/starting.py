"""Starting a campaign in an empty place."""

from __future__ import annotations

import errno
from pathlib import Path

from campaign.errors import refused
from campaign.ledger import schema
from campaign.ledger.database import Database, Place, place, revision
from campaign.ledger.journal import writing


def start(given: str | None, zone: str = "UTC", who: str | None = None) -> Place:
    """Make the database of a new campaign and journal its zone; return where it is.

    Raises Refused where a campaign, or any other file, is there already.
    """
    from campaign.ledger.instants import check_zone

    check_zone(zone)
    where = place(given)
    if where.path is not None:
        refuse_taken(where.path)
    fresh = where.path is not None
    try:
        _build(where, zone, who)
    except BaseException:
        if fresh and where.path is not None:
            discard(where.path)
        raise
    return where


def refuse_taken(path: Path) -> None:
    """Raise Refused where a new database cannot be made at a path."""
    try:
        path.stat()
    except OSError as error:
        if error.errno not in (errno.ENOENT, errno.ENOTDIR):
            raise refused(
                f"no campaign can be kept at {path}: {error.strerror}",
                value=path,
                expected="a file that does not exist yet",
            ) from None
    if path.is_dir():
        raise refused(
            f"{path} is a folder; name a file, such as {path / 'campaign.sqlite'}",
            value=path,
            expected="a file that does not exist yet",
        )
    if path.exists():
        raise refused(
            f"there is a file at {path} already and it is left as it is; name another file",
            value=path,
            expected="a file that does not exist yet",
        )
    if not path.resolve().parent.is_dir():
        raise refused(
            f"the folder {path.resolve().parent} does not exist; make it first",
            value=path,
            expected="a file in an existing folder",
        )


def _build(where: Place, zone: str, who: str | None) -> None:
    from campaign.ledger.migrating import migrate

    database = Database(where, create=True)
    use_write_ahead_log(database)
    with writing(database, who=who) as pen:
        if revision(pen.connection) is not None:
            raise refused(
                f"there is a campaign at {where.shown} already and it is left as it is",
                value=where.shown,
                expected="a database without a campaign",
            )
        migrate(pen.connection)
        entry = pen.entry("start", "campaign")
        pen.make(entry, schema.setting, {"name": "zone", "value": zone})


def use_write_ahead_log(database: Database) -> None:
    """Let queries run while a measurement is logged (SQLite; kept in the file)."""
    if database.dialect == "sqlite":
        with database.engine.connect() as connection:
            connection.exec_driver_sql("PRAGMA journal_mode = WAL")


def discard(path: Path) -> None:
    """Remove a database that was being made, with what SQLite keeps beside it."""
    for name in (path, Path(f"{path}-wal"), Path(f"{path}-shm")):
        name.unlink(missing_ok=True)
