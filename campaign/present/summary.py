"""The rate-limiting-step table: one row an electrode."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.numbers import share, significant, with_interval
from campaign.present.refusals import note
from campaign.present.tables import Column, show_csv, show_json, show_table

Row = Mapping[str, Any]

AXES = ("concentration", "solvent", "additive", "potential", "barrier", "age")

COLUMNS = (
    Column("electrode", "electrode"),
    Column("slowest", "dominant"),
    Column("order", "order (95 %)"),
    Column("solvent", "solvents"),
    Column("Ea", "Ea/(kJ/mol)"),
    Column("law", "law in E"),
    Column("verdict", "verdict"),
    Column("strength", "strength"),
    Column("open", "missing"),
)


def show_summary(
    found: Mapping[str, Any],
    *,
    as_json: bool,
    as_csv: bool = False,
    stated: Mapping[str, Any] | None = None,
) -> None:
    """Print the table in the form asked for, what is missing, and the criteria used."""
    rows: Sequence[Row] = found["rows"]
    if as_json:
        show_json(found)
        return
    if as_csv:
        show_csv([_for_csv(row) for row in rows])
        return
    if not rows:
        asked = ", ".join(f"--{k.replace('_', '-')} {v}" for k, v in (stated or {}).items())
        note(f"No measurements match {asked}." if asked else "There are no measurements yet.")
        return
    show_table([_shown(row) for row in rows], COLUMNS)
    _sentences(rows)
    print(_criteria_line(found["criteria"]))


def _shown(row: Row) -> dict[str, Any]:
    diagnostics = row["diagnostics"]
    return {
        "electrode": " ".join(
            str(row[key]) for key in ("electrode", "salt", "solvents", "temperature") if key in row
        ),
        "slowest": _slowest(row),
        "order": _order(diagnostics["concentration"]),
        "solvent": _factor(diagnostics["solvent"]),
        "Ea": barriers(diagnostics["barrier"]),
        "law": diagnostics["potential"].get("law") or "-",
        "verdict": row["text"],
        "strength": row["strength"] or "-",
        "open": _short(row["missing"]),
    }


def _slowest(row: Row) -> str:
    if row["dominant"] is None:
        return "-"
    text = f"{row['dominant']} {share(row['share'])}".strip()
    return f"{text} cell-limited" if row["cell_limited"] else text


def _order(diagnostic: Row) -> str:
    return with_interval(diagnostic.get("order"), diagnostic.get("order_ci"))


def _factor(diagnostic: Row) -> str:
    ratio = diagnostic.get("ratio")
    if ratio is None:
        return "-"
    return f"x {significant(max(ratio, 1 / ratio), 2)}"


def barriers(diagnostic: Row) -> str:
    """Return the range of barriers over the electrolytes (form ln R)."""
    values = [
        one["Ea_kJ_mol"] for one in diagnostic.get("series", ()) if one["Ea_kJ_mol"] is not None
    ]
    if not values:
        return "-"
    low, high = min(values), max(values)
    return f"{low:.0f}" if round(low) == round(high) else f"{low:.0f} to {high:.0f}"


def _short(missing: Sequence[str]) -> str:
    named = [axis for axis in AXES if any(text.startswith(axis) for text in missing)]
    if missing and not named:
        return "see below"
    return ", ".join(named)


def _sentences(rows: Sequence[Row]) -> None:
    for row in rows:
        lines = [f"because: {text}" for text in row["because"]]
        lines += [f"missing: {text}" for text in row["missing"]]
        lines += [f"note: {text}" for text in row["warnings"]]
        if lines:
            print(f"\n{row['electrode']}: {row['text']}")
            for line in lines:
                print(f"  {line}")


def _criteria_line(criteria: Mapping[str, Any]) -> str:
    return (
        f"\nCriteria: order margin {criteria['order_margin']:g}; factor margin "
        f"{criteria['ratio_margin']:g}; barrier margin {criteria['barrier_margin_kJ_mol']:g} "
        f"kJ/mol; error probability {criteria['error_probability']:g}; working time "
        f"{criteria['working_time_s']:g} s. Ea: form ln R."
    )


def _for_csv(row: Row) -> dict[str, Any]:
    diagnostics = row["diagnostics"]
    order = diagnostics["concentration"].get("order_ci") or (None, None)
    flat = {
        "electrode": row["electrode"],
        **{key: row[key] for key in ("salt", "solvents", "temperature") if key in row},
        "n_specimens": row["n_specimens"],
        "n_measurements": row["n_measurements"],
        "dominant": row["dominant"],
        "share": row["share"],
        "order": diagnostics["concentration"].get("order"),
        "order_low": order[0],
        "order_high": order[1],
        "solvent_ratio": diagnostics["solvent"].get("ratio"),
        "Ea_kJ_mol": barriers(diagnostics["barrier"]),
        "law": diagnostics["potential"].get("law"),
    }
    flat |= {f"{axis}_decision": diagnostics[axis]["decision"] for axis in AXES}
    flat |= {
        "verdict": row["verdict"],
        "strength": row["strength"],
        "missing": "; ".join(row["missing"]),
        "warnings": "; ".join(row["warnings"]),
    }
    return flat
