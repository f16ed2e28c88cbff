"""The ledger: journal, records, parts, and the rules the database keeps by itself."""

from __future__ import annotations

import sqlalchemy as sa
from alembic import op
from ledger_rules import (
    POSTGRES_FUNCTIONS,
    POSTGRES_JOURNAL,
    SQLITE_JOURNAL,
    Ledgered,
    finite,
    finite_above,
    instant,
    postgres_rules,
    quote,
    said,
    sqlite_rules,
    within,
)

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None

REAL = sa.Double().with_variant(sa.types.REAL(), "sqlite")
# Bytewise order on a server, whatever its locale: as in SQLite, and as the digests are taken.
TEXT = sa.Text().with_variant(sa.Text(collation="C"), "postgresql")
KELVIN = "-273.15"

QUANTITIES = {
    "R_el": "ohm",
    "R_sl": "ohm",
    "Q_sl": "S s^n",
    "n_sl": "1",
    "R_ct": "ohm",
    "Q_ct": "S s^n",
    "n_ct": "1",
    "R_lat": "ohm",
    "Q_lat": "S s^n",
    "n_lat": "1",
    "sigma_w": "ohm s^-1/2",
}


def _real(name: str, *checks: str, required: bool = False) -> list[sa.schema.SchemaItem]:
    column = sa.Column(name, REAL, nullable=not required)
    return [column, *(sa.CheckConstraint(check) for check in checks)]


def _text(name: str, *checks: str, required: bool = False) -> list[sa.schema.SchemaItem]:
    column = sa.Column(name, TEXT, nullable=not required)
    return [column, *(sa.CheckConstraint(check) for check in (said(name), *checks))]


def _integer(name: str, *checks: str, required: bool = False) -> list[sa.schema.SchemaItem]:
    column = sa.Column(name, sa.Integer, nullable=not required)
    return [column, *(sa.CheckConstraint(check) for check in checks)]


def _id() -> list[sa.schema.SchemaItem]:
    return [
        sa.Column("id", sa.Integer, primary_key=True, autoincrement=False),
        sa.CheckConstraint("id >= 1"),
    ]


def _identity(table: str) -> list[sa.schema.SchemaItem]:
    return [
        *_id(),
        sa.Column("record", sa.Integer, sa.ForeignKey(f"{table}.id"), nullable=False),
        sa.CheckConstraint("record <= id"),
    ]


def _life() -> list[sa.schema.SchemaItem]:
    return [
        sa.Column("entry", sa.Integer, sa.ForeignKey("journal.id"), nullable=False),
        sa.Column("ended_by", sa.Integer, sa.ForeignKey("journal.id")),
        sa.CheckConstraint("ended_by IS NULL OR ended_by > entry"),
    ]


def _link(
    name: str, target: str, *, required: bool = True, deferred: bool = False, key: bool = False
) -> list[sa.schema.SchemaItem]:
    foreign = (
        sa.ForeignKey(f"{target}.id", deferrable=True, initially="DEFERRED")
        if deferred
        else sa.ForeignKey(f"{target}.id")
    )
    column = sa.Column(
        name, sa.Integer, foreign, nullable=not required, primary_key=key, autoincrement=False
    )
    return [column]


def _create(name: str, *items: sa.schema.SchemaItem, rowid: bool = True) -> None:
    op.create_table(name, *items, sqlite_strict=True, sqlite_with_rowid=rowid)


def _journal() -> None:
    _create(
        "journal",
        *_id(),
        *_text("at", instant("at"), required=True),
        *_text("who", required=True),
        *_text("action", required=True),
        *_text("subject", required=True),
        *_text("before"),
        *_text("after"),
        *_text("reason"),
        sa.Column("previous", TEXT, nullable=False, unique=True),
        sa.Column("hash", TEXT, nullable=False, unique=True),
        sa.CheckConstraint("length(previous) = 64 AND length(hash) = 64"),
    )
    _create(
        "imported_file",
        *_id(),
        *_text("name", required=True),
        *_text("sha256", "length(sha256) = 64", required=True),
        *_integer("row_count", "row_count >= 0", required=True),
        *_life(),
    )


