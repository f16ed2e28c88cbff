"""The tables as the program sees them are the tables the migrations make."""

import pytest
from sqlalchemy import Double, Integer, Text

from campaign.ledger import schema

KINDS = {Double: "REAL", Integer: "INTEGER", Text: "TEXT"}
TABLES = sorted(schema.metadata.tables)


def kind(column):
    return next(text for known, text in KINDS.items() if isinstance(column.type, known))


def test_no_table_is_missing_on_either_side(bench):
    made = {name for (name,) in bench.ask("SELECT name FROM sqlite_master WHERE type = 'table'")}
    assert made - {"schema_revision"} == set(TABLES)


@pytest.mark.parametrize("name", TABLES)
def test_columns_agree_in_name_order_type_and_key(bench, name):
    table = schema.metadata.tables[name]
    made = bench.ask(f"PRAGMA table_info({name})")
    assert [row[1] for row in made] == [column.name for column in table.c]
    assert [row[2] for row in made] == [kind(column) for column in table.c]
    assert {row[1] for row in made if row[5]} == {c.name for c in table.primary_key}


@pytest.mark.parametrize("name", TABLES)
def test_links_agree(bench, name):
    table = schema.metadata.tables[name]
    made = {(row[3], row[2], row[4]) for row in bench.ask(f"PRAGMA foreign_key_list({name})")}
    stated = {
        (key.parent.name, key.column.table.name, key.column.name) for key in table.foreign_keys
    }
    assert made == stated


@pytest.mark.parametrize("name", TABLES)
def test_what_the_program_always_fills_may_not_be_empty(bench, name):
    required = {row[1] for row in bench.ask(f"PRAGMA table_info({name})") if row[3] or row[5]}
    stated = {c.name for c in schema.metadata.tables[name].c if not c.nullable}
    assert stated <= required


def test_rows_are_inserted_after_what_they_link_to():
    order = [table.name for table in schema.JOURNALLED]
    deferred = {("electrolyte_component", "electrolyte")}
    for table in schema.JOURNALLED:
        for key in table.foreign_keys:
            target = key.column.table.name
            if target in order and (table.name, target) not in deferred:
                assert order.index(target) <= order.index(table.name), (table.name, target)
