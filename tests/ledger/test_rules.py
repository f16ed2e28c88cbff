"""Every rule the database keeps by itself, tried with raw SQL as a hand at a shell would.

Each rule is tried in SQLite and, where a server is named, in PostgreSQL. The rules are the
contract's (what is recorded, and what must hold); the program's own code is used only to build a
sound campaign first.
"""

import itertools
import re
import sqlite3

import pytest

from campaign.ledger.starting import start

COUNTER = itertools.count()
NOW = "2026-03-01T08:00:00.000000Z"


class Shell:
    """A raw connection of either driver: statements with ? marks, each committed by itself."""

    def __init__(self, store):
        self.kind = store.kind
        if self.kind == "sqlite":
            self.raw = sqlite3.connect(store.where, isolation_level=None)
            self.raw.execute("PRAGMA foreign_keys = ON")
            self.error = sqlite3.Error
        else:
            import psycopg

            self.raw = psycopg.connect(store.where.replace("+psycopg", ""), autocommit=True)
            self.error = psycopg.Error

    def execute(self, statement, values=()):
        if self.kind == "sqlite":
            return self.raw.execute(statement, values)
        marked = statement.replace("%", "%%").replace("?", "%s")
        return self.raw.execute(marked, list(values) or None)

    @property
    def in_transaction(self):
        if self.kind == "sqlite":
            return self.raw.in_transaction
        return self.raw.info.transaction_status.name != "IDLE"

    def columns(self, table):
        return [d[0] for d in self.execute(f"SELECT * FROM {table}").description]


# What each store says of one and the same rule.
SAID = {
    "only one row in force": "unique constraint",
    "cannot store TEXT": "invalid input syntax",
}


def pattern(connection, match):
    """What the refusal must say, in the words of the store."""
    if match is not None and connection.kind == "postgresql":
        match = SAID.get(match, match)
    return None if match is None else re.compile(match, re.IGNORECASE)


@pytest.fixture
def ledger(empty_store):
    """A campaign with one of everything, opened as a SQL shell would."""
    start(empty_store.where)
    connection = Shell(empty_store)
    entry(connection)
    # Components wait for their electrolyte until the end of the transaction.
    connection.execute("BEGIN")
    component(connection, 0, "salt", "NaPF6", 1.0, "mol/L")
    component(connection, 1, "solvent", "EC", 0.5, "v/v")
    component(connection, 2, "solvent", "DMC", 0.5, "v/v")
    insert(connection, "electrolyte", ELECTROLYTE)
    insert(connection, "electrode", ELECTRODE)
    insert(connection, "cell", CELL)
    insert(connection, "measurement", MEASUREMENT)
    insert(connection, "fit", FIT)
    insert(connection, "fitted_value", VALUE)
    connection.execute("COMMIT")
    yield connection
    connection.raw.close()


@pytest.fixture
def ledger_file(tmp_path, store_of):
    """An empty campaign in a SQLite file, opened as a SQL shell would."""
    start(str(tmp_path / "campaign.sqlite"))
    connection = Shell(store_of(tmp_path / "campaign.sqlite"))
    yield connection
    connection.raw.close()


ELECTROLYTE = {
    "id": 1, "record": 1, "key": "1 mol/L NaPF6 in DMC:EC (1:1 v/v)", "written": "x",
    "salt_key": "NaPF6", "solvent_key": "DMC:EC (1:1 v/v)", "additive_key": "none",
    "basis": "mol/L", "aqueous": 0,
}  # fmt: skip
ELECTRODE = {"id": 1, "record": 1, "label": "E", "ion": "Na", "charge": 1}
CELL = {
    "id": 1, "record": 1, "label": "C1", "electrode": 1, "electrolyte": 1, "specimen": "C1",
    "area_cm2": 1.0, "configuration": "three-electrode",
}  # fmt: skip
MEASUREMENT = {
    "id": 1, "record": 1, "cell": 1, "measured_at": NOW, "measured_offset": 0,
    "potential_V": 3.4, "temperature_K": 298.15,
}  # fmt: skip
FIT = {"id": 1, "record": 1, "measurement": 1}
VALUE = {"fit": 1, "quantity": "R_ct", "value": 41.2, "se": 0.8}