def _settings() -> None:
    _create(
        "setting",
        *_identity("setting"),
        *_text("name", required=True),
        *_text("value", required=True),
        *_life(),
    )
    _create(
        "criterion",
        *_identity("criterion"),
        *_text("name", required=True),
        *_real("value", finite_above("value", inclusive=True), required=True),
        *_life(),
    )
    _create(
        "cost",
        *_identity("cost"),
        *_text("name", required=True),
        *_real("hours", finite_above("hours", inclusive=True), required=True),
        *_life(),
    )
    _create(
        "species",
        *_identity("species"),
        *_text("name", required=True),
        *_text("classes", required=True),
        *_text("formula"),
        *_text("cation"),
        *_integer("cations", "cations >= 1"),
        *_real("molar_mass", finite_above("molar_mass")),
        *_real("donor_number", finite("donor_number")),
        *_real("permittivity", finite_above("permittivity")),
        *_real("flash_point_C", finite_above("flash_point_C", KELVIN)),
        *_text("caution"),
        *_text("source"),
        *_life(),
    )


def _electrolytes() -> None:
    _create(
        "electrolyte",
        *_identity("electrolyte"),
        *_text("key", required=True),
        *_text("written", required=True),
        *_text("salt_key", required=True),
        *_text("solvent_key", required=True),
        *_text("additive_key", required=True),
        *_text("basis", "basis IN ('mol/L', 'mol/kg')", required=True),
        *_integer("aqueous", "aqueous IN (0, 1)", required=True),
        *_real("density_g_cm3", finite_above("density_g_cm3")),
        *_real("minimum_temperature_K", finite_above("minimum_temperature_K")),
        *_real("maximum_temperature_K", finite_above("maximum_temperature_K")),
        *_text("note"),
        *_life(),
        sa.CheckConstraint(
            f"{quote('minimum_temperature_K')} < {quote('maximum_temperature_K')}"
        ),
    )
    _create(
        "electrolyte_component",
        *_link("electrolyte", "electrolyte", deferred=True, key=True),
        sa.Column("position", sa.Integer, primary_key=True, autoincrement=False),
        *_text("role", "role IN ('salt', 'solvent', 'additive')", required=True),
        *_text("species", required=True),
        *_real("amount", finite_above("amount"), required=True),
        *_text("basis", required=True),
        *_life(),
        sa.CheckConstraint("role <> 'solvent' OR amount <= 1"),
        rowid=False,
    )
    _create(
        "electrolyte_property",
        *_link("electrolyte", "electrolyte", key=True),
        sa.Column("property", TEXT, primary_key=True),
        sa.Column("temperature_K", REAL, primary_key=True),
        sa.CheckConstraint("property IN ('conductivity_S_cm', 'activity_coefficient')"),
        sa.CheckConstraint(finite_above("temperature_K")),
        *_real("value", finite_above("value"), required=True),
        *_life(),
        rowid=False,
    )


def _electrodes() -> None:
    _create(
        "electrode",
        *_identity("electrode"),
        *_text("label", required=True),
        *_text("material"),
        *_text("ion", required=True),
        *_integer("charge", "charge BETWEEN 1 AND 4", required=True),
        *_text("form"),
        *_real("diffusion_length_cm", finite_above("diffusion_length_cm")),
        *_real("diffusivity_cm2_s", finite_above("diffusivity_cm2_s")),
        *_real("porosity", finite_above("porosity"), "porosity < 1"),
        *_real("pore_resistance_ohm_cm2", finite_above("pore_resistance_ohm_cm2")),
        *_link("pore_electrolyte", "electrolyte", required=False),
        *_real("pore_temperature_K", finite_above("pore_temperature_K")),
        *_real("window_low_V", finite("window_low_V")),
        *_real("window_high_V", finite("window_high_V")),
        *_text("window_reference"),
        *_real("maximum_temperature_K", finite_above("maximum_temperature_K")),
        *_text("note"),
        *_life(),
        sa.CheckConstraint(f"{quote('window_low_V')} < {quote('window_high_V')}"),
        # A window without its potential scale means nothing.
        sa.CheckConstraint(
            f"({quote('window_low_V')} IS NULL AND {quote('window_high_V')} IS NULL) "
            "OR window_reference IS NOT NULL"
        ),
    )
    _create(
        "plateau",
        *_link("electrode", "electrode", key=True),
        sa.Column("low_V", REAL, primary_key=True),
        sa.CheckConstraint(finite("low_V")),
        *_real("high_V", finite("high_V"), required=True),
        *_text("reference", required=True),
        *_life(),
        sa.CheckConstraint(f"{quote('low_V')} < {quote('high_V')}"),
        rowid=False,
    )


