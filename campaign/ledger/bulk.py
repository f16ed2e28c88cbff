"""Many rows at once: their canonical text by columns, and their insertion in large statements.

A row is a tuple here, in the order of `stated(table)`; its `entry` is given for all. The text
of a row is the one `journal.made_line` gives; it is put together column by column, because a
table of measurements makes a million rows at a time.
"""

from __future__ import annotations

import gc
import json
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import contextmanager
from functools import lru_cache
from itertools import chain
from operator import itemgetter
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

Cells = tuple[Any, ...]

BLOCK = 5000  # rows whose text is put together at once
# A statement that may be refused by a trigger keeps what it would have to undo; one for many
# rows does that once. 500 rows of the widest table stay below SQLite's limit on parameters.
ROWS_A_STATEMENT = 500

_text = json.JSONEncoder(ensure_ascii=False).encode


@contextmanager
def many_objects() -> Iterator[None]:
    """Let very many objects be made without a search for cycles every few thousand of them.

    Rows and cells hold no cycles; the search would look at all of them again and again.
    """
    was_on = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_on:
            gc.enable()


@lru_cache(maxsize=64)
def stated(table: Table) -> tuple[str, ...]:
    """Return the columns a new row fills, in the table's order, without `entry`."""
    return tuple(column.name for column in table.c if column.name not in ("entry", "ended_by"))


@lru_cache(maxsize=64)
def key_of(table: Table) -> Callable[[Cells], Any]:
    """Return what sorts the rows of a table by its primary key."""
    names = stated(table)
    return itemgetter(*(names.index(column.name) for column in table.primary_key.columns))


@lru_cache(maxsize=64)
def _writers(table: Table) -> dict[str, Callable[[Cells], Iterable[str]]]:
    """Return what writes the filled cells of each column as canonical text."""
    from sqlalchemy import Double, Integer

    kinds = {name: table.c[name].type for name in stated(table)}
    return {
        name: _reals
        if isinstance(kind, Double)
        else _integers
        if isinstance(kind, Integer)
        else _texts
        for name, kind in kinds.items()
    }


def _reals(cells: Cells) -> Iterable[str]:
    return map(float.__repr__, map(float, cells))


def _integers(cells: Cells) -> Iterable[str]:
    return map(int.__repr__, cells)


def _texts(cells: Cells) -> Iterable[str]:
    known = {text: _text(text) for text in set(cells)}
    return map(known.__getitem__, cells)


def lines(table: Table, rows: Sequence[Cells], entry: int) -> Iterator[str]:
    """Return the canonical texts of rows, in their order."""
    starts = range(0, len(rows), BLOCK)
    return chain.from_iterable(
        _block(table, rows[start : start + BLOCK], entry) for start in starts
    )


def _block(table: Table, rows: Sequence[Cells], entry: int) -> Iterator[str]:
    names = stated(table)
    columns = dict(zip(names, zip(*rows, strict=True), strict=True))
    writers = _writers(table)
    pieces = [f"[{_text(table.name)},{{"]
    parts: list[Iterable[str]] = []
    begun = False  # the entry, which every row has, has been written: commas come before
    for name in sorted((*names, "entry")):
        if name == "entry":
            pieces[-1] += f'"entry":{entry}'
            begun = True
            continue
        column, write = columns[name], writers[name]
        label = f"{_text(name)}:"
        empty = column.count(None)
        if empty == len(column):
            continue
        if empty == 0:
            pieces[-1] += ("," if begun else "") + label
            pieces.append("" if begun else ",")
            parts.append(write(column))
            continue
        before, after = ("," + label, "") if begun else (label, ",")
        parts.append(_with_gaps(column, write, before, after))
        pieces.append("")
    pieces[-1] += "}]"
    if not parts:
        return iter([pieces[0]] * len(rows))
    template = "%s".join(piece.replace("%", "%%") for piece in pieces)
    return map(template.__mod__, zip(*parts, strict=True))


def _with_gaps(
    column: Cells, write: Callable[[Cells], Iterable[str]], before: str, after: str
) -> list[str]:
    """Return the text of each filled cell between two others, and nothing for an empty one."""
    filled = iter(write(tuple([cell for cell in column if cell is not None])))
    return ["" if cell is None else f"{before}{next(filled)}{after}" for cell in column]


def insert(connection: Connection, table: Table, rows: Sequence[Cells], entry: int) -> None:
    """Insert rows of an entry; what a rule refuses is raised as the database reports it."""
    names = stated(table)
    if connection.dialect.name != "sqlite":
        many = [{**dict(zip(names, row, strict=True)), "entry": entry} for row in rows]
        connection.execute(table.insert(), many)
        return
    columns = ",".join(f'"{name}"' for name in (*names, "entry"))
    one = f"({'?,' * len(names)}{int(entry)})"
    begin = f'INSERT INTO "{table.name}" ({columns}) VALUES '
    whole = len(rows) - len(rows) % ROWS_A_STATEMENT
    if whole:
        statement = begin + ",".join([one] * ROWS_A_STATEMENT)
        for start in range(0, whole, ROWS_A_STATEMENT):
            block = rows[start : start + ROWS_A_STATEMENT]
            connection.exec_driver_sql(statement, tuple(chain.from_iterable(block)))
    if whole < len(rows):
        connection.exec_driver_sql(begin + one, list(rows[whole:]))
