"""Spectrum files: which of the files that tables name are read, and their digests.

A table, or a database from elsewhere, may name any path. A file is read only where, links
followed, it lies below the folder of the table that names it or of the campaign's database; and
only a regular file of at most 1 GB. Any other name is kept as it was written and not followed.
"""

from __future__ import annotations

import hashlib
import stat
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Any

LARGEST = 1 << 30  # bytes of a spectrum file
_PIECE = 1 << 20


def lies_below(path: Path, *folders: Path) -> bool:
    """Return whether a path, with its links followed, lies below one of the folders."""
    try:
        real = path.resolve()
        return any(real.is_relative_to(folder.resolve()) for folder in folders)
    except (OSError, ValueError, RuntimeError):
        return False  # no file system takes the name, or its links go round in circles


def file_digest(path: Path) -> str:
    """Return the SHA-256 of a regular file's bytes; raises OSError for anything else."""
    state = hashlib.sha256()
    left = LARGEST
    with path.open("rb") as stream:
        if not stat.S_ISREG(path.stat().st_mode):
            raise OSError(None, "it is not a regular file")
        while piece := stream.read(_PIECE):
            left -= len(piece)
            if left < 0:
                raise OSError(None, f"it is larger than {LARGEST >> 20} MB")
            state.update(piece)
    return state.hexdigest()


def attach_spectra(rows: Sequence[Any], near: Path, home: Path) -> list[str]:
    """Note the digest of each spectrum file that is there and may be read; return warnings.

    A spectrum is named relative to the table (`near`) or to the database (`home`); it is kept
    relative to the database where it lies below it.
    """
    warnings: list[str] = []
    for row in rows:
        name = row.values.get("spectrum")
        if not name:
            continue
        path = next(_files(name, near, home), None)
        if path is None:
            continue
        if not lies_below(path, near, home):
            warnings.append(
                f"the spectrum file {name} lies outside the folders of the table and of the "
                "campaign: its name is kept, it is not read"
            )
            continue
        real, base = path.resolve(), home.resolve()
        inside = real.is_relative_to(base)
        row.values["spectrum"] = str(real.relative_to(base)) if inside else str(real)
        row.values["spectrum_sha256"] = _digest(real)
    return warnings


def _files(name: str, near: Path, home: Path) -> Iterator[Path]:
    """Yield the files a name may mean, the ones that may be read first."""
    from campaign.ledger.database import is_file

    found = [path for path in (near / name, home / name) if is_file(path)]
    yield from sorted(found, key=lambda path: not lies_below(path, near, home))


def _digest(path: Path) -> str:
    from campaign.errors import refused

    try:
        return file_digest(path)
    except OSError as error:
        raise refused(
            f"the spectrum file {path} cannot be read: {error.strerror}",
            column="spectrum",
            value=path,
            expected="a readable file",
        ) from None
