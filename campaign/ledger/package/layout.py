"""Which tables a package holds, and what each of their fields means."""

from __future__ import annotations

from typing import Any

from sqlalchemy import Integer, Table, Text

from campaign.ledger import schema

FORMAT = "campaign ledger"
VERSION = 1
DESCRIPTOR = "datapackage.json"

# In the order they are entered again; a part names the record of its owner.
TABLES: tuple[Table, ...] = tuple(
    table for table in schema.JOURNALLED if table.name != "imported_file"
)

TITLES = {
    "setting": "Settings of the campaign",
    "criterion": "Thresholds that decisions use, where they differ from the defaults",
    "cost": "Bench hours, where they differ from the defaults",
    "species": "Salts, solvents and additives the campaign added to the shipped table",
    "electrolyte_component": "Components of each electrolyte, in canonical order",
    "electrolyte": "Electrolytes by canonical recipe",
    "electrolyte_property": "Properties of electrolytes at temperatures",
    "electrode": "Electrodes: batches of one active material in one form",
    "plateau": "Declared two-phase plateaus of electrodes",
    "cell": "Cells: one assembly of an electrode and an electrolyte",
    "measurement": "Measurements: one impedance spectrum each",
    "fit": "Current fits of the measurements",
    "fitted_value": "Fitted values of the current fits",
}

_UNITS = {
    "_ohm_cm2": "ohm cm2", "_cm2_s": "cm2/s", "_g_cm3": "g/cm3", "_cm2": "cm2", "_cm": "cm",
    "_mV": "mV", "_V": "V", "_K": "K", "_C": "degree Celsius", "_Hz": "Hz",
}  # fmt: skip

_MEANINGS = {
    "record": "number the thing keeps through all its amendments",
    "ion": "insertion ion",
    "charge": "charge number of the insertion ion",
    "measured_at": "instant of the spectrum, UTC",
    "measured_offset": "offset of the clock it was noted with, minutes east of UTC",
    "assembled_at": "instant of assembly, UTC",
    "assembled_offset": "offset of the clock it was noted with, minutes east of UTC",
    "fitted_at": "instant of the fit, UTC",
    "fitted_offset": "offset of the clock it was noted with, minutes east of UTC",
    "potential_V": "potential against the cell's reference electrode, in V; empty: symmetric cell",
    "temperature_K": "temperature in K",
    "area_cm2": "geometric area in cm2",
    "ion_content": "ion content of the host, 0 to 1",
    "E_half_V": "potential of half filling against the cell's reference, in V",
    "rest_h": "rest before the spectrum, in h",
    "hours": "bench hours of one person, in h",
    "value": "value in the unit its name or quantity has; empty: looked for and absent",
    "se": "standard error, in the unit of the value",
    "quantity": "R_el, R_sl, R_ct, R_lat in ohm as fitted; Q_* in S s^n; n_* without unit; "
    "sigma_w in ohm s^-1/2",
    "chi2": "reduced chi-square of the fit",
    "circuit": "circuit as free text",
    "key": "canonical recipe",
    "written": "recipe as it was first written",
    "amount": "amount in the unit of its basis",
    "donor_number": "Gutmann donor number in kcal/mol",
    "molar_mass": "molar mass in g/mol",
    "permittivity": "relative permittivity",
    "spectrum_sha256": "SHA-256 of the spectrum file",
    "porosity": "pore fraction, 0 to 1",
}


def columns(table: Table) -> list[str]:
    """Return the columns of a table that a package holds."""
    return [c.name for c in table.columns if c.name not in ("id", "entry", "ended_by")]


def owner(table: Table) -> tuple[str, str] | None:
    """Return the table a part belongs to and the column that names it, or None."""
    for name, parts in schema.PARTS.items():
        for part, column in parts:
            if part is table:
                return name, column
    return None


def fields(table: Table) -> list[dict[str, Any]]:
    """Return the fields of a table as its schema states them."""
    return [_field(table, name) for name in columns(table)]


def _field(table: Table, name: str) -> dict[str, Any]:
    column = table.columns[name]
    found: dict[str, Any] = {"name": name}
    if name.endswith("_at"):
        found |= {"type": "datetime", "format": "%Y-%m-%dT%H:%M:%S.%fZ"}
    elif isinstance(column.type, Integer):
        found["type"] = "integer"
    else:
        found["type"] = "string" if isinstance(column.type, Text) else "number"
    meaning = _MEANINGS.get(name) or _link_text(table, name) or _plain(name)
    found["description"] = meaning
    unit = next((unit for end, unit in _UNITS.items() if name.endswith(end)), None)
    if unit is not None:
        found["unit"] = unit
    return found


def _plain(name: str) -> str:
    unit = next((end for end in _UNITS if name.endswith(end)), "")
    words = name.removesuffix(unit).replace("_", " ")
    return f"{words}, in {_UNITS[unit]}" if unit else words


def _link_text(table: Table, name: str) -> str | None:
    target = links(table).get(name)
    return None if target is None else f"record number of the {target}"


def links(table: Table) -> dict[str, str]:
    """Return the columns that name a record of another table, with that table."""
    found = {}
    for name in columns(table):
        for key in table.columns[name].foreign_keys:
            target = key.column.table.name
            if target not in ("journal", "quantity", table.name):
                found[name] = target
    return found


def schema_of(table: Table) -> dict[str, Any]:
    """Return the Table Schema of a table."""
    found: dict[str, Any] = {"fields": fields(table), "missingValues": [""]}
    own = [name for name in columns(table) if table.columns[name].primary_key]
    found["primaryKey"] = own or ["record"]
    keys = [
        {"fields": [name], "reference": {"resource": target, "fields": ["record"]}}
        for name, target in links(table).items()
    ]
    if keys:
        found["foreignKeys"] = keys
    return found
