"""The tables as the program reads and writes them (SQLAlchemy Core).

The rules that keep them true (checks, triggers, partial indices) are made by the
migrations and live in the database; a test compares the two column by column.

Every table but the journal and the list of quantities holds rows that are never changed:
`entry` is the journal entry that made the row and `ended_by`, set once, the one that ended
it. `record` is the number a thing keeps through all its amendments: the id of its first
row. Parts (plateaus, components, fitted values) belong to one row of their owner and end
with it.
"""

from __future__ import annotations

from sqlalchemy import Column, Double, ForeignKey, Integer, MetaData, Table, Text
from sqlalchemy.types import REAL, TypeEngine

metadata = MetaData()

Real: TypeEngine[float] = Double().with_variant(REAL(), "sqlite")


def _number(*names: str) -> list[Column[float]]:
    return [Column(name, Real) for name in names]


def _text(*names: str) -> list[Column[str]]:
    return [Column(name, Text) for name in names]


def _life() -> list[Column[int]]:
    return [
        Column("entry", Integer, ForeignKey("journal.id"), nullable=False),
        Column("ended_by", Integer, ForeignKey("journal.id")),
    ]


def _identity(table: str) -> list[Column[int]]:
    return [
        Column("id", Integer, primary_key=True, autoincrement=False),
        Column("record", Integer, ForeignKey(f"{table}.id"), nullable=False),
    ]


def _link(name: str, target: str, *, key: bool = False, nullable: bool = False) -> Column[int]:
    return Column(
        name,
        Integer,
        ForeignKey(f"{target}.id"),
        primary_key=key,
        nullable=nullable,
        autoincrement=False,
    )


journal = Table(
    "journal",
    metadata,
    Column("id", Integer, primary_key=True, autoincrement=False),
    *_text("at", "who", "action", "subject", "before", "after", "reason", "previous", "hash"),
)

imported_file = Table(
    "imported_file",
    metadata,
    Column("id", Integer, primary_key=True, autoincrement=False),
    *_text("name", "sha256"),
    Column("row_count", Integer),
    *_life(),
)

setting = Table(
    "setting", metadata, *_identity("setting"), *_text("name", "value"), *_life()
)

criterion = Table(
    "criterion", metadata, *_identity("criterion"), *_text("name"), *_number("value"), *_life()
)

cost = Table("cost", metadata, *_identity("cost"), *_text("name"), *_number("hours"), *_life())

species = Table(
    "species",
    metadata,
    *_identity("species"),
    *_text("name", "classes", "formula", "cation"),
    Column("cations", Integer),
    *_number("molar_mass", "donor_number", "permittivity", "flash_point_C"),
    *_text("caution", "source"),
    *_life(),
)

electrolyte = Table(
    "electrolyte",
    metadata,
    *_identity("electrolyte"),
    *_text("key", "written", "salt_key", "solvent_key", "additive_key", "basis"),
    Column("aqueous", Integer),
    *_number("density_g_cm3", "minimum_temperature_K", "maximum_temperature_K"),
    *_text("note"),
    *_life(),
)

electrolyte_component = Table(
    "electrolyte_component",
    metadata,
    _link("electrolyte", "electrolyte", key=True),
    Column("position", Integer, primary_key=True, autoincrement=False),
    *_text("role", "species"),
    *_number("amount"),
    *_text("basis"),
    *_life(),
)

electrolyte_property = Table(
    "electrolyte_property",
    metadata,
    _link("electrolyte", "electrolyte", key=True),
    Column("property", Text, primary_key=True),
    Column("temperature_K", Real, primary_key=True),
    *_number("value"),
    *_life(),
)

electrode = Table(
    "electrode",
    metadata,
    *_identity("electrode"),
    *_text("label", "material", "ion"),
    Column("charge", Integer),
    *_text("form"),
    *_number("diffusion_length_cm", "diffusivity_cm2_s", "porosity", "pore_resistance_ohm_cm2"),
    _link("pore_electrolyte", "electrolyte", nullable=True),
    *_number("pore_temperature_K", "window_low_V", "window_high_V"),
    *_text("window_reference"),
    *_number("maximum_temperature_K"),
    *_text("note"),
    *_life(),
)

plateau = Table(
    "plateau",
    metadata,
    _link("electrode", "electrode", key=True),
    Column("low_V", Real, primary_key=True),
    *_number("high_V"),
    *_text("reference"),
    *_life(),
)

cell = Table(
    "cell",
    metadata,
    *_identity("cell"),
    *_text("label"),
    _link("electrode", "electrode"),
    _link("electrolyte", "electrolyte"),
    *_text("specimen"),
    *_number("area_cm2"),
    *_text("configuration", "reference", "assembled_at"),
    Column("assembled_offset", Integer),
    *_text("operator", "note"),
    *_life(),
)

measurement = Table(
    "measurement",
    metadata,
    *_identity("measurement"),
    _link("cell", "cell"),
    *_text("measured_at"),
    Column("measured_offset", Integer),
    *_number("potential_V", "temperature_K", "ion_content", "E_half_V"),
    Column("cycle", Integer),
    *_text("direction"),
    *_number("rest_h", "amplitude_mV", "f_min_Hz", "f_max_Hz"),
    *_text("operator", "instrument", "spectrum", "spectrum_sha256", "note"),
    *_life(),
)

fit = Table(
    "fit",
    metadata,
    *_identity("fit"),
    _link("measurement", "measurement"),
    *_text("fitted_at"),
    Column("fitted_offset", Integer),
    *_text("fitted_by", "circuit", "weighting"),
    *_number("chi2"),
    *_life(),
)

quantity = Table("quantity", metadata, Column("name", Text, primary_key=True), *_text("unit"))

fitted_value = Table(
    "fitted_value",
    metadata,
    _link("fit", "fit", key=True),
    Column("quantity", Text, ForeignKey("quantity.name"), primary_key=True),
    *_number("value", "se"),
    *_life(),
)

# In the order rows are inserted. Components come before their electrolyte so that the
# database can check the whole blend when the electrolyte row arrives.
JOURNALLED: tuple[Table, ...] = (
    imported_file,
    setting,
    criterion,
    cost,
    species,
    electrolyte_component,
    electrolyte,
    electrolyte_property,
    electrode,
    plateau,
    cell,
    measurement,
    fit,
    fitted_value,
)

# Parts and the column that names their owner's row.
PARTS: dict[str, tuple[tuple[Table, str], ...]] = {
    "electrolyte": ((electrolyte_component, "electrolyte"), (electrolyte_property, "electrolyte")),
    "electrode": ((plateau, "electrode"),),
    "fit": ((fitted_value, "fit"),),
}
