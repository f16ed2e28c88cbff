"""Whether a database still keeps its own rules: the triggers and indices of the migrations."""

from __future__ import annotations

from typing import TYPE_CHECKING

from campaign.ledger import schema

if TYPE_CHECKING:
    from sqlalchemy import Connection


def missing(connection: Connection) -> list[str]:
    """Return the names of rules that are gone or no longer read as the migrations wrote them."""
    if connection.dialect.name == "sqlite":
        kept, stated = _in_file(connection), _as_migrated()
        return sorted(name for name, text in stated.items() if kept.get(name) != text)
    standing = _on_server(connection)
    return sorted(name for name in _expected_on_server() if name not in standing)


def _in_file(connection: Connection) -> dict[str, str]:
    query = "SELECT name, sql FROM sqlite_master WHERE type IN ('trigger', 'index')"
    return {name: sql for name, sql in connection.exec_driver_sql(query) if sql is not None}


def _as_migrated() -> dict[str, str]:
    """Return the rules of a database made this moment, in memory."""
    from sqlalchemy import create_engine

    from campaign.ledger.migrating import migrate

    engine = create_engine("sqlite://")
    with engine.connect() as fresh:
        migrate(fresh)
        return _in_file(fresh)


def _on_server(connection: Connection) -> set[str]:
    """Return the triggers that are switched on and the indices that are sound."""
    triggers = connection.exec_driver_sql(
        "SELECT t.tgname FROM pg_trigger t JOIN pg_class c ON c.oid = t.tgrelid "
        "JOIN pg_namespace n ON n.oid = c.relnamespace "
        "WHERE n.nspname = current_schema() AND NOT t.tgisinternal AND t.tgenabled IN ('O', 'A')"
    )
    indices = connection.exec_driver_sql(
        "SELECT c.relname FROM pg_index i JOIN pg_class c ON c.oid = i.indexrelid "
        "JOIN pg_namespace n ON n.oid = c.relnamespace "
        "WHERE n.nspname = current_schema() AND i.indisvalid"
    )
    return {row[0] for row in (*triggers, *indices)}


def _expected_on_server() -> set[str]:
    names = {"journal_chained", "journal_kept", "journal_never_emptied", "quantity_fixed"}
    for table in schema.JOURNALLED:
        events = ("made", "kept", "never_deleted", "never_emptied")
        names |= {f"{table.name}_{event}" for event in events}
        if "record" in table.c:
            names |= {f"{table.name}_record", f"{table.name}_one_record"}
    # Indices are named alike in both stores.
    indices = {name for name, text in _as_migrated().items() if "INDEX" in text.split("(")[0]}
    return names | indices | _special()


def _special() -> set[str]:
    return {
        "electrolyte_z_electrolyte_blend_whole",
        "electrolyte_z_electrolyte_salt_stated",
        "electrolyte_component_z_electrolyte_component_first",
        "electrolyte_property_z_electrolyte_property_with_row",
        "plateau_z_plateau_with_row",
        "fitted_value_z_fitted_value_with_row",
        "cell_z_cell_specimen_of_one_electrode",
        "measurement_z_measurement_potential_stated",
        "cell_linked_electrode",
        "cell_linked_electrolyte",
        "measurement_linked_cell",
        "fit_linked_measurement",
        "electrode_linked_pore_electrolyte",
    }