def _cells() -> None:
    _create(
        "cell",
        *_identity("cell"),
        *_text("label", required=True),
        *_link("electrode", "electrode"),
        *_link("electrolyte", "electrolyte"),
        *_text("specimen", required=True),
        *_real("area_cm2", finite_above("area_cm2"), required=True),
        *_text(
            "configuration",
            "configuration IN ('three-electrode', 'two-electrode', 'symmetric')",
            required=True,
        ),
        *_text("reference"),
        *_text("assembled_at", instant("assembled_at")),
        *_integer("assembled_offset"),
        *_text("operator"),
        *_text("note"),
        *_life(),
    )
    _create(
        "measurement",
        *_identity("measurement"),
        *_link("cell", "cell"),
        *_text("measured_at", instant("measured_at"), required=True),
        *_integer("measured_offset", required=True),
        *_real("potential_V", finite("potential_V")),
        *_real("temperature_K", finite_above("temperature_K"), required=True),
        *_real("ion_content", within("ion_content", "0", "1")),
        *_real("E_half_V", finite("E_half_V")),
        *_integer("cycle", "cycle >= 0"),
        *_text("direction"),
        *_real("rest_h", finite_above("rest_h", inclusive=True)),
        *_real("amplitude_mV", finite_above("amplitude_mV")),
        *_real("f_min_Hz", finite_above("f_min_Hz")),
        *_real("f_max_Hz", finite_above("f_max_Hz")),
        *_text("operator"),
        *_text("instrument"),
        *_text("spectrum"),
        *_text("spectrum_sha256", "length(spectrum_sha256) = 64"),
        *_text("note"),
        *_life(),
        sa.CheckConstraint(f"{quote('f_min_Hz')} < {quote('f_max_Hz')}"),
    )


def _fits() -> None:
    _create(
        "fit",
        *_identity("fit"),
        *_link("measurement", "measurement"),
        *_text("fitted_at", instant("fitted_at")),
        *_integer("fitted_offset"),
        *_text("fitted_by"),
        *_text("circuit"),
        *_text("weighting"),
        *_real("chi2", finite_above("chi2", inclusive=True)),
        *_life(),
    )
    _create(
        "quantity",
        sa.Column("name", TEXT, primary_key=True),
        *_text("unit", required=True),
    )
    op.bulk_insert(
        sa.table("quantity", sa.column("name"), sa.column("unit")),
        [{"name": name, "unit": unit} for name, unit in QUANTITIES.items()],
    )
    _create(
        "fitted_value",
        *_link("fit", "fit", key=True),
        sa.Column("quantity", TEXT, sa.ForeignKey("quantity.name"), primary_key=True),
        # An empty value means: the arc was looked for and is not there.
        *_real("value", finite_above("value")),
        *_real("se", finite_above("se"), "se IS NULL OR value IS NOT NULL"),
        *_life(),
        sa.CheckConstraint("value IS NOT NULL OR quantity IN ('R_sl', 'R_lat')"),
        sa.CheckConstraint("substr(quantity, 1, 2) <> 'n_' OR value <= 1"),
        rowid=False,
    )


