"""The campaign as NumPy columns: what the trends are rebuilt from."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
from sqlalchemy import func, select

from campaign.ledger import schema
from campaign.ledger.filters import Filter
from campaign.ledger.readings import (
    QUANTITIES,
    BoolArray,
    ElectrodeFacts,
    ElectrolyteFacts,
    FloatArray,
    IntArray,
    Plateau,
    Readings,
    Snapshot,
)
from campaign.ledger.selecting import cells_query, measurements_query
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import Connection, Select

def snapshot(connection: Connection, wanted: Filter | None = None) -> Snapshot:
    """Return the measurements a filter keeps, with their current fits and what they refer to."""
    wanted = wanted or Filter()
    electrodes = electrode_facts(connection, wanted.as_of)
    electrolytes = electrolyte_facts(connection, wanted.as_of)
    readings = _readings(connection, wanted, electrodes)
    return Snapshot(readings, electrodes, electrolytes, _left_out(connection, wanted, readings))


def columns(
    connection: Connection, query: Select[Any], block: int = 500
) -> Iterator[list[tuple[Any, ...]]]:
    """Yield the rows of a query in blocks, each turned into columns.

    The driver's own rows are read: a campaign has a million values, and each object that is
    put around a row costs more than the row. Numbers and texts need no conversion.
    """
    cursor = connection.execute(query).cursor
    while rows := cursor.fetchmany(block):
        yield list(zip(*rows, strict=True))


def _cells(connection: Connection, wanted: Filter) -> list[tuple[Any, ...]]:
    """Return the columns of the cells a filter keeps, sorted by electrode and label."""
    c, e, y = schema.cell, schema.electrode, schema.electrolyte
    query = cells_query(
        wanted,
        e.c.label, c.c.label, c.c.record, c.c.specimen, y.c.key, y.c.salt_key, y.c.solvent_key,
        y.c.additive_key, y.c.basis, y.c.aqueous, c.c.area_cm2, c.c.configuration,
        c.c.reference, c.c.assembled_at,
    )  # fmt: skip
    rows = sorted((tuple(row) for row in connection.execute(query)), key=lambda row: row[:3])
    return list(zip(*rows, strict=True)) if rows else [()] * 14


def _measurements(connection: Connection, wanted: Filter) -> list[Any]:
    """Return the columns of the measurements a filter keeps, as arrays; texts as instants."""
    m = schema.measurement
    query = measurements_query(
        wanted,
        m.c.record, schema.cell.c.record, schema.fit.c.id, m.c.measured_at, m.c.potential_V,
        m.c.temperature_K, m.c.ion_content, m.c.E_half_V, m.c.cycle,
        fitted=True,
    )  # fmt: skip
    kinds = (*(np.int64,) * 3, None, *(np.float64,) * 5)
    blocks = [
        [
            _seconds(column) if kind is None else np.array(column, dtype=kind)
            for column, kind in zip(found, kinds, strict=True)
        ]
        for found in columns(connection, query)
    ]
    if not blocks:
        return [np.zeros(0, dtype=kind or np.float64) for kind in kinds]
    return [np.concatenate(parts) for parts in zip(*blocks, strict=True)]


def _readings(
    connection: Connection, wanted: Filter, electrodes: Mapping[str, ElectrodeFacts]
) -> Readings:
    cells = _cells(connection, wanted)
    records = np.array(cells[2], dtype=np.int64)
    found = _measurements(connection, wanted)
    by_record = np.argsort(records)
    owner = by_record[np.searchsorted(records, found[1], sorter=by_record)]
    order = np.lexsort((found[3], owner))
    measurement, _, fits, measured_at, potential, temperature, content, half, cycle = (
        column[order] for column in found
    )
    owner = owner[order]
    values, se, absent = _values(connection, wanted, fits)

    def texts(column: int) -> Any:
        return _texts(cells[column])[owner]

    recipe_ion = list(zip(cells[4], cells[0], strict=True))
    return Readings(
        measurement=measurement,
        cell=texts(1),
        specimen=texts(3),
        electrode=texts(0),
        electrolyte=texts(4),
        salt=texts(5),
        solvents=texts(6),
        additives=texts(7),
        concentration=_concentrations(connection, recipe_ion, electrodes)[owner],
        basis=texts(8),
        aqueous=np.array(cells[9], dtype=bool)[owner],
        area_cm2=np.array(cells[10], dtype=np.float64)[owner],
        configuration=texts(11),
        reference=texts(12),
        potential_V=potential,
        temperature_K=temperature,
        ion_content=content,
        E_half_V=half,
        measured_at=measured_at,
        assembled_at=_seconds(cells[13])[owner],
        cycle=cycle,
        values=values,
        se=se,
        absent=absent,
    )


def _texts(column: Sequence[Any]) -> Any:
    array = np.empty(len(column), dtype=object)
    array[:] = ["" if value is None else value for value in column]
    return array


def _seconds(column: Sequence[str | None]) -> FloatArray:
    """Return stored instants (fixed-width UTC texts) in seconds since 1970, NaN for None."""
    texts = ["NaT" if text is None else text[:26] for text in column]
    at = np.array(texts, dtype="datetime64[us]")
    seconds = at.astype(np.int64) / 1e6
    return np.where(np.isnat(at), np.nan, seconds)


def _concentrations(
    connection: Connection,
    recipe_ion: Sequence[tuple[str, str]],
    electrodes: Mapping[str, ElectrodeFacts],
) -> FloatArray:
    """Return the concentration of each electrode's own ion in each recipe."""
    from campaign.chemistry.concentrations import ion_concentration
    from campaign.chemistry.recipes import parse_recipe
    from campaign.ledger.book import stored_species

    species = stored_species(connection)
    found: dict[tuple[str, str], float] = {}
    for recipe, electrode in set(recipe_ion):
        amount = ion_concentration(
            parse_recipe(recipe, species), electrodes[electrode].ion, species
        )
        found[recipe, electrode] = float("nan") if amount is None else amount
    return np.array([found[pair] for pair in recipe_ion], dtype=np.float64)


