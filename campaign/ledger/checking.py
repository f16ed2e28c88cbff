"""Checking a campaign: the journal's chain, every row's digest, rules, spectra, plausibility.

Each problem comes with its remedy. Problems fail the check; remarks do not.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from sqlalchemy import and_, func, select

from campaign.ledger import invariants, rules, schema
from campaign.ledger.database import is_file
from campaign.ledger.journal import FIRST, digest, ended_line, entry_hash, keys, made_line
from campaign.ledger.settings import in_force
from campaign.ledger.spectra import file_digest, lies_below

if TYPE_CHECKING:
    from sqlalchemy import Connection

Row = dict[str, Any]

RESTORE = "restore the latest backup whose journal head is in this chain"


@dataclass(frozen=True)
class Problem:
    """One thing the check found: what, and how to mend it; `grave` fails the check.

    kind: what it is a problem of. Of journal, rows or storage: what is stored is not what was
    entered, and a copy of it would not be either.
    """

    about: str
    message: str
    remedy: str
    grave: bool = True
    kind: str = "journal"


def damage(problems: Iterable[Problem]) -> list[Problem]:
    """Return the problems that show that what is stored is not what was entered."""
    return [p for p in problems if p.grave and p.kind in ("journal", "rows", "storage")]


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
        *_rules(connection),
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
                    kind="rows",
                )
    for table, number in strays:
        what = f"holds a row of an entry {number} the journal lacks"
        yield Problem(table, what, RESTORE, kind="rows")


def _lines(
    connection: Connection, known: set[int]
) -> tuple[dict[int, list[str]], dict[int, list[str]], list[tuple[str, int]]]:
    made: dict[int, list[str]] = {}
    ended: dict[int, list[str]] = {}
    strays: list[tuple[str, int]] = []
    for table in schema.JOURNALLED:
        names = keys(table)
        for row in connection.execute(select(table).order_by(*table.primary_key)).mappings():
            made.setdefault(row["entry"], []).append(_line(table.name, dict(row)))
            if row["ended_by"] is not None:
                line = ended_line(table.name, [row[name] for name in names])
                ended.setdefault(row["ended_by"], []).append(line)
            for number in (row["entry"], row["ended_by"]):
                if number is not None and number not in known:
                    strays.append((table.name, number))
    return made, ended, strays


def _line(table: str, row: Row) -> str:
    try:
        return made_line(table, row)
    except ValueError:
        return f"{table}: a number that is not finite"  # no entry made it: agrees with no digest


def _storage(connection: Connection) -> Iterator[Problem]:
    if connection.dialect.name != "sqlite":
        return
    found = connection.exec_driver_sql("PRAGMA integrity_check(5)").scalars().all()
    if found != ["ok"]:
        yield Problem("database file", "; ".join(map(str, found)), RESTORE, kind="storage")
    for row in connection.exec_driver_sql("PRAGMA foreign_key_check").fetchmany(5):
        what = f"row {row[1]} refers to a missing row of {row[2]}"
        yield Problem(str(row[0]), what, RESTORE, kind="storage")


def _rules(connection: Connection) -> Iterator[Problem]:
    for name in rules.missing(connection):
        yield Problem(
            "database",
            f"its own rule {name} was taken away or changed",
            "copy the campaign with 'campaign copy --to NEW.sqlite': the copy has every rule, and "
            "is refused if a row breaks one",
            kind="rules",
        )
    for about, message in invariants.broken(connection):
        yield Problem(
            about, message, f"amend or withdraw it, and {RESTORE} if nobody entered it so",
            kind="rules",
        )  # fmt: skip


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
                kind="rules",
            )


def _spectra(connection: Connection, folder: Path) -> Iterator[Problem]:
    table = schema.measurement
    rows = connection.execute(
        select(table.c.record, table.c.spectrum, table.c.spectrum_sha256).where(
            in_force(table), table.c.spectrum.is_not(None)
        )
    )
    for record, name, known in rows:
        yield from _spectrum(f"measurement {record}", folder, name, known)


def _spectrum(about: str, folder: Path, name: str, known: str | None) -> Iterator[Problem]:
    path = folder / name
    # An absolute name with a digest was read when it was entered, below its table's folder.
    entered = known is not None and Path(name).is_absolute()
    if not (entered or lies_below(path, folder)):
        yield Problem(
            about,
            f"its spectrum file {name} lies outside the campaign's folder and is not read",
            "keep spectra below the folder of the database, and name them from there",
            grave=False,
            kind="spectrum",
        )
    elif not is_file(path):
        yield Problem(
            about,
            f"its spectrum file {name} is not there",
            "put the file back, or amend the measurement's spectrum",
            grave=known is not None,
            kind="spectrum",
        )
    elif known is not None and _changed(path, known):
        yield Problem(
            about,
            f"its spectrum file {name} was changed since it was logged, or cannot be read",
            "put the original file back, or log the new spectrum as a refit",
            kind="spectrum",
        )


def _changed(path: Path, known: str) -> bool:
    try:
        return file_digest(path) != known
    except OSError:
        return True  # what cannot be read cannot be vouched for


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
                kind="plausibility",
            )
    yield from _odd_conditions(connection)


def _odd_conditions(connection: Connection) -> Iterator[Problem]:
    m, value, fit, made = schema.measurement, schema.fitted_value, schema.fit, schema.journal
    stands = in_force(m)
    unsure = value.join(fit, and_(fit.c.id == value.c.fit, in_force(fit)))
    odd = (
        (
            select(m.c.record, m.c.temperature_K - 273.15).where(
                stands, (m.c.temperature_K < 150) | (m.c.temperature_K > 700)
            ),
            "the temperature is {:g} degC, which is hardly plausible",
            "check whether kelvin and degrees Celsius were mixed up; amend the measurement",
        ),
        (
            select(m.c.record, m.c.potential_V).where(stands, func.abs(m.c.potential_V) > 10),
            "the potential is {:g} V, which is hardly plausible",
            "check whether it is in mV; amend the measurement",
        ),
        (
            select(m.c.record, m.c.measured_at)
            .select_from(m.join(made, made.c.id == m.c.entry))
            .where(stands, func.substr(m.c.measured_at, 1, 10) > func.substr(made.c.at, 1, 10)),
            "it was measured on {:.10}, after it was entered",
            "check the date and the clocks; withdraw it and enter it with its own instant",
        ),
        (
            select(fit.c.measurement, value.c.se / value.c.value)
            .select_from(unsure)
            .where(value.c.se > value.c.value),
            "a standard error is {:.3g} times its value: the fit does not determine it",
            "check the fit; amend it, or leave out what the spectrum does not show",
        ),
    )
    for query, message, remedy in odd:
        for record, amount in connection.execute(query.limit(20)):
            about = f"measurement {record}"
            yield Problem(about, message.format(amount), remedy, False, "plausibility")
