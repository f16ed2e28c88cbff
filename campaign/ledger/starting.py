"""Starting a campaign in an empty place."""

from __future__ import annotations

import errno
import os
from collections.abc import Iterator
from contextlib import contextmanager
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
    if where.path is None:
        _build(where, zone, who)
        return where
    with made_whole(where.path) as draft:
        _build(Place(path=draft, alias=where.path), zone, who)
    return where


@contextmanager
def made_whole(path: Path) -> Iterator[Path]:
    """Yield a draft beside `path` that takes its name once it is finished, and never before.

    A process that is killed leaves nothing under the name itself; what it leaves beside it is
    named after it and its number, and may be removed. Raises Refused where somebody else has
    made the file meanwhile.
    """
    draft = path.with_name(f".{path.name}.{os.getpid()}.unfinished"[-250:])
    discard(draft)
    try:
        yield draft
        _take_name(draft, path)
    finally:
        discard(draft)


def _take_name(draft: Path, path: Path) -> None:
    try:
        os.link(draft, path)  # refuses to replace, which a renaming would not
    except FileExistsError:
        refuse_taken(path)
    except OSError:
        refuse_taken(path)
        draft.rename(path)  # a file system without hard links
    _sync(path.resolve().parent)


def _sync(folder: Path) -> None:
    """Make a new name in a folder survive a power cut, where the system can."""
    try:
        handle = os.open(folder, os.O_RDONLY)
    except OSError:
        return
    try:
        os.fsync(handle)
    except OSError:
        pass
    finally:
        os.close(handle)


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