LIFE = ("entry",)
LEDGERED = (
    Ledgered("imported_file", ("id", "name", "sha256", "row_count", *LIFE), identity=False),
    Ledgered("setting", ("id", "record", "name", "value", *LIFE), True, unique=[("name",)]),
    Ledgered("criterion", ("id", "record", "name", "value", *LIFE), True, unique=[("name",)]),
    Ledgered("cost", ("id", "record", "name", "hours", *LIFE), True, unique=[("name",)]),
    Ledgered(
        "species",
        ("id", "record", "name", "classes", "formula", "cation", "cations", "molar_mass",
         "donor_number", "permittivity", "flash_point_C", "caution", "source", *LIFE),
        True,
        unique=[("name",)],
    ),
    Ledgered(
        "electrolyte",
        ("id", "record", "key", "written", "salt_key", "solvent_key", "additive_key", "basis",
         "aqueous", "density_g_cm3", "minimum_temperature_K", "maximum_temperature_K", "note",
         *LIFE),
        True,
        unique=[("key",)],
    ),
    Ledgered(
        "electrolyte_component",
        ("electrolyte", "position", "role", "species", "amount", "basis", *LIFE),
        False,
        key=("electrolyte", "position"),
    ),
    Ledgered(
        "electrolyte_property",
        ("electrolyte", "property", "temperature_K", "value", *LIFE),
        False,
        key=("electrolyte", "property", "temperature_K"),
    ),
    Ledgered(
        "electrode",
        ("id", "record", "label", "material", "ion", "charge", "form", "diffusion_length_cm",
         "diffusivity_cm2_s", "porosity", "pore_resistance_ohm_cm2", "pore_electrolyte",
         "pore_temperature_K", "window_low_V", "window_high_V", "window_reference",
         "maximum_temperature_K", "note", *LIFE),
        True,
        unique=[("label",)],
        links=[("pore_electrolyte", "electrolyte")],
    ),
    Ledgered(
        "plateau",
        ("electrode", "low_V", "high_V", "reference", *LIFE),
        False,
        key=("electrode", "low_V"),
    ),
    Ledgered(
        "cell",
        ("id", "record", "label", "electrode", "electrolyte", "specimen", "area_cm2",
         "configuration", "reference", "assembled_at", "assembled_offset", "operator", "note",
         *LIFE),
        True,
        unique=[("label",)],
        links=[("electrode", "electrode"), ("electrolyte", "electrolyte")],
    ),
    Ledgered(
        "measurement",
        ("id", "record", "cell", "measured_at", "measured_offset", "potential_V",
         "temperature_K", "ion_content", "E_half_V", "cycle", "direction", "rest_h",
         "amplitude_mV", "f_min_Hz", "f_max_Hz", "operator", "instrument", "spectrum",
         "spectrum_sha256", "note", *LIFE),
        True,
        unique=[("cell", "measured_at")],
        links=[("cell", "cell")],
    ),
    Ledgered(
        "fit",
        ("id", "record", "measurement", "fitted_at", "fitted_offset", "fitted_by", "circuit",
         "weighting", "chi2", *LIFE),
        True,
        unique=[("measurement",)],
        links=[("measurement", "measurement")],
    ),
    Ledgered(
        "fitted_value",
        ("fit", "quantity", "value", "se", *LIFE),
        False,
        key=("fit", "quantity"),
    ),
)  # fmt: skip

