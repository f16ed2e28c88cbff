"""The tables as the program sees them are the tables the migrations make."""

import pytest
from sqlalchemy import Double, Float, Integer, Text, inspect

from campaign.ledger import schema

KINDS = (Double, Integer, Text)
TABLES = sorted(schema.metadata.tables)


@pytest.fixture
def made(bench):
    """The database as SQLAlchemy finds it, with every table's columns, keys and links."""
    with bench.store.connected() as connection:
        yield inspect(connection)


def kind(column):
    return next(known for known in KINDS if isinstance(column.type, known))


def same_kind(found, stated):
    """REAL in SQLite is what DOUBLE PRECISION is elsewhere."""
    return isinstance(found, stated) or (stated is Double and isinstance(found, Float))


def test_no_table_is_missing_on_either_side(made):
    assert set(made.get_table_names()) - {"schema_revision"} == set(TABLES)


def test_columns_agree_in_name_order_type_and_key(made):
    for name, table in schema.metadata.tables.items():
        found = made.get_columns(name)
        assert [c["name"] for c in found] == [column.name for column in table.c], name
        for column, own in zip(found, table.c, strict=True):
            assert same_kind(column["type"], kind(own)), (name, own.name, column["type"])
        key = set(made.get_pk_constraint(name)["constrained_columns"])
        assert key == {c.name for c in table.primary_key}, name


def test_numbers_have_double_precision_on_a_server_and_are_real_in_a_file(bench):
    sound = "double precision" if bench.store.kind == "postgresql" else "REAL"
    query = {
        "sqlite": "SELECT type FROM pragma_table_info('fitted_value') WHERE name = 'value'",
        "postgresql": "SELECT data_type FROM information_schema.columns WHERE table_schema = "
        "current_schema() AND table_name = 'fitted_value' AND column_name = 'value'",
    }
    assert bench.ask(query[bench.store.kind]) == [(sound,)]


def test_links_agree(made):
    for name, table in schema.metadata.tables.items():
        found = {
            (own, key["referred_table"], other)
            for key in made.get_foreign_keys(name)
            for own, other in zip(key["constrained_columns"], key["referred_columns"], strict=True)
        }
        stated = {
            (key.parent.name, key.column.table.name, key.column.name)
            for key in table.foreign_keys
        }
        assert found == stated, name


def test_what_the_program_always_fills_may_not_be_empty(made):
    for name, table in schema.metadata.tables.items():
        key = made.get_pk_constraint(name)["constrained_columns"]
        required = {c["name"] for c in made.get_columns(name) if not c["nullable"]} | set(key)
        assert {c.name for c in table.c if not c.nullable} <= required, name


def test_rows_are_inserted_after_what_they_link_to():
    order = [table.name for table in schema.JOURNALLED]
    deferred = {("electrolyte_component", "electrolyte")}
    for table in schema.JOURNALLED:
        for key in table.foreign_keys:
            target = key.column.table.name
            if target in order and (table.name, target) not in deferred:
                assert order.index(target) <= order.index(table.name), (table.name, target)
