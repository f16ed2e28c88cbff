"""Which readings go to which file, and the list of corrections."""

from __future__ import annotations

import json
from collections.abc import Sequence

from maker.columns import (
    canonical,
    cell_columns,
    closing_columns,
    fit_columns,
    half_column,
    measurement_columns,
    table,
    with_synonyms,
    with_units,
)
from maker.measuring import Reading
from maker.mishaps import Campaign


def by_month(readings: Sequence[Reading], first: int, last: int) -> list[Reading]:
    """Return the readings measured in the months first..last, in order of time."""
    rows = [r for r in readings if first <= r.measured_at.month <= last]
    return sorted(rows, key=lambda r: (r.measured_at, r.cell.label))


def tables(campaign: Campaign) -> dict[str, str]:
    """Return file names and texts of all flat tables."""
    a, b, c, d = (campaign.readings[letter] for letter in "ABCD")
    synonyms = {k: v for k, v in with_synonyms().items() if k != "area_cm2"}
    out = {
        "tables/01_nfm_film_a_2026-02_to_04.csv": table(by_month(a, 2, 4), canonical(0)),
        "tables/02_nfm_film_a_2026-05_to_08.csv": table(by_month(a, 5, 8), canonical(1)),
        "tables/03_nihcf_film_b_water.csv": table(
            [r for r in b if r.cell.medium.aqueous], canonical(1, half_column())
        ),
        "tables/04_nihcf_film_b_organic_units.csv": table(
            [r for r in b if not r.cell.medium.aqueous], with_units()
        ),
        "tables/05_hard_carbon_c_decimal_comma.csv": table(
            c, cell_columns(0) | measurement_columns() | fit_columns(True) | closing_columns(), True
        ),
        "tables/06_prussian_white_d_synonyms.csv": table(d, synonyms),
    }
    for name, rows in campaign.refits.items():
        keep = {"cell": cell_columns(0)["cell"]} | measurement_columns()
        half = half_column() if "_b.csv" in name else {}
        out[name] = table(rows, keep | half | fit_columns() | closing_columns())
    return out


def corrections_toml(campaign: Campaign) -> str:
    """Return the corrections as TOML: applied in this order once the tables are imported."""
    lines = [
        "# What is put right after the tables in tables/ were imported, in this order.",
        "# refit: import the file (relative to this one) with --refit.",
        "# withdraw: withdraw the measurement, or its current fit, of a cell at an instant.",
    ]
    for step in campaign.corrections:
        lines += ["", "[[corrections]]"]
        lines += [f"{key} = {json.dumps(value)}" for key, value in step.items()]
    return "\n".join(lines) + "\n"
