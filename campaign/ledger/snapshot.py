"""The campaign as NumPy columns: what the trends are rebuilt from."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import datetime
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
    Plateau,
    Readings,
    Snapshot,
)
from campaign.ledger.selecting import measurements_query
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import Connection

EPOCH = datetime.fromisoformat("1970-01-01T00:00:00+00:00")


def snapshot(connection: Connection, wanted: Filter | None = None) -> Snapshot:
    """Return the measurements a filter keeps, with their current fits and what they refer to."""
    wanted = wanted or Filter()
    electrodes = electrode_facts(connection, wanted.as_of)
    electrolytes = electrolyte_facts(connection, wanted.as_of)
    rows = _measurement_rows(connection, wanted)
    readings = _readings(connection, wanted, rows, electrodes)
    return Snapshot(readings, electrodes, electrolytes, _left_out(connection, wanted, readings))


def _measurement_rows(connection: Connection, wanted: Filter) -> list[Any]:
    m, c, e, y = schema.measurement, schema.cell, schema.electrode, schema.electrolyte
    query = measurements_query(
        wanted,
        m.c.record, c.c.label, c.c.specimen, e.c.label, y.c.key, y.c.salt_key, y.c.solvent_key,
        y.c.additive_key, y.c.basis, y.c.aqueous, c.c.area_cm2, c.c.configuration,
        c.c.reference, m.c.potential_V, m.c.temperature_K, m.c.ion_content, m.c.E_half_V,
        m.c.measured_at, c.c.assembled_at, m.c.cycle, schema.fit.c.id,
        fitted=True,
    )  # fmt: skip
    return list(connection.execute(query.order_by(e.c.label, c.c.label, m.c.measured_at)))


def _readings(
    connection: Connection,
    wanted: Filter,
    rows: Sequence[Any],
    electrodes: Mapping[str, ElectrodeFacts],
) -> Readings:
    columns = list(zip(*rows, strict=True)) if rows else [()] * 21
    text = [_texts(columns[i]) for i in range(12)]
    fits = np.array(columns[20], dtype=np.int64)
    values, se, absent = _values(connection, wanted, fits)
    recipe_ion = list(zip(columns[4], columns[3], strict=True))
    return Readings(
        measurement=np.array(columns[0], dtype=np.int64),
        cell=text[1],
        specimen=text[2],
        electrode=text[3],
        electrolyte=text[4],
        salt=text[5],
        solvents=text[6],
        additives=text[7],
        concentration=_concentrations(connection, recipe_ion, electrodes),
        basis=text[8],
        aqueous=np.array(columns[9], dtype=bool),
        area_cm2=_numbers(columns[10]),
        configuration=text[11],
        reference=_texts(columns[12]),
        potential_V=_numbers(columns[13]),
        temperature_K=_numbers(columns[14]),
        ion_content=_numbers(columns[15]),
        E_half_V=_numbers(columns[16]),
        measured_at=_seconds(columns[17]),
        assembled_at=_seconds(columns[18]),
        cycle=_numbers(columns[19]),
        values=values,
        se=se,
        absent=absent,
    )


def _texts(column: Sequence[Any]) -> Any:
    array = np.empty(len(column), dtype=object)
    array[:] = ["" if value is None else value for value in column]
    return array


def _numbers(column: Sequence[Any]) -> FloatArray:
    return np.array([np.nan if value is None else value for value in column], dtype=np.float64)


def _seconds(column: Sequence[str | None]) -> FloatArray:
    known: dict[str | None, float] = {None: float("nan")}
    for text in column:
        if text not in known and text is not None:
            known[text] = (datetime.fromisoformat(text) - EPOCH).total_seconds()
    return np.array([known[text] for text in column], dtype=np.float64)


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
    connection: Connection, wanted: Filter, fits: Any
) -> tuple[dict[str, FloatArray], dict[str, FloatArray], dict[str, BoolArray]]:
    n = len(fits)
    values = {name: np.full(n, np.nan) for name in QUANTITIES}
    errors = {name: np.full(n, np.nan) for name in QUANTITIES}
    absent = {name: np.zeros(n, dtype=bool) for name in QUANTITIES}
    table, fit = schema.fitted_value, schema.fit
    query = (
        select(table.c.fit, table.c.quantity, table.c.value, table.c.se)
        .select_from(table.join(fit, fit.c.id == table.c.fit))
        .where(in_force(fit, wanted.as_of))
    )
    found = connection.execute(query).all() if n else []
    if not found:
        return values, errors, absent
    fit_id, name, value, se = zip(*found, strict=True)
    order = np.argsort(fits, kind="stable")
    at = np.searchsorted(fits, np.array(fit_id, dtype=np.int64), sorter=order)
    at = order[np.minimum(at, n - 1)]
    kept = fits[at] == np.array(fit_id, dtype=np.int64)
    names, numbers, scatter = np.array(name, dtype=object), _numbers(value), _numbers(se)
    for quantity in QUANTITIES:
        mask = kept & (names == quantity)
        values[quantity][at[mask]] = numbers[mask]
        errors[quantity][at[mask]] = scatter[mask]
        absent[quantity][at[mask]] = np.isnan(numbers[mask])
    return values, errors, absent


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
    recipes = {
        record: key
        for record, key in connection.execute(
            select(y.c.record, y.c.key).where(in_force(y, as_of))
        )
    }
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