# Rules that concern one table only: (name, table, when it is refused, message).
SPECIAL = (
    (
        "electrolyte_blend_whole",
        "electrolyte",
        "abs((SELECT coalesce(sum(amount), 0) FROM electrolyte_component "
        "WHERE electrolyte = NEW.id AND role = 'solvent') - 1) > 1e-9",
        "electrolyte: the fractions of the solvents sum to 1",
    ),
    (
        "electrolyte_salt_stated",
        "electrolyte",
        "NOT EXISTS (SELECT 1 FROM electrolyte_component "
        "WHERE electrolyte = NEW.id AND role = 'salt')",
        "electrolyte: a recipe names at least one salt",
    ),
    (
        "electrolyte_component_first",
        "electrolyte_component",
        "EXISTS (SELECT 1 FROM electrolyte WHERE id = NEW.electrolyte)",
        "electrolyte_component: a recipe that stands takes no more components",
    ),
    (
        "electrolyte_property_with_row",
        "electrolyte_property",
        "NOT EXISTS (SELECT 1 FROM electrolyte WHERE id = NEW.electrolyte "
        "AND entry = NEW.entry)",
        "electrolyte_property: it is made with its electrolyte row",
    ),
    (
        "plateau_with_row",
        "plateau",
        "NOT EXISTS (SELECT 1 FROM electrode WHERE id = NEW.electrode AND entry = NEW.entry)",
        "plateau: it is made with its electrode row",
    ),
    (
        "fitted_value_with_row",
        "fitted_value",
        "NOT EXISTS (SELECT 1 FROM fit WHERE id = NEW.fit AND entry = NEW.entry)",
        "fitted_value: it is made with its fit",
    ),
    (
        "cell_specimen_of_one_electrode",
        "cell",
        "EXISTS (SELECT 1 FROM cell WHERE specimen = NEW.specimen AND ended_by IS NULL "
        "AND record <> NEW.record AND electrode <> NEW.electrode)",
        "cell: a specimen belongs to one electrode",
    ),
    (
        "measurement_potential_stated",
        "measurement",
        f"NEW.{quote('potential_V')} IS NULL AND NOT EXISTS (SELECT 1 FROM cell "
        "WHERE record = NEW.cell AND ended_by IS NULL AND configuration = 'symmetric')",
        "measurement: only a symmetric cell may leave its potential empty",
    ),
)


def _sqlite() -> None:
    connection = op.get_bind()
    for statement in SQLITE_JOURNAL:
        connection.exec_driver_sql(statement)
    for table in LEDGERED:
        for statement in sqlite_rules(table):
            connection.exec_driver_sql(statement)
    for name, table, when, message in SPECIAL:
        connection.exec_driver_sql(
            f"CREATE TRIGGER {name} BEFORE INSERT ON {table} BEGIN "
            f"SELECT RAISE(ABORT, '{message}') WHERE {when}; END"
        )
    for event in ("INSERT", "UPDATE", "DELETE"):
        connection.exec_driver_sql(
            f"CREATE TRIGGER quantity_fixed_{event.lower()} BEFORE {event} ON quantity BEGIN "
            "SELECT RAISE(ABORT, 'quantity: changed by migrations only'); END"
        )


def _postgres() -> None:
    connection = op.get_bind()
    for statement in (*POSTGRES_FUNCTIONS, *POSTGRES_JOURNAL):
        connection.exec_driver_sql(statement.replace("%", "%%"))
    for table in LEDGERED:
        for statement in postgres_rules(table):
            connection.exec_driver_sql(statement)
    for name, table, when, message in SPECIAL:
        connection.exec_driver_sql(
            f"CREATE FUNCTION {name}() RETURNS trigger LANGUAGE plpgsql AS $$ BEGIN "
            f"IF {when} THEN RAISE EXCEPTION '{message}'; END IF; RETURN NEW; END $$"
        )
        # Named so that it runs after the row's own links were checked.
        connection.exec_driver_sql(
            f"CREATE TRIGGER {table}_z_{name} BEFORE INSERT ON {table} FOR EACH ROW "
            f"EXECUTE FUNCTION {name}()"
        )
    connection.exec_driver_sql(
        "CREATE TRIGGER quantity_fixed BEFORE INSERT OR UPDATE OR DELETE ON quantity "
        "FOR EACH ROW EXECUTE FUNCTION campaign_refuse()"
    )


def upgrade() -> None:
    _journal()
    _settings()
    _electrolytes()
    _electrodes()
    _cells()
    _fits()
    for name, table, columns in (
        ("cell_by_electrode", "cell", ["electrode"]),
        ("cell_by_electrolyte", "cell", ["electrolyte"]),
        ("cell_by_specimen", "cell", ["specimen"]),
        ("fit_by_measurement", "fit", ["measurement"]),
        ("measurement_by_cell", "measurement", ["cell", "measured_at"]),
    ):
        op.create_index(name, table, columns)
    if op.get_bind().dialect.name == "sqlite":
        _sqlite()
    else:
        _postgres()


def downgrade() -> None:
    raise RuntimeError("a ledger is never downgraded; restore the backup made before the upgrade")
