"""Checking a campaign: the journal's chain, every row's digest, spectra, plausibility.

Each problem comes with its remedy. Problems fail the check; remarks do not.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from sqlalchemy import and_, func, select

from campaign.ledger import schema
from campaign.ledger.database import is_file
from campaign.ledger.journal import FIRST, digest, ended_line, entry_hash, keys, made_line
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

Row = dict[str, Any]

RESTORE = "restore the latest backup whose journal head is in this chain"


@dataclass(frozen=True)
class Problem:
    """One thing the check found: what, and how to mend it; `grave` fails the check."""

    about: str
    message: str
    remedy: str
    grave: bool = True


def check(
    connection: Connection, head: str | None = None, folder: Path | None = None
) -> list[Problem]:
    """Return everything wrong with the campaign, grave problems first.

    head: the hash an earlier check, report or backup printed; a journal that no longer
    holds it was cut. folder: where relative spectrum paths start.
    """
    entries = _entries(connection)
    problems = [
        *_chain(entries),
        *_head(entries, head),
        *_digests(connection, entries),
        *_storage(connection),
        *_orphans(connection),
        *_spectra(connection, folder or Path()),
        *_implausible(connection),
    ]
    return sorted(problems, key=lambda problem: not problem.grave)


def _entries(connection: Connection) -> list[Row]:
    table = schema.journal
    return [dict(row) for row in connection.execute(select(table).order_by(table.c.id)).mappings()]


def _chain(entries: list[Row]) -> Iterator[Problem]:
    previous = FIRST
    for place, entry in enumerate(entries, 1):
        about = f"journal entry {entry['id']}"
        if entry["id"] != place:
            yield Problem(about, f"stands at place {place}: an entry is missing", RESTORE)
            return
        if entry["previous"] != previous:
            yield Problem(about, "does not follow the entry before it", RESTORE)
        if entry_hash(entry) != entry["hash"]:
            yield Problem(about, "was changed after it was written", RESTORE)
        previous = entry["hash"]
    if not entries:
        yield Problem("journal", "is empty", RESTORE)


def _head(entries: list[Row], head: str | None) -> Iterator[Problem]:
    if head is None:
        return
    known = [entry["hash"] for entry in entries]
    matches = [found for found in known if found.startswith(head.lower())]
    if len(head) < 8 or not matches:
        yield Problem(
            "journal",
            f"does not hold the hash {head}: entries were cut off or rewritten since it was "
            "noted, or the hash is not of this campaign",
            RESTORE,
        )


def _digests(connection: Connection, entries: list[Row]) -> Iterator[Problem]:
    made, ended, strays = _lines(connection, {entry["id"] for entry in entries})
    for entry in entries:
        number = entry["id"]
        for text, key, lines, what in (
            (entry["after"], "made_digest", made, "made"),
            (entry["before"], "ended_digest", ended, "ended"),
        ):
            try:
                stated = json.loads(text or "{}").get(key)
            except (ValueError, AttributeError):
                continue  # the chain has reported the edited entry already
            found = digest(lines[number]) if lines.get(number) else None
            if stated != found:
                yield Problem(
                    f"journal entry {number}",
                    f"({entry['action']}: {entry['subject']}) no longer agrees with the rows it "
                    f"{what}: rows were changed, added or removed outside the program",
                    RESTORE,
                )
    for table, number in strays:
        yield Problem(table, f"holds a row of an entry {number} the journal lacks", RESTORE)


def _lines(
    connection: Connection, known: set[int]
) -> tuple[dict[int, list[str]], dict[int, list[str]], list[tuple[str, int]]]:
    made: dict[int, list[str]] = {}
    ended: dict[int, list[str]] = {}
    strays: list[tuple[str, int]] = []
    for table in schema.JOURNALLED:
        names = keys(table)
        for row in connection.execute(select(table).order_by(*table.primary_key)).mappings():
            made.setdefault(row["entry"], []).append(made_line(table.name, dict(row)))
            if row["ended_by"] is not None:
                line = ended_line(table.name, [row[name] for name in names])
                ended.setdefault(row["ended_by"], []).append(line)
            for number in (row["entry"], row["ended_by"]):
                if number is not None and number not in known:
                    strays.append((table.name, number))
    return made, ended, strays


def _storage(connection: Connection) -> Iterator[Problem]:
    if connection.dialect.name != "sqlite":
        return
    found = connection.exec_driver_sql("PRAGMA integrity_check(5)").scalars().all()
    if found != ["ok"]:
        yield Problem("database file", "; ".join(map(str, found)), RESTORE)
    for row in connection.exec_driver_sql("PRAGMA foreign_key_check").fetchmany(5):
        yield Problem(str(row[0]), f"row {row[1]} refers to a missing row of {row[2]}", RESTORE)


_LINKS = (
    ("cell", "electrode", "electrode"),
    ("cell", "electrolyte", "electrolyte"),
    ("measurement", "cell", "cell"),
    ("fit", "measurement", "measurement"),
)


def _orphans(connection: Connection) -> Iterator[Problem]:
    for name, column, target in _LINKS:
        child, parent = schema.metadata.tables[name], schema.metadata.tables[target]
        standing = select(parent.c.record).where(in_force(parent))
        count = connection.execute(
            select(func.count())
            .select_from(child)
            .where(in_force(child), child.c[column].not_in(standing))
        ).scalar()
        if count:
            yield Problem(
                name,
                f"{count} in force belong to a {target} that was withdrawn",
                f"withdraw them too, or enter the {target} again",
            )


def _spectra(connection: Connection, folder: Path) -> Iterator[Problem]:
    table = schema.measurement
    rows = connection.execute(
        select(table.c.record, table.c.spectrum, table.c.spectrum_sha256).where(
            in_force(table), table.c.spectrum.is_not(None)
        )
    )
    for record, name, known in rows:
        path = folder / name
        about = f"measurement {record}"
        if not is_file(path):
            yield Problem(
                about,
                f"its spectrum file {name} is not there",
                "put the file back, or amend the measurement's spectrum",
                grave=known is not None,
            )
        elif known is not None and _changed(path, known):
            yield Problem(
                about,
                f"its spectrum file {name} was changed since it was logged, or cannot be read",
                "put the original file back, or log the new spectrum as a refit",
            )


def _changed(path: Path, known: str) -> bool:
    try:
        return file_digest(path) != known
    except OSError:
        return True  # what cannot be read cannot be vouched for


def file_digest(path: Path) -> str:
    """Return the SHA-256 of a file's bytes."""
    with path.open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()


