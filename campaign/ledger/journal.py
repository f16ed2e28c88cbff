"""The append-only record of every entry, amendment and withdrawal.

Each journal entry carries a digest of the rows it made and of the rows it ended, and the
hash of the entry before it. Changing any row, or any entry, breaks a digest or the chain;
`check` recomputes both. Digests and hashes are taken over canonical UTF-8 text: JSON with
sorted keys, without spaces, numbers in their shortest round-trip form, empty columns left
out (so that a column added by a later migration changes no old digest).
"""

from __future__ import annotations

import getpass
import hashlib
import json
import os
from collections.abc import Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, field
from datetime import UTC, datetime
from itertools import chain, islice
from typing import TYPE_CHECKING, Any

from campaign.errors import Refused
from campaign.ledger import schema
from campaign.ledger.bulk import Cells, insert, key_of, lines, stated
from campaign.ledger.fields import clean_text

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

    from campaign.ledger.database import Database

Row = dict[str, Any]

FIRST = "0" * 64  # what the first entry carries as the hash of the one before it
_encode = json.JSONEncoder(
    ensure_ascii=False, sort_keys=True, separators=(",", ":"), allow_nan=False
).encode


def canonical(content: object) -> str:
    """Return the one text form in which content is stored and hashed."""
    return _encode(content)


def digest(texts: Iterable[str]) -> str:
    """Return the SHA-256 of text lines, each ended by a line feed (UTF-8)."""
    state = hashlib.sha256()
    rest = iter(texts)
    while block := list(islice(rest, 5000)):
        state.update(("\n".join(block) + "\n").encode())
    return state.hexdigest()


def made_line(table: str, row: Mapping[str, Any]) -> str:
    """Return the canonical text of a row as its entry made it."""
    stated = {k: v for k, v in row.items() if v is not None and k != "ended_by"}
    return _encode([table, stated])


def ended_line(table: str, key: Sequence[Any]) -> str:
    """Return the canonical text that says which row an entry ended."""
    return _encode([table, *key])


def entry_hash(entry: Mapping[str, Any]) -> str:
    """Return the hash of a journal entry over all its texts and the hash before it."""
    names = ("previous", "id", "at", "who", "action", "subject", "before", "after", "reason")
    return hashlib.sha256(canonical([entry[name] for name in names]).encode()).hexdigest()


def keys(table: Table) -> tuple[str, ...]:
    """Return the primary key columns of a table, in order."""
    return tuple(column.name for column in table.primary_key.columns)


def user_name(given: str | None = None) -> str:
    """Return who is writing: as given, else CAMPAIGN_USER, else the account's name.

    Raises Refused for a name that cannot be shown.
    """
    stated = given or os.environ.get("CAMPAIGN_USER")
    if stated:
        return clean_text(stated, "name")
    try:
        return clean_text(getpass.getuser(), "name")
    except (OSError, KeyError, Refused):
        return "unknown"


def now() -> str:
    """Return this instant in the fixed-width UTC form (microseconds)."""
    return datetime.now(UTC).strftime("%Y-%m-%dT%H:%M:%S.%fZ")


@dataclass
class Entry:
    """One journal entry while it is being put together: rows are collected, not yet written."""

    action: str
    subject: str
    before: Row = field(default_factory=dict)
    after: Row = field(default_factory=dict)
    made: dict[str, list[Row]] = field(default_factory=dict)
    many: dict[str, list[Cells]] = field(default_factory=dict)
    ended: dict[str, list[tuple[Any, ...]]] = field(default_factory=dict)
    always: bool = False  # written even though it makes and ends no row

    def end(self, table: Table, row: Mapping[str, Any]) -> None:
        """Mark a stored row as ended by this entry."""
        key = tuple(row[name] for name in keys(table))
        self.ended.setdefault(table.name, []).append(key)

    def __bool__(self) -> bool:
        return self.always or bool(self.made or self.many or self.ended)