def entry(connection):
    """Append a journal entry as a forger would: numbered and chained, with a made-up hash."""
    number, previous = connection.execute(
        "SELECT id, hash FROM journal ORDER BY id DESC LIMIT 1"
    ).fetchone()
    connection.execute(
        "INSERT INTO journal VALUES (?, ?, 'me', 'log', 'x', NULL, NULL, NULL, ?, ?)",
        (number + 1, NOW, previous, f"{next(COUNTER):064x}"),
    )
    return number + 1


def latest(connection):
    return connection.execute("SELECT max(id) FROM journal").fetchone()[0]


def insert(connection, table, row, verb="INSERT"):
    row = {"entry": latest(connection), **row}
    names = ", ".join(f'"{name}"' for name in row)
    marks = ", ".join("?" for _ in row)
    connection.execute(f'{verb} INTO "{table}" ({names}) VALUES ({marks})', list(row.values()))


def component(connection, position, role, species, amount, basis, electrolyte=1):
    row = (electrolyte, position, role, species, amount, basis, latest(connection))
    connection.execute(
        "INSERT INTO electrolyte_component (electrolyte, position, role, species, amount, basis,"
        " entry) VALUES (?, ?, ?, ?, ?, ?, ?)",
        row,
    )


def refused(connection, statement, values=(), match=None):
    with pytest.raises(connection.error, match=pattern(connection, match)):
        connection.execute(statement, values)
        if connection.in_transaction:
            connection.execute("COMMIT")
    if connection.in_transaction:
        connection.execute("ROLLBACK")


def refuses(connection, table, row, match=None, verb="INSERT"):
    with pytest.raises(connection.error, match=pattern(connection, match)):
        insert(connection, table, row, verb)


def upserts(connection, table, row, action):
    """What PostgreSQL has in place of INSERT OR REPLACE: refused, or without effect."""
    key = {"fitted_value": "fit, quantity"}.get(table, "id")
    row = {"entry": latest(connection), **row}
    names = ", ".join(f'"{name}"' for name in row)
    marks = ", ".join("?" for _ in row)
    sets = " SET " + ", ".join(f'"{n}" = excluded."{n}"' for n in row)
    statement = f'INSERT INTO "{table}" ({names}) VALUES ({marks}) ON CONFLICT ({key}) '
    try:
        connection.execute(statement + action + (sets if "UPDATE" in action else ""), row.values())
    except connection.error:
        return


def second(base, **changes):
    return {**base, "id": 2, "record": 2, **changes}


TABLES = (
    "journal", "setting", "electrolyte", "electrolyte_component", "electrode", "cell",
    "measurement", "fit", "fitted_value", "quantity",
)  # fmt: skip


def test_a_sound_campaign_passes_its_own_rules(ledger):
    assert ledger.execute("SELECT count(*) FROM fitted_value").fetchone() == (1,)


@pytest.mark.parametrize("table", TABLES)
def test_nothing_is_deleted(ledger, table):
    refused(ledger, f"DELETE FROM {table}")
    assert ledger.execute(f"SELECT count(*) FROM {table}").fetchone()[0] > 0


@pytest.mark.parametrize("table", TABLES)
def test_every_column_refuses_an_update(ledger, table):
    columns = ledger.columns(table)
    assert len(columns) > 1
    for column in columns:
        if column != "ended_by":
            refused(ledger, f'UPDATE {table} SET "{column}" = 7')


def tables(connection):
    return [
        row[0]
        for row in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")
        if row[0] != "schema_revision"
    ]


def test_every_table_is_strict_and_numbers_are_real(ledger_file):
    ledger = ledger_file
    listed = {row[1]: row[5] for row in ledger.execute("PRAGMA table_list") if row[2] == "table"}
    for table in tables(ledger):
        assert listed[table] == 1, table
        kinds = {row[2] for row in ledger.execute(f"PRAGMA table_info({table})")}
        assert kinds <= {"REAL", "INTEGER", "TEXT"}, table