# Orders of magnitude outside which a value is more likely a slip of unit than a result
# (common practice, no source).
_PLAUSIBLE = {"R": (1e-3, 1e9), "s": (1e-3, 1e8)}


def _implausible(connection: Connection) -> Iterator[Problem]:
    value, fit = schema.fitted_value, schema.fit
    joined = value.join(fit, and_(fit.c.id == value.c.fit, in_force(fit)))
    for initial, (low, high) in _PLAUSIBLE.items():
        rows = connection.execute(
            select(fit.c.measurement, value.c.quantity, value.c.value)
            .select_from(joined)
            .where(
                value.c.quantity.like(f"{initial}%"),
                (value.c.value < low) | (value.c.value > high),
            )
            .limit(20)
        )
        for record, quantity, amount in rows:
            yield Problem(
                f"measurement {record}",
                f"{quantity} is {amount:g}, which is hardly plausible",
                "check the unit; amend the fit if it is wrong",
                grave=False,
            )
    m = schema.measurement
    cold = connection.execute(
        select(m.c.record, m.c.temperature_K)
        .where(in_force(m), (m.c.temperature_K < 150) | (m.c.temperature_K > 700))
        .limit(20)
    )
    for record, kelvin in cold:
        yield Problem(
            f"measurement {record}",
            f"the temperature is {kelvin - 273.15:g} degC, which is hardly plausible",
            "check whether kelvin and degrees Celsius were mixed up; amend the measurement",
            grave=False,
        )
