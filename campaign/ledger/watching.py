"""Importing flat tables that are dropped into a folder.

A file is imported, then moved; both steps may be repeated. Stopped between them, the next
sweep finds the file again, imports nothing new of it and moves it.
"""

from __future__ import annotations

import time
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from campaign.errors import Fault, Refused, refused
from campaign.ledger.files import read_files
from campaign.ledger.importing import Choices, Outcome, import_tables

if TYPE_CHECKING:
    from campaign.ledger.database import Database

ENDINGS = (".csv", ".tsv", ".txt", ".xlsx")
DONE, FAULTY = "done", "faulty"
SETTLE_s = 2.0
"""A file younger than this may still be being written."""


@dataclass(frozen=True)
class Taken:
    """A file that was taken: where it went, and what it added or what was wrong with it."""

    name: str
    moved_to: Path
    outcome: Outcome | None = None
    faults: Sequence[Fault] = ()


@dataclass(frozen=True)
class How:
    """How dropped files are read: mapping file, decimal mark, sheet, who, refits or not."""

    mapping: str | None = None
    decimal: str | None = None
    sheet: str | None = None
    who: str | None = None
    refit: bool = False


def prepare(folder: Path) -> None:
    """Make the folders for files done and faulty; raises Refused where that fails."""
    try:
        for name in (DONE, FAULTY):
            if (folder / name).is_symlink():
                raise OSError(None, f"its {name} is a link, which could lead anywhere")
            (folder / name).mkdir(exist_ok=True)
    except OSError as error:
        raise refused(
            f"{folder} cannot be watched: {error.strerror or error}",
            value=folder,
            expected="a folder that can be written to",
        ) from None


def sweep(
    database: Database, folder: Path, how: How, settle_s: float = SETTLE_s
) -> Iterator[Taken]:
    """Import and move every file that has come to rest, oldest first.

    Raises Refused where the trouble lies with the campaign and not with a file: the file then
    stays where it is.
    """
    for path in waiting(folder, settle_s):
        try:
            tables = read_files(
                database, [str(path)], mapping=how.mapping, decimal=how.decimal, sheet=how.sheet
            )
            outcome = import_tables(database, tables, Choices(refit=how.refit), how.who)
        except Refused as error:
            if not path.exists():
                continue  # another watcher took it
            if not any(_of_file(fault, path) for fault in error.faults):
                raise
            yield Taken(path.name, _set_apart(path, error), faults=error.faults)
            continue
        moved = _move(path, folder / DONE)
        if moved is not None:
            yield Taken(path.name, moved, outcome)


def _of_file(fault: Fault, path: Path) -> bool:
    return fault.file is not None and Path(fault.file).name == path.name


def waiting(folder: Path, settle_s: float = SETTLE_s) -> list[Path]:
    """Return the tables in a folder that nobody has written to lately, oldest first."""
    found = []
    now = time.time()
    for path in folder.iterdir():
        hidden = path.name.startswith((".", "~"))
        if hidden or path.suffix.lower() not in ENDINGS or path.is_symlink():
            continue
        try:
            state = path.stat()
        except OSError:
            continue
        if path.is_file() and now - state.st_mtime >= settle_s:
            found.append((state.st_mtime, path.name, path))
    return [path for _, _, path in sorted(found)]


def _set_apart(path: Path, error: Refused) -> Path:
    """Move a faulty file with its message beside it; the message is there first."""
    target = _free(path.parent / FAULTY / path.name)
    message = target.with_name(f"{target.name}.txt")
    draft = message.with_name(f".{message.name}")
    lines = [fault.sentence() for fault in error.faults]
    draft.write_text("\n".join([*lines, ""]), encoding="utf-8", errors="backslashreplace")
    draft.replace(message)
    path.replace(target)
    return target


def _move(path: Path, folder: Path) -> Path | None:
    target = _free(folder / path.name)
    try:
        path.replace(target)
    except FileNotFoundError:
        return None  # another watcher moved it
    return target


def _free(path: Path) -> Path:
    """Return the path, or one with a number where it is taken."""
    number = 2
    found = path
    while found.exists():
        found = path.with_name(f"{path.stem}-{number}{path.suffix}")
        number += 1
    return found