@pytest.mark.parametrize(
    ("table", "row"),
    [
        ("fitted_value", {**VALUE, "quantity": "R_el", "value": "41 ohm"}),
        ("fitted_value", {**VALUE, "quantity": "R_el", "se": "small"}),
        ("measurement", second(MEASUREMENT, measured_at=NOW.replace("08", "09"),
                               temperature_K="warm")),
        ("measurement", second(MEASUREMENT, measured_at=NOW.replace("08", "09"),
                               potential_V="3.4 V")),
        ("cell", second(CELL, label="C2", area_cm2="one")),
        ("electrode", second(ELECTRODE, label="F", charge="two")),
    ],
)  # fmt: skip
def test_text_is_no_number(ledger, table, row):
    refuses(ledger, table, row, match="cannot store TEXT")


BAD_VALUES = [0.0, -1.0, float("inf"), float("-inf")]


@pytest.mark.parametrize("value", BAD_VALUES)
@pytest.mark.parametrize("quantity", ["R_el", "R_sl", "Q_sl", "n_sl", "R_ct", "Q_ct", "sigma_w"])
def test_fitted_values_are_finite_and_positive(ledger, quantity, value):
    entry(ledger)
    insert(ledger, "measurement", second(MEASUREMENT, measured_at=NOW.replace("08", "09")))
    insert(ledger, "fit", second(FIT, measurement=2))
    refuses(ledger, "fitted_value", {"fit": 2, "quantity": quantity, "value": value}, "CHECK")


@pytest.mark.parametrize("se", BAD_VALUES)
def test_standard_errors_are_finite_and_positive(ledger, se):
    refuses(ledger, "fitted_value", {**VALUE, "quantity": "R_el", "se": se}, "CHECK")


def test_nan_becomes_null_and_null_means_absent_only_where_an_arc_may_be_absent(ledger):
    entry(ledger)
    insert(ledger, "measurement", second(MEASUREMENT, measured_at=NOW.replace("08", "09")))
    insert(ledger, "fit", second(FIT, measurement=2))
    for quantity in ("R_el", "R_ct", "sigma_w", "Q_sl", "n_ct"):
        row = {**VALUE, "fit": 2, "quantity": quantity, "value": float("nan"), "se": None}
        refuses(ledger, "fitted_value", row, "CHECK")
    for quantity in ("R_sl", "R_lat"):
        row = {"fit": 2, "quantity": quantity, "value": None, "se": None}
        insert(ledger, "fitted_value", row)


def test_an_absent_arc_has_no_standard_error(ledger):
    refuses(ledger, "fitted_value", {**VALUE, "quantity": "R_sl", "value": None}, "CHECK")


@pytest.mark.parametrize("n", [1.0000001, 2.0, 0.0, -0.5])
def test_exponents_lie_above_zero_and_up_to_one(ledger, n):
    refuses(ledger, "fitted_value", {**VALUE, "quantity": "n_ct", "value": n, "se": None}, "CHECK")


def test_an_exponent_of_one_is_allowed(ledger):
    insert(ledger, "fitted_value", {**VALUE, "quantity": "n_ct", "value": 1.0, "se": None})


def test_unknown_quantities_are_refused(ledger):
    refuses(ledger, "fitted_value", {**VALUE, "quantity": "R_other"}, "FOREIGN KEY")


@pytest.mark.parametrize("area", BAD_VALUES)
def test_areas_are_finite_and_positive(ledger, area):
    refuses(ledger, "cell", second(CELL, label="C2", specimen="C2", area_cm2=area), "CHECK")


@pytest.mark.parametrize("kelvin", BAD_VALUES)
def test_temperatures_are_above_absolute_zero(ledger, kelvin):
    row = second(MEASUREMENT, measured_at=NOW.replace("08", "09"), temperature_K=kelvin)
    refuses(ledger, "measurement", row, "CHECK")


@pytest.mark.parametrize("potential", [float("inf"), float("-inf")])
def test_potentials_are_finite(ledger, potential):
    row = second(MEASUREMENT, measured_at=NOW.replace("08", "09"), potential_V=potential)
    refuses(ledger, "measurement", row, "CHECK")


@pytest.mark.parametrize("content", [-0.01, 1.01])
def test_ion_contents_lie_between_zero_and_one(ledger, content):
    row = second(MEASUREMENT, measured_at=NOW.replace("08", "09"), ion_content=content)
    refuses(ledger, "measurement", row, "CHECK")


