"""A campaign as a workbook: the flat table on one sheet, lists of records on others."""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from campaign.errors import refused
from campaign.ledger import selecting
from campaign.ledger.filters import Filter
from campaign.ledger.flat.canonical import CANONICAL
from campaign.ledger.flat.writing import guarded

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from campaign.ledger.database import Database

Row = Mapping[str, Any]

FLAT = "measurements"
_CELL = ("specimen", "area_cm2", "configuration", "reference", "assembled_at")
_ELECTRODE = ("material", "ion", "form")
_FIT = ("chi2", "circuit", "weighting", "fitted_at", "fitted_by")


def flat_rows(connection: Connection, wanted: Filter | None = None) -> list[dict[str, Any]]:
    """Return the measurements with a current fit as rows of the flat table."""
    wanted = wanted or Filter()
    cells = {row["cell"]: row for row in selecting.list_cells(connection, Filter())}
    electrodes = {row["electrode"]: row for row in selecting.list_electrodes(connection, Filter())}
    fits = {row["measurement"]: row for row in selecting.list_fits(connection, wanted)}
    found = []
    for row in selecting.list_measurements(connection, wanted):
        if row["record"] not in fits:
            continue
        whole = {
            **{name: cells[row["cell"]][name] for name in _CELL},
            **{name: electrodes[row["electrode"]][name] for name in _ELECTRODE},
            **{name: fits[row["record"]][name] for name in _FIT},
            **{name: value for name, value in row.items() if value is not None},
        }
        found.append({name: whole.get(name) for name in CANONICAL})
    return found


def write_workbook(database: Database, path: Path) -> dict[str, int]:
    """Write the workbook, whole or not at all; return the rows of each sheet.

    No text in it is run as a formula. Raises Refused where the file cannot be written.
    """
    with database.reading() as connection:
        everything = Filter()
        sheets: dict[str, Sequence[Row]] = {
            FLAT: flat_rows(connection),
            "cells": selecting.list_cells(connection, everything),
            "electrolytes": selecting.list_electrolytes(connection, everything),
            "electrodes": selecting.list_electrodes(connection, everything),
        }
    draft = path.with_name(f".{path.name}.{os.getpid()}")
    try:
        _book(sheets).save(draft)
        draft.replace(path)
    except OSError as error:
        draft.unlink(missing_ok=True)
        raise refused(
            f"the workbook cannot be written to {path}: {error.strerror or error}",
            value=path,
            expected="a file that can be written",
        ) from None
    return {name: len(rows) for name, rows in sheets.items()}


def _book(sheets: Mapping[str, Sequence[Row]]) -> Any:
    import openpyxl

    book = openpyxl.Workbook(write_only=True)
    for name, rows in sheets.items():
        sheet = book.create_sheet(name)
        sheet.freeze_panes = "A2"
        headings = list(CANONICAL) if name == FLAT else list(rows[0] if rows else {})
        sheet.append(headings)
        for row in rows:
            sheet.append([_cell(row.get(heading)) for heading in headings])
    return book


def _cell(value: Any) -> Any:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return guarded(value) if isinstance(value, str) else value