@dataclass
class Pen:
    """The one writer of a transaction: numbers rows and keeps the entries in order."""

    connection: Connection
    entries: list[Entry] = field(default_factory=list)
    _next: dict[str, int] = field(default_factory=dict)

    def entry(self, action: str, subject: str) -> Entry:
        """Begin another journal entry; one that stays empty is never written."""
        entry = Entry(action, subject)
        self.entries.append(entry)
        return entry

    def next_id(self, table: Table) -> int:
        """Return the next free id of a table; safe because the writer holds the lock."""
        if table.name not in self._next:
            from sqlalchemy import func, select

            top = self.connection.execute(select(func.max(table.c.id))).scalar()
            self._next[table.name] = (top or 0) + 1
        number = self._next[table.name]
        self._next[table.name] = number + 1
        return number

    def give_back(self, table: Table, number: int) -> None:
        """Return the number taken last, unused."""
        if self._next.get(table.name) == number + 1:
            self._next[table.name] = number

    def make(self, entry: Entry, table: Table, row: Mapping[str, Any]) -> Row:
        """Add a row to an entry, numbering it where its table numbers rows."""
        made = dict(row)
        if "id" in table.c and made.get("id") is None:
            made["id"] = self.next_id(table)
        if "record" in table.c and made.get("record") is None:
            made["record"] = made["id"]
        entry.made.setdefault(table.name, []).append(made)
        return made

    def add(self, entry: Entry, table: Table, cells: Cells) -> None:
        """Add a row that is numbered already: its cells in the order of `bulk.stated`."""
        self.rows(entry, table).append(cells)

    def rows(self, entry: Entry, table: Table) -> list[Cells]:
        """Return the rows that `add` fills, for tables of which an entry makes very many."""
        found = entry.many.get(table.name)
        if found is None:
            found = entry.many[table.name] = []
        return found


@contextmanager
def writing(
    database: Database, *, who: str | None = None, reason: str | None = None, dry_run: bool = False
) -> Iterator[Pen]:
    """Yield the pen under the write lock; write its entries, rows and digests at the end.

    Nothing is written when the body raises, when it makes and ends nothing, or on `dry_run`.
    """
    name = user_name(who)
    reason = clean_text(reason, "reason") if reason else None
    with database.writing() as connection:
        pen = Pen(connection)
        yield pen
        if dry_run:
            return
        for entry in pen.entries:
            if entry:
                _write(connection, entry, name, reason)


def read_head(connection: Connection) -> tuple[int, str] | None:
    """Return (number, hash) of the latest entry, or None in an empty journal."""
    from sqlalchemy import select

    table = schema.journal
    row = connection.execute(
        select(table.c.id, table.c.hash).order_by(table.c.id.desc()).limit(1)
    ).first()
    return None if row is None else (int(row[0]), str(row[1]))


def _write(connection: Connection, entry: Entry, who: str, reason: str | None) -> None:
    head = read_head(connection)
    number = head[0] + 1 if head else 1
    made = _complete(entry)
    record = {
        "id": number,
        "at": now(),
        "who": who,
        "action": entry.action,
        "subject": entry.subject,
        "before": canonical({**entry.before, **ended_summary(entry.ended)}),
        "after": canonical({**entry.after, **made_summary(made, number)}),
        "reason": reason,
        "previous": head[1] if head else FIRST,
    }
    record["hash"] = entry_hash(record)
    connection.execute(schema.journal.insert(), record)
    for table in reversed(schema.JOURNALLED):
        end_rows(connection, table, entry.ended.get(table.name, []), number)
    for table in schema.JOURNALLED:
        rows = made.get(table.name)
        if rows:
            insert(connection, table, rows, number)


def _complete(entry: Entry) -> dict[str, list[Cells]]:
    """Return the rows of an entry, all their columns filled in, sorted by their key."""
    made: dict[str, list[Cells]] = {}
    for table in schema.JOURNALLED:
        names = stated(table)
        rows = [tuple(map(row.get, names)) for row in entry.made.get(table.name, ())]
        rows += entry.many.get(table.name, ())
        if rows:
            rows.sort(key=key_of(table))
            made[table.name] = rows
    return made


def end_rows(
    connection: Connection, table: Table, found: Sequence[tuple[Any, ...]], number: int
) -> None:
    """Let journal entry `number` end the rows with the keys found."""
    from sqlalchemy import bindparam, update

    if not found:
        return
    names = keys(table)
    statement = update(table).values(ended_by=number)
    for name in names:
        statement = statement.where(table.c[name] == bindparam(f"key_{name}"))
    connection.execute(
        statement,
        [{f"key_{name}": part for name, part in zip(names, key, strict=True)} for key in found],
    )


def made_summary(made: Mapping[str, Sequence[Cells]], number: int) -> Row:
    """Return the counts and the digest of the rows an entry made ({} when none).

    made: by table, rows sorted by their key; number: of the entry.
    """
    if not made:
        return {}
    texts = chain.from_iterable(
        lines(table, made[table.name], number) for table in schema.JOURNALLED if table.name in made
    )
    counts = {name: len(rows) for name, rows in sorted(made.items())}
    return {"made": counts, "made_digest": digest(texts)}


def ended_summary(ended: Mapping[str, Sequence[tuple[Any, ...]]]) -> Row:
    """Return the counts and the digest of the rows an entry ended ({} when none)."""
    if not any(ended.values()):
        return {}
    lines = [
        ended_line(table.name, key)
        for table in schema.JOURNALLED
        for key in sorted(ended.get(table.name, ()))
    ]
    counts = {name: len(rows) for name, rows in sorted(ended.items()) if rows}
    return {"ended": counts, "ended_digest": digest(lines)}
