"""Rows by the thousand: the text that is digested is the text of each row."""

from __future__ import annotations

import gc
import string

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sqlalchemy import Double, Integer

from campaign.ledger import schema
from campaign.ledger.bulk import ROWS_A_STATEMENT, key_of, lines, many_objects, stated
from campaign.ledger.journal import keys, made_line

TEXTS = st.text(string.printable + "µΩ±é\u2028😀\\\"%{}", max_size=8)
REALS = st.floats(allow_nan=False, allow_infinity=False)


def _cells(table) -> st.SearchStrategy:
    def cell(column):
        if isinstance(column.type, Double):
            return st.none() | REALS
        return st.none() | (st.integers(0, 2**60) if isinstance(column.type, Integer) else TEXTS)

    return st.tuples(*(cell(table.c[name]) for name in stated(table)))


def _one_by_one(table, rows, entry: int) -> list[str]:
    named = [dict(zip(stated(table), row, strict=True)) for row in rows]
    return [made_line(table.name, {**row, "entry": entry}) for row in named]


@pytest.mark.parametrize("table", schema.JOURNALLED, ids=lambda table: table.name)
def test_lines_by_columns_are_the_lines_of_single_rows(table) -> None:
    @settings(max_examples=40, deadline=None)
    @given(st.lists(_cells(table), max_size=12), st.integers(1, 2**31))
    def check(rows, entry) -> None:
        assert list(lines(table, rows, entry)) == _one_by_one(table, rows, entry)

    check()


def test_a_whole_number_in_a_column_of_reals_is_written_as_it_is_read_back() -> None:
    assert list(lines(schema.fitted_value, [(1, "R_ct", 40, 2)], 3)) == [
        '["fitted_value",{"entry":3,"fit":1,"quantity":"R_ct","se":2.0,"value":40.0}]'
    ]


def test_lines_do_not_depend_on_where_blocks_end() -> None:
    rows = [(n, "R_ct", 1.0 + n, None if n % 3 else 0.1) for n in range(12_000)]
    assert list(lines(schema.fitted_value, rows, 2)) == _one_by_one(schema.fitted_value, rows, 2)


@pytest.mark.parametrize("table", schema.JOURNALLED, ids=lambda table: table.name)
def test_rows_are_sorted_by_the_primary_key(table) -> None:
    names = stated(table)
    row = tuple(range(len(names)))
    expected = tuple(names.index(name) for name in keys(table))
    assert key_of(table)(row) == (expected if len(expected) > 1 else expected[0])


def test_the_search_for_cycles_goes_on_afterwards() -> None:
    assert gc.isenabled()
    with pytest.raises(RuntimeError), many_objects():
        assert not gc.isenabled()
        raise RuntimeError
    assert gc.isenabled()


def test_a_statement_stays_below_the_limit_on_parameters() -> None:
    widest = max(len(stated(table)) + 1 for table in schema.JOURNALLED)
    assert ROWS_A_STATEMENT * widest < 32_766  # SQLITE_MAX_VARIABLE_NUMBER since SQLite 3.32
