"""Asking at a terminal for what a measurement still needs, the last one's values to accept."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import UTC, datetime
from typing import Any

import typer

from campaign.ledger.database import Database
from campaign.ledger.quantities import QUANTITIES

RESISTANCES = ("R_el", "R_sl", "R_ct", "R_lat", "sigma_w")


def ask_missing(database: Database, given: Mapping[str, str]) -> dict[str, str]:
    """Return what was given completed by what a person answers; Enter accepts a default."""
    from campaign.ledger.selecting import labels, last_measurement

    answers = dict(given)
    with database.reading() as connection:
        known = labels(connection, "cell")
        last = last_measurement(connection, given.get("cell")) or last_measurement(connection)
    last = last or {}
    _ask(answers, "cell", last.get("cell"))
    if answers["cell"] not in known:
        typer.echo(f"Cell {answers['cell']} is new.", err=True)
        for name in ("electrode", "electrolyte", "area_cm2", "reference"):
            _ask(answers, name, _of_cell(database, last.get("cell")).get(name))
    _ask(answers, "measured_at", datetime.now(UTC).astimezone().isoformat(timespec="minutes"))
    _ask(answers, "potential_V", last.get("potential_V"))
    _ask(answers, "temperature_C", last.get("temperature_C"))
    if not any(name in answers for name in QUANTITIES):
        typer.echo("Fitted values in ohm (Enter: not fitted; 'absent': no such arc).", err=True)
        for name in RESISTANCES:
            _ask(answers, name, "")
    return {name: text for name, text in answers.items() if text}


def _of_cell(database: Database, label: str | None) -> dict[str, Any]:
    if label is None:
        return {}
    from campaign.ledger.filters import Filter
    from campaign.ledger.selecting import list_cells

    with database.reading() as connection:
        rows = list_cells(connection, Filter())
    return next((row for row in rows if row["cell"] == label), {})




def _ask(answers: dict[str, str], name: str, default: Any) -> None:
    if name in answers:
        return
    shown = None if default is None else str(default)
    if isinstance(default, float):
        shown = f"{default:g}"
    answers[name] = typer.prompt(name, default=shown, err=True, show_default=bool(shown)).strip()