@pytest.mark.parametrize("instant", ["2026-03-01 08:00", "yesterday", "2026-03-01T08:00:00Z", ""])
def test_instants_have_the_one_form(ledger, instant):
    refuses(ledger, "measurement", second(MEASUREMENT, measured_at=instant), "CHECK")


def test_a_potential_may_be_empty_in_a_symmetric_cell_only(ledger):
    row = second(MEASUREMENT, measured_at=NOW.replace("08", "09"), potential_V=None)
    refuses(ledger, "measurement", row, "symmetric")
    entry(ledger)
    symmetric = second(CELL, label="C2", specimen="C2", configuration="symmetric")
    insert(ledger, "cell", symmetric)
    insert(ledger, "measurement", {**row, "cell": 2})


def test_configurations_are_the_three_known(ledger):
    row = second(CELL, label="C2", specimen="C2", configuration="four-electrode")
    refuses(ledger, "cell", row, "CHECK")


def test_a_second_current_fit_is_refused(ledger):
    refuses(ledger, "fit", second(FIT), "only one row in force")


def test_a_second_current_fit_is_refused_by_the_index_alone(ledger):
    on = " ON fit" if ledger.kind == "postgresql" else ""
    ledger.execute(f"DROP TRIGGER fit_made{on}")
    refuses(ledger, "fit", second(FIT), "UNIQUE")


def test_a_refit_is_allowed_once_the_fit_is_ended(ledger):
    number = entry(ledger)
    ledger.execute("UPDATE fit SET ended_by = ? WHERE id = 1", (number,))
    insert(ledger, "fit", second(FIT))
    count = ledger.execute("SELECT count(*) FROM fit WHERE ended_by IS NULL").fetchone()
    assert count == (1,)


@pytest.mark.parametrize(
    ("table", "row"),
    [
        ("electrode", second(ELECTRODE)),
        ("cell", second(CELL)),
        ("measurement", second(MEASUREMENT)),
        ("setting", {"id": 2, "record": 2, "name": "zone", "value": "UTC"}),
    ],
)
def test_labels_and_places_are_unique_in_force(ledger, table, row):
    refuses(ledger, table, row, "only one row in force")


@pytest.mark.parametrize(
    ("table", "row"),
    [
        ("electrode", ELECTRODE),
        ("cell", {**CELL, "label": "other"}),
        ("measurement", {**MEASUREMENT, "measured_at": NOW.replace("08", "09")}),
        ("fit", FIT),
        ("fitted_value", {**VALUE, "value": 1.0}),
        ("electrode", second(ELECTRODE)),
    ],
)
@pytest.mark.parametrize("verb", ["INSERT OR REPLACE", "REPLACE"])
def test_replace_does_not_get_round_the_rules(ledger, table, row, verb):
    before = ledger.execute(f"SELECT * FROM {table}").fetchall()
    if ledger.kind == "sqlite":
        refuses(ledger, table, row, verb=verb)
    else:
        upserts(ledger, table, row, "DO NOTHING" if verb == "REPLACE" else "DO UPDATE")
    assert ledger.execute(f"SELECT * FROM {table}").fetchall() == before


def test_a_row_is_ended_once_and_by_the_latest_entry(ledger):
    refused(ledger, "UPDATE cell SET ended_by = 1", match="append-only")
    refused(ledger, "UPDATE cell SET ended_by = entry", match="append-only")
    refused(ledger, "UPDATE cell SET ended_by = 99")
    number = entry(ledger)
    ledger.execute("UPDATE cell SET ended_by = ?", (number,))
    refused(ledger, "UPDATE cell SET ended_by = NULL", match="append-only")
    later = entry(ledger)
    refused(ledger, "UPDATE cell SET ended_by = ?", (later,), match="append-only")


def test_ending_a_row_changes_nothing_else(ledger):
    number = entry(ledger)
    refused(ledger, "UPDATE cell SET ended_by = ?, area_cm2 = 2.0", (number,), "append-only")


def test_rows_are_made_by_the_latest_entry_only(ledger):
    row = second(ELECTRODE, label="F", entry=1)
    refuses(ledger, "electrode", row, "latest journal entry")


def test_rows_are_not_born_ended(ledger):
    number = entry(ledger)
    refuses(ledger, "electrode", second(ELECTRODE, label="F", ended_by=number))