def _values(
    connection: Connection, wanted: Filter, fits: IntArray
) -> tuple[dict[str, FloatArray], dict[str, FloatArray], dict[str, BoolArray]]:
    """Return the fitted values of `fits` by quantity, each array as long as `fits`."""
    n, code_of = len(fits), {name: code for code, name in enumerate(QUANTITIES)}
    values = np.full((len(QUANTITIES), n), np.nan)
    errors = np.full((len(QUANTITIES), n), np.nan)
    absent = np.zeros((len(QUANTITIES), n), dtype=bool)
    table, fit = schema.fitted_value, schema.fit
    query = (
        select(table.c.fit, table.c.quantity, table.c.value, table.c.se)
        .select_from(table.join(fit, fit.c.id == table.c.fit))
        .where(in_force(fit, wanted.as_of))
    )
    order = np.argsort(fits, kind="stable")
    in_order = fits[order]
    for owners, names, numbers, scatter in columns(connection, query) if n else ():
        owner = np.array(owners, dtype=np.int64)
        place = np.minimum(np.searchsorted(in_order, owner), n - 1)
        kept = in_order[place] == owner
        at = order[place[kept]]
        code = np.array([code_of[name] for name in names], dtype=np.int64)[kept]
        value = np.array(numbers, dtype=np.float64)[kept]
        values[code, at] = value
        errors[code, at] = np.array(scatter, dtype=np.float64)[kept]
        absent[code, at] = np.isnan(value)
    return (
        {name: values[code] for name, code in code_of.items()},
        {name: errors[code] for name, code in code_of.items()},
        {name: absent[code] for name, code in code_of.items()},
    )


def _left_out(connection: Connection, wanted: Filter, readings: Readings) -> dict[str, int]:
    """Count what is stored and not looked at: withdrawn, or without a current fit."""
    m = schema.measurement
    records = select(func.count(func.distinct(m.c.record)))
    if wanted.as_of is not None:
        records = records.where(m.c.entry <= wanted.as_of)
    every = connection.execute(records).scalar() or 0
    standing = (
        connection.execute(
            select(func.count()).select_from(m).where(in_force(m, wanted.as_of))
        ).scalar()
        or 0
    )
    kept = connection.execute(
        measurements_query(wanted, func.count())
    ).scalar() or 0
    counts = {"withdrawn": every - standing, "no current fit": kept - len(readings)}
    return {reason: count for reason, count in counts.items() if count}


def electrode_facts(connection: Connection, as_of: int | None = None) -> dict[str, ElectrodeFacts]:
    """Return what is recorded of every electrode in force, by label."""
    e, y, p = schema.electrode, schema.electrolyte, schema.plateau
    rows = connection.execute(select(y.c.record, y.c.key).where(in_force(y, as_of)))
    recipes = {int(record): str(key) for record, key in rows}
    plateaus: dict[int, list[Plateau]] = {}
    for owner, low, high, reference in connection.execute(
        select(p.c.electrode, p.c.low_V, p.c.high_V, p.c.reference).order_by(p.c.low_V)
    ):
        plateaus.setdefault(owner, []).append(Plateau(low, high, reference))
    return {
        row["label"]: ElectrodeFacts(
            label=row["label"],
            material=row["material"] or "",
            ion=row["ion"],
            charge=row["charge"],
            form=row["form"] or "",
            diffusion_length_cm=row["diffusion_length_cm"],
            diffusivity_cm2_s=row["diffusivity_cm2_s"],
            porosity=row["porosity"],
            pore_resistance_ohm_cm2=row["pore_resistance_ohm_cm2"],
            pore_electrolyte=recipes.get(row["pore_electrolyte"]),
            pore_temperature_K=row["pore_temperature_K"],
            window_low_V=row["window_low_V"],
            window_high_V=row["window_high_V"],
            window_reference=row["window_reference"] or "",
            maximum_temperature_K=row["maximum_temperature_K"],
            plateaus=tuple(plateaus.get(row["id"], ())),
        )
        for row in connection.execute(select(e).where(in_force(e, as_of))).mappings()
    }


def electrolyte_facts(
    connection: Connection, as_of: int | None = None
) -> dict[str, ElectrolyteFacts]:
    """Return what is recorded of every electrolyte in force, by canonical recipe."""
    y, p = schema.electrolyte, schema.electrolyte_property
    tables: dict[tuple[int, str], list[tuple[float, float]]] = {}
    for owner, name, temperature, value in connection.execute(
        select(p.c.electrolyte, p.c.property, p.c.temperature_K, p.c.value).order_by(
            p.c.temperature_K
        )
    ):
        tables.setdefault((owner, name), []).append((temperature, value))
    return {
        row["key"]: ElectrolyteFacts(
            recipe=row["key"],
            density_g_cm3=row["density_g_cm3"],
            conductivity=tuple(tables.get((row["id"], "conductivity_S_cm"), ())),
            activity=tuple(tables.get((row["id"], "activity_coefficient"), ())),
            minimum_temperature_K=row["minimum_temperature_K"],
            maximum_temperature_K=row["maximum_temperature_K"],
        )
        for row in connection.execute(select(y).where(in_force(y, as_of))).mappings()
    }
