"""Lists of records and of journal entries."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

from campaign.present.numbers import concise, number, with_error
from campaign.present.refusals import note
from campaign.present.tables import Column, at_terminal, fits, show_csv, show_json, show_table

Row = Mapping[str, Any]


def _text(key: str, heading: str) -> Column:
    return Column(key, heading)


def _figure(key: str, heading: str) -> Column:
    return Column(key, heading, right=True)


def _short_instant(text: Any) -> str:
    """Return an instant to the minute, as it was written down at the bench."""
    return "" if text is None else str(text)[:16].replace("T", " ")


COLUMNS: dict[str, tuple[Column, ...]] = {
    "electrodes": (
        _text("electrode", "electrode"),
        _text("material", "material"),
        _text("ion", "ion"),
        _text("form", "form"),
        _figure("cells", "cells"),
        _figure("diffusion_length_cm", "L/cm"),
        _figure("pore_resistance_ohm_cm2", "R_ion/(ohm cm2)"),
        _text("note", "note"),
    ),
    "electrolytes": (
        _text("electrolyte", "electrolyte"),
        _text("basis", "basis"),
        _text("aqueous", "aqueous"),
        _figure("cells", "cells"),
        _figure("density_g_cm3", "density/(g cm-3)"),
        _text("note", "note"),
    ),
    "cells": (
        _text("cell", "cell"),
        _text("specimen", "specimen"),
        _text("electrode", "electrode"),
        _text("electrolyte", "electrolyte"),
        _figure("area_cm2", "A/cm2"),
        _text("configuration", "configuration"),
        _text("reference", "reference"),
        _figure("measurements", "measured"),
    ),
    "measurements": (
        _figure("record", "no."),
        _text("cell", "cell"),
        Column("measured_at", "measured at", _short_instant),
        _figure("potential_V", "E/V"),
        _figure("temperature_C", "T/degC"),
        _figure("R_el", "R_el/ohm"),
        _figure("R_sl", "R_sl/ohm"),
        _figure("R_ct", "R_ct/ohm"),
        _figure("R_lat", "R_lat/ohm"),
        _figure("sigma_w", "sigma_w"),
    ),
    "fits": (
        _figure("record", "fit"),
        _figure("measurement", "measurement"),
        _text("cell", "cell"),
        Column("measured_at", "measured at", _short_instant),
        _text("circuit", "circuit"),
        _figure("chi2", "chi2"),
        _figure("R_el", "R_el/ohm"),
        _figure("R_sl", "R_sl/ohm"),
        _figure("R_ct", "R_ct/ohm"),
        _figure("R_lat", "R_lat/ohm"),
    ),
    "imports": (
        _figure("import", "import"),
        _text("file", "file"),
        _figure("rows", "rows"),
        Column("at", "at", _short_instant),
        _text("who", "who"),
        _text("withdrawn", "withdrawn"),
    ),
    "history": (
        _figure("entry", "entry"),
        Column("at", "at (UTC)", _short_instant),
        _text("who", "who"),
        _text("action", "action"),
        _text("what", "what"),
        _text("reason", "reason"),
    ),
}


def _with_errors(row: Row, join: Callable[[Any, Any], str]) -> Row:
    """Join each value with its standard error, as people read them."""
    joined = dict(row)
    for key in row:
        error = row.get(f"{key}_se")
        if error is not None and not isinstance(row[key], str):
            joined[key] = join(row[key], error)
    return joined


def _readable(rows: Sequence[Row], columns: Sequence[Column]) -> list[Row]:
    """Return rows with errors joined, in the short form where a terminal is too narrow."""
    wide = [_with_errors(row, with_error) for row in rows]
    if at_terminal() and not fits(wide, columns):
        return [_with_errors(row, concise) for row in rows]
    return wide


def show_list(
    kind: str,
    rows: Sequence[Row],
    *,
    as_json: bool,
    as_csv: bool,
    stated: Mapping[str, Any] | None = None,
) -> None:
    """Print a list in the form asked for; say what emptied it when it is empty."""
    if as_json:
        show_json({"rows": rows})
    elif as_csv:
        show_csv(rows)
    elif rows:
        show_table(_readable(rows, COLUMNS[kind]), COLUMNS[kind])
    if not rows and not as_json:
        asked = ", ".join(f"--{k.replace('_', '-')} {v}" for k, v in (stated or {}).items())
        note(f"No {kind} match {asked}." if asked else f"There are no {kind} yet.")


def show_record(kind: str, record: Row) -> None:
    """Print one record, a field a line."""
    width = max((len(key) for key, value in record.items() if value is not None), default=0)
    print(kind)
    for key, value in record.items():
        if value is None or value == []:
            continue
        shown = "; ".join(map(str, value)) if isinstance(value, list) else _plain(value)
        print(f"  {key.ljust(width)}  {shown}")


def _plain(value: Any) -> str:
    return f"{value:.10g}" if isinstance(value, float) else number(value)


def show_changes(rows: Sequence[Row]) -> None:
    """Print what each amendment changed, below the journal."""
    for row in rows:
        was, now = row["before"].get("was", {}), row["after"].get("is", {})
        changed = {field: (was.get(field), now[field]) for field in now}
        show_amended(f"entry {row['entry']}", changed)


def show_amended(what: str, changed: Mapping[str, tuple[Any, Any]]) -> None:
    """Print fields with what they were and what they are."""
    for field, pair in changed.items():
        was, now = ("empty" if item is None else _plain(item) for item in pair)
        print(f"{what}: {field} was {was}, is {now}")
