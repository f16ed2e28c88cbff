"""The columns of the flat tables, in canonical headers and in other spellings."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Iterable

from maker.films import FILM_A, FILM_C, QUANTITIES
from maker.measuring import Reading
from maker.physics import frumkin_occupancy, half_potential
from maker.writing import in_brackets, instant, plus_minus, recipe, significant

Columns = dict[str, Callable[[Reading], str]]


def fitted(name: str) -> Callable[[Reading], str]:
    """Return a writer of a fitted value: number, `absent` (R_sl in water) or empty."""

    def write(reading: Reading) -> str:
        if name in reading.values:
            return significant(reading.values[name])
        return "absent" if name == "R_sl" and reading.cell.medium.aqueous else ""

    return write


def error(name: str, relative: bool = False) -> Callable[[Reading], str]:
    """Return a writer of a standard error, in ohm or in percent."""

    def write(reading: Reading) -> str:
        if name not in reading.se:
            return ""
        scale = 100 / reading.values[name] if relative else 1.0
        return significant(reading.se[name] * scale, 2)

    return write


def with_error(
    name: str, style: Callable[[float, float], str], scale: float = 1.0
) -> Callable[[Reading], str]:
    """Return a writer of a fitted value and its standard error in one field."""

    def write(reading: Reading) -> str:
        if name not in reading.se:
            return fitted(name)(reading)
        return style(reading.values[name] * scale, reading.se[name] * scale)

    return write


def cell_columns(style: int) -> Columns:
    """Return the columns that describe electrode and cell."""
    return {
        "electrode": lambda r: r.cell.film.label,
        "material": lambda r: r.cell.film.material,
        "ion": lambda r: "Na+",
        "form": lambda r: r.cell.film.form,
        "cell": lambda r: r.cell.label,
        "area_cm2": lambda r: f"{r.cell.area_cm2:g}",
        "configuration": lambda r: "three-electrode",
        "reference": lambda r: r.cell.reference,
        "electrolyte": lambda r: recipe(r.cell, style),
        "assembled_at": lambda r: instant(r.cell.assembled_at),
    }


def measurement_columns() -> Columns:
    """Return the columns of the measurement itself."""
    return {
        "measured_at": lambda r: instant(r.measured_at),
        "potential_V": lambda r: f"{r.potential_V:.3f}",
        "temperature_C": lambda r: f"{r.temperature_C:.1f}",
        "rest_h": lambda r: f"{r.rest_h:g}",
    }


def fit_columns(relative: bool = False) -> Columns:
    """Return the columns of the fitted values with their standard errors."""
    columns: Columns = {}
    for name in QUANTITIES:
        columns[name] = fitted(name)
        columns[f"{name}_se/%" if relative else f"{name}_se"] = error(name, relative)
        if name in ("R_sl", "R_ct", "R_lat"):
            for part in "Qn":
                pair = f"{part}{name[1:]}"
                columns[pair] = fitted(pair)
    return columns


def closing_columns() -> Columns:
    """Return the columns about fit and instrument."""
    return {
        "chi2": lambda r: f"{r.chi2:.2e}",
        "circuit": lambda r: r.circuit,
        "weighting": lambda r: "modulus",
        "fitted_at": lambda r: instant(r.fitted_at),
        "fitted_by": lambda r: r.fitted_by,
        "amplitude_mV": lambda r: "5",
        "f_min_Hz": lambda r: "0.01",
        "f_max_Hz": lambda r: "200000",
        "operator": lambda r: r.cell.operator,
        "instrument": lambda r: "bench 2" if r.cell.film in (FILM_A, FILM_C) else "bench 1",
        "note": lambda r: r.note,
    }


def half_column() -> Columns:
    """Return the half-filling potential against the cell's reference."""
    return {"E_half_V": lambda r: f"{half_potential(r.cell, r.temperature_C + 273.15):.3f}"}


def canonical(style: int, extra: Columns | None = None) -> Columns:
    """Return the columns of a table in canonical headers."""
    return (cell_columns(style) | measurement_columns() | (extra or {}) | fit_columns()
            | closing_columns())  # fmt: skip


def with_units() -> Columns:
    """Return electrode B's organic table: units in the headers, errors in the values."""
    columns = canonical(2, half_column())
    swap: dict[str, tuple[str, Callable[[Reading], str]]] = {
        "area_cm2": ("A/mm2", lambda r: f"{r.cell.area_cm2 * 100:g}"),
        "potential_V": ("E/mV", lambda r: f"{r.potential_V * 1000:.0f}"),
        "temperature_C": ("T/K", lambda r: f"{r.temperature_C + 273.15:.2f}"),
        "R_el": ("R_el/Ω", with_error("R_el", plus_minus)),
        "R_sl": ("R_sl/Ω", with_error("R_sl", plus_minus)),
        "R_ct": ("R_ct/kΩ", with_error("R_ct", plus_minus, 1e-3)),
        "R_lat": ("R_lat/Ω", with_error("R_lat", plus_minus)),
        "sigma_w": ("sigma_w", with_error("sigma_w", plus_minus)),
    }
    return dict(
        swap.get(header, (header, write))
        for header, write in columns.items()
        if not header.endswith("_se")
    )


def with_synonyms() -> Columns:
    """Return electrode D's table: the trade's other names, errors in brackets."""
    return {
        **cell_columns(1),
        "A/cm2": lambda r: f"{r.cell.area_cm2:g}",
        "measured_at": lambda r: instant(r.measured_at),
        "E/V": lambda r: f"{r.potential_V:.3f}",
        "T/°C": lambda r: f"{r.temperature_C:.1f}",
        "ion_content": lambda r: f"{occupancy(r):.2f}",
        "Rs/Ω": with_error("R_el", in_brackets),
        "R_SEI/Ω": with_error("R_sl", in_brackets),
        "Rct/Ω": with_error("R_ct", in_brackets),
        "R_lat": with_error("R_lat", in_brackets),
        "sigma_w": with_error("sigma_w", in_brackets),
        **{name: fitted(name) for name in ("Q_sl", "n_sl", "Q_ct", "n_ct", "Q_lat", "n_lat")},
        "note": lambda r: r.note,
    }


def occupancy(reading: Reading) -> float:
    """Return the ion content [1] of a reading by the electrode's isotherm."""
    T_K = reading.temperature_C + 273.15
    return frumkin_occupancy(reading.offset_V, T_K, reading.cell.film.g)


def table(readings: Iterable[Reading], columns: Columns, german: bool = False) -> str:
    """Return a flat table as text; `german` separates with semicolons, decimals with commas."""
    stream = io.StringIO()
    writer = csv.writer(stream, delimiter=";" if german else ",", lineterminator="\n")
    writer.writerow(columns)
    text = {"electrolyte", "material", "cell", "circuit", "note"}
    for reading in readings:
        fields = {header: write(reading) for header, write in columns.items()}
        if german:
            fields = {h: v if h in text else v.replace(".", ",") for h, v in fields.items()}
        writer.writerow(fields.values())
    return stream.getvalue()