def test_records_stand_on_records_in_force(ledger):
    refuses(ledger, "cell", second(CELL, label="C2", specimen="C2", electrode=5), "not in force")
    refuses(ledger, "fit", second(FIT, measurement=9), "not in force")
    number = entry(ledger)
    ledger.execute("UPDATE cell SET ended_by = ?", (number,))
    row = second(MEASUREMENT, measured_at=NOW.replace("08", "09"))
    refuses(ledger, "measurement", row, "not in force")


def test_a_record_number_is_the_id_of_its_first_row(ledger):
    refuses(ledger, "electrode", {**ELECTRODE, "id": 2, "record": 7, "label": "F"})
    refuses(ledger, "electrode", {**ELECTRODE, "id": 7, "record": 3, "label": "F"}, "first row")


def test_a_specimen_belongs_to_one_electrode(ledger):
    entry(ledger)
    insert(ledger, "electrode", second(ELECTRODE, label="F"))
    row = second(CELL, label="C2", specimen="C1", electrode=2)
    refuses(ledger, "cell", row, "one electrode")


def test_values_are_made_with_their_fit(ledger):
    entry(ledger)
    refuses(ledger, "fitted_value", {**VALUE, "quantity": "R_el"}, "made with its fit")


def blend(connection, *fractions, salt=True):
    entry(connection)
    connection.execute("BEGIN")
    if salt:
        component(connection, 0, "salt", "NaPF6", 1.0, "mol/L", electrolyte=2)
    for place, fraction in enumerate(fractions, 1):
        component(connection, place, "solvent", f"S{place}", fraction, "v/v", electrolyte=2)
    insert(connection, "electrolyte", second(ELECTROLYTE, key="other"))
    connection.execute("COMMIT")


def test_blend_fractions_sum_to_one(ledger):
    blend(ledger, 0.3, 0.3, 0.4)
    assert ledger.execute("SELECT count(*) FROM electrolyte").fetchone() == (2,)


@pytest.mark.parametrize("fractions", [(0.5, 0.4), (0.5, 0.6), (1.0, 0.001), ()])
def test_other_sums_are_refused(ledger, fractions):
    with pytest.raises(ledger.error, match="sum to 1"):
        blend(ledger, *fractions)


def test_a_recipe_names_a_salt(ledger):
    with pytest.raises(ledger.error, match="at least one salt"):
        blend(ledger, 1.0, salt=False)


def test_a_standing_recipe_takes_no_more_components(ledger):
    with pytest.raises(ledger.error, match="no more components"):
        component(ledger, 3, "additive", "FEC", 2.0, "wt%")


def test_components_do_not_stand_without_their_electrolyte(ledger):
    entry(ledger)
    ledger.execute("BEGIN")
    component(ledger, 0, "salt", "NaPF6", 1.0, "mol/L", electrolyte=9)
    with pytest.raises(ledger.error, match=r"(?i)foreign key"):
        ledger.execute("COMMIT")


def test_the_journal_is_numbered_and_chained(ledger):
    latest_first = "SELECT id, hash FROM journal ORDER BY id DESC LIMIT 1"
    number, head = ledger.execute(latest_first).fetchone()
    row = (NOW, "me", "log", "x", None, None, None)
    insert_entry = "INSERT INTO journal VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?)"
    refused(ledger, insert_entry, (number + 2, *row, head, "a" * 64), "without a gap")
    refused(ledger, insert_entry, (number, *row, head, "a" * 64))
    refused(ledger, insert_entry, (number + 1, *row, "b" * 64, "a" * 64), "hash of the one before")
    refused(ledger, insert_entry, (number + 1, *row, head, "short"), "CHECK")


def test_windows_name_their_scale_and_are_in_order(ledger):
    row = second(ELECTRODE, label="F", window_low_V=2.0, window_high_V=4.0)
    refuses(ledger, "electrode", row, "CHECK")
    row |= {"window_reference": "Na/Na+", "window_low_V": 5.0}
    refuses(ledger, "electrode", row, "CHECK")


def test_criteria_and_costs_are_finite(ledger):
    for table, name in (("criterion", "value"), ("cost", "hours")):
        for number in (-1.0, float("inf")):
            refuses(ledger, table, {"id": 1, "record": 1, "name": "x", name: number}, "CHECK")
