"""Reading the campaign: lists for people, and the snapshot the trends are rebuilt from.

A record in force is found by its record number; `as_of` goes back to any journal entry.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from sqlalchemy import and_, func, select

from campaign.ledger import schema
from campaign.ledger.fields import ZERO_C
from campaign.ledger.filters import Filter
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import ColumnElement, Connection, FromClause, Select

Row = dict[str, Any]


def entry_at(connection: Connection, utc: str) -> int:
    """Return the number of the last journal entry made up to an instant (0: none yet)."""
    table = schema.journal
    found = connection.execute(select(func.max(table.c.id)).where(table.c.at <= utc)).scalar()
    return int(found or 0)


def _cells_joined(as_of: int | None) -> FromClause:
    cell, electrode, electrolyte = schema.cell, schema.electrode, schema.electrolyte
    return cell.join(
        electrode,
        and_(electrode.c.record == cell.c.electrode, in_force(electrode, as_of)),
    ).join(
        electrolyte,
        and_(electrolyte.c.record == cell.c.electrolyte, in_force(electrolyte, as_of)),
    )


def _cell_conditions(wanted: Filter) -> list[ColumnElement[bool]]:
    electrolyte = schema.electrolyte
    conditions = [in_force(schema.cell, wanted.as_of)]
    for value, column in (
        (wanted.electrode, schema.electrode.c.label),
        (wanted.salt, electrolyte.c.salt_key),
        (wanted.solvents, electrolyte.c.solvent_key),
        (wanted.additives, electrolyte.c.additive_key),
    ):
        if value is not None:
            conditions.append(column == value)
    return conditions


def _measurement_conditions(wanted: Filter) -> list[ColumnElement[bool]]:
    table = schema.measurement
    conditions = [in_force(table, wanted.as_of)]
    if wanted.potential is not None:
        conditions.append(table.c.potential_V.between(wanted.potential.low, wanted.potential.high))
    if wanted.temperature is not None:
        # A hair of tolerance: 25 degC stored as 298.15 K must be inside 25:25.
        conditions.append(
            table.c.temperature_K.between(
                wanted.temperature.low + ZERO_C - 1e-9, wanted.temperature.high + ZERO_C + 1e-9
            )
        )
    if wanted.since is not None:
        conditions.append(table.c.measured_at >= wanted.since)
    if wanted.until is not None:
        conditions.append(table.c.measured_at <= wanted.until)
    return conditions


def asks_for_measurements(wanted: Filter) -> bool:
    """Return whether a filter looks at measurements, not only at cells."""
    asked = (wanted.potential, wanted.temperature, wanted.since, wanted.until)
    return any(value is not None for value in asked)


def cells_query(wanted: Filter, *columns: Any) -> Select[Any]:
    """Return a query over the cells in force that a filter keeps, whatever was measured."""
    return (
        select(*columns)
        .select_from(_cells_joined(wanted.as_of))
        .where(*_cell_conditions(wanted))
    )


def measurements_query(wanted: Filter, *columns: Any, fitted: bool = False) -> Select[Any]:
    """Return a query over the measurements in force that a filter keeps.

    fitted: only those with a current fit, whose columns may then be asked for.
    """
    measurement, cell, fit = schema.measurement, schema.cell, schema.fit
    joined = _cells_joined(wanted.as_of).join(measurement, measurement.c.cell == cell.c.record)
    if fitted:
        joined = joined.join(
            fit, and_(fit.c.measurement == measurement.c.record, in_force(fit, wanted.as_of))
        )
    return (
        select(*columns)
        .select_from(joined)
        .where(*_cell_conditions(wanted), *_measurement_conditions(wanted))
    )


def require_electrode(connection: Connection, label: str) -> None:
    """Raise Refused, with near labels, where no electrode in force carries the label."""
    from campaign.errors import Refused
    from campaign.ledger.fields import unknown_label

    known = labels(connection, "electrode")
    if label not in known:
        raise Refused([unknown_label("electrode", label, known)])


def labels(connection: Connection, kind: str) -> list[str]:
    """Return the labels in force of a kind of record (recipes for electrolytes), in order."""
    table = {
        "electrode": schema.electrode,
        "electrolyte": schema.electrolyte,
        "cell": schema.cell,
    }[kind]
    column = table.c.key if kind == "electrolyte" else table.c.label
    return [
        str(label)
        for label in connection.execute(select(column).where(in_force(table)).order_by(column))
        .scalars()
        .all()
    ]


def list_electrodes(connection: Connection, wanted: Filter) -> list[Row]:
    """Return the electrodes in force with their number of cells."""
    table, cell = schema.electrode, schema.cell
    count = (
        select(func.count())
        .where(cell.c.electrode == table.c.record, in_force(cell, wanted.as_of))
        .scalar_subquery()
    )
    query = select(table, count.label("cells")).where(in_force(table, wanted.as_of))
    if wanted.electrode is not None:
        query = query.where(table.c.label == wanted.electrode)
    rows = connection.execute(query.order_by(table.c.label)).mappings()
    return [
        {
            "record": row["record"],
            "electrode": row["label"],
            "material": row["material"],
            "ion": row["ion"],
            "charge": row["charge"],
            "form": row["form"],
            "cells": row["cells"],
            "diffusion_length_cm": row["diffusion_length_cm"],
            "diffusivity_cm2_s": row["diffusivity_cm2_s"],
            "pore_resistance_ohm_cm2": row["pore_resistance_ohm_cm2"],
            "window_low_V": row["window_low_V"],
            "window_high_V": row["window_high_V"],
            "window_reference": row["window_reference"],
            "maximum_temperature_C": celsius(row["maximum_temperature_K"]),
            "note": row["note"],
        }
        for row in rows
    ]


def list_electrolytes(connection: Connection, wanted: Filter) -> list[Row]:
    """Return the electrolytes in force with their number of cells."""
    table, cell = schema.electrolyte, schema.cell
    count = (
        select(func.count())
        .where(cell.c.electrolyte == table.c.record, in_force(cell, wanted.as_of))
        .scalar_subquery()
    )
    query = select(table, count.label("cells")).where(in_force(table, wanted.as_of))
    for value, column in (
        (wanted.salt, table.c.salt_key),
        (wanted.solvents, table.c.solvent_key),
        (wanted.additives, table.c.additive_key),
    ):
        if value is not None:
            query = query.where(column == value)
    rows = connection.execute(query.order_by(table.c.key)).mappings()
    return [
        {
            "record": row["record"],
            "electrolyte": row["key"],
            "salt": row["salt_key"],
            "solvents": row["solvent_key"],
            "additives": row["additive_key"],
            "basis": row["basis"],
            "aqueous": bool(row["aqueous"]),
            "cells": row["cells"],
            "density_g_cm3": row["density_g_cm3"],
            "minimum_temperature_C": celsius(row["minimum_temperature_K"]),
            "maximum_temperature_C": celsius(row["maximum_temperature_K"]),
            "note": row["note"],
        }
        for row in rows
    ]


def list_cells(connection: Connection, wanted: Filter) -> list[Row]:
    """Return the cells in force with their number of measurements."""
    cell, measurement = schema.cell, schema.measurement
    count = (
        select(func.count())
        .where(measurement.c.cell == cell.c.record, *_measurement_conditions(wanted))
        .scalar_subquery()
        .label("measurements")
    )
    query = (
        select(
            cell,
            schema.electrode.c.label.label("electrode_label"),
            schema.electrolyte.c.key.label("recipe"),
            count,
        )
        .select_from(_cells_joined(wanted.as_of))
        .where(*_cell_conditions(wanted))
    )
    if asks_for_measurements(wanted):
        query = query.where(count > 0)
    return [
        {
            "record": row["record"],
            "cell": row["label"],
            "specimen": row["specimen"],
            "electrode": row["electrode_label"],
            "electrolyte": row["recipe"],
            "area_cm2": row["area_cm2"],
            "configuration": row["configuration"],
            "reference": row["reference"],
            "assembled_at": local(row["assembled_at"], row["assembled_offset"]),
            "operator": row["operator"],
            "measurements": row["measurements"],
            "note": row["note"],
        }
        for row in connection.execute(query.order_by(cell.c.label)).mappings()
    ]


_MEASUREMENT_COLUMNS = (
    "ion_content", "E_half_V", "cycle", "direction", "rest_h", "amplitude_mV", "f_min_Hz",
    "f_max_Hz", "operator", "instrument", "spectrum", "note",
)  # fmt: skip


def list_measurements(connection: Connection, wanted: Filter) -> list[Row]:
    """Return the measurements in force with the values of their current fit."""
    measurement = schema.measurement
    query = measurements_query(
        wanted,
        measurement,
        schema.cell.c.label.label("cell_label"),
        schema.electrode.c.label.label("electrode_label"),
        schema.electrolyte.c.key.label("recipe"),
    ).order_by(measurement.c.measured_at, schema.cell.c.label)
    values = fitted_values(connection, wanted)
    return [
        {
            "record": row["record"],
            "cell": row["cell_label"],
            "electrode": row["electrode_label"],
            "electrolyte": row["recipe"],
            "measured_at": local(row["measured_at"], row["measured_offset"]),
            "potential_V": row["potential_V"],
            "temperature_C": celsius(row["temperature_K"]),
            **{name: row[name] for name in _MEASUREMENT_COLUMNS},
            **values.get(row["record"], {}),
        }
        for row in connection.execute(query).mappings()
    ]


def fitted_values(connection: Connection, wanted: Filter) -> dict[int, Row]:
    """Return the values of the current fits by measurement, keyed as the flat table names them."""
    fit, value, measurement = schema.fit, schema.fitted_value, schema.measurement
    kept = measurements_query(wanted, measurement.c.record).subquery()
    query = (
        select(fit.c.measurement, fit.c.record, value.c.quantity, value.c.value, value.c.se)
        .select_from(fit.join(value, value.c.fit == fit.c.id))
        .where(in_force(fit, wanted.as_of), fit.c.measurement.in_(select(kept.c.record)))
    )
    found: dict[int, Row] = {}
    for number, record, quantity, amount, se in connection.execute(query):
        row = found.setdefault(number, {"fit": record})
        row[quantity] = "absent" if amount is None else amount
        if se is not None:
            row[f"{quantity}_se"] = se
    return found


def list_fits(connection: Connection, wanted: Filter) -> list[Row]:
    """Return the current fits of the measurements a filter keeps."""
    fit, measurement = schema.fit, schema.measurement
    kept = {
        record: (cell, measured_at, offset)
        for record, cell, measured_at, offset in connection.execute(
            measurements_query(
                wanted,
                measurement.c.record,
                schema.cell.c.label,
                measurement.c.measured_at,
                measurement.c.measured_offset,
            )
        )
    }
    values = fitted_values(connection, wanted)
    rows = connection.execute(
        select(fit).where(in_force(fit, wanted.as_of)).order_by(fit.c.record)
    ).mappings()
    return [
        {
            "record": row["record"],
            "measurement": row["measurement"],
            "cell": kept[row["measurement"]][0],
            "measured_at": local(*kept[row["measurement"]][1:]),
            "fitted_at": local(row["fitted_at"], row["fitted_offset"]),
            "fitted_by": row["fitted_by"],
            "circuit": row["circuit"],
            "weighting": row["weighting"],
            "chi2": row["chi2"],
            **{k: v for k, v in values.get(row["measurement"], {}).items() if k != "fit"},
        }
        for row in rows
        if row["measurement"] in kept
    ]


def celsius(kelvin: float | None) -> float | None:
    return None if kelvin is None else round(kelvin - ZERO_C, 9)


def local(utc: str | None, offset: int | None) -> str | None:
    from campaign.ledger.instants import show_local

    return None if utc is None else show_local(utc, offset or 0)


def last_measurement(connection: Connection, cell: str | None = None) -> Row | None:
    """Return the measurement logged last (of a cell), as a row of the list, or None."""
    measurement = schema.measurement
    query = measurements_query(Filter(), measurement.c.record, measurement.c.measured_at)
    if cell is not None:
        query = query.where(schema.cell.c.label == cell)
    latest = connection.execute(query.order_by(measurement.c.entry.desc(),
                                               measurement.c.measured_at.desc()).limit(1)).first()
    if latest is None:
        return None
    at = latest[1]
    rows = list_measurements(connection, Filter(since=at, until=at))
    return next((row for row in rows if row["record"] == latest[0]), None)


