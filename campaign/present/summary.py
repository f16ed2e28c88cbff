"""The rate-limiting-step table: one row an electrode."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.budgets import condition_text, flat_shares, show_budgets
from campaign.present.criteria import criteria_sentence, interval_level
from campaign.present.numbers import share, significant, with_interval
from campaign.present.paragraphs import say
from campaign.present.refusals import note
from campaign.present.tables import Column, show_csv, show_json, show_table

Row = Mapping[str, Any]

AXES = ("concentration", "solvent", "additive", "potential", "barrier", "age")
# As the columns of the table call what the axes give.
SHORT = {"concentration": "order", "barrier": "Ea"}
GROUPS = ("salt", "solvents", "temperature")


def _columns(level: str) -> tuple[Column, ...]:
    return (
        Column("electrode", "electrode"),
        *(Column(group, group) for group in GROUPS),
        Column("slowest", "dominant"),
        Column("order", f"order ({level})"),
        Column("solvent", "solvents"),
        Column("Ea", "Ea /(kJ/mol)"),
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
    as_markdown: bool = False,
    as_latex: bool = False,
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
    if as_markdown or as_latex:
        from campaign.present import papers

        print((papers.latex if as_latex else papers.markdown)(found))
        return
    show_table([_shown(row) for row in rows], _columns(interval_level(found["criteria"])))
    for row in rows:
        if row.get("budget_by_time"):
            print()
            budgets = row["budget_by_time"]
            show_budgets(budgets, f"{name(row)}: shares at {condition_text(budgets[0])}")
    _sentences(rows)
    print()
    say(criteria_sentence(found["criteria"]))


def name(row: Row) -> str:
    """Return the electrode of a row with its group, where rows were split."""
    return ", ".join(str(row[key]) for key in ("electrode", *GROUPS) if key in row)


def _shown(row: Row) -> dict[str, Any]:
    diagnostics = row["diagnostics"]
    return {
        **{key: row[key] for key in ("electrode", *GROUPS) if key in row},
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
    named = [
        SHORT.get(axis, axis) for axis in AXES if any(_about(axis, text) for text in missing)
    ]
    if missing and not named:
        return "see below"
    return ", ".join(named)


def _about(axis: str, text: str) -> bool:
    """Return whether a wish is about an axis, alone or after the terms it is for."""
    return text.startswith(axis) or f": {axis} " in text


def _sentences(rows: Sequence[Row]) -> None:
    for row in rows:
        lines = [f"because: {text}" for text in row["because"]]
        lines += [f"missing: {text}" for text in row["missing"]]
        lines += [f"note: {text}" for text in row["warnings"]]
        if lines:
            print(f"\n{name(row)}: {row['text']}")
            for line in lines:
                say(line, "  ", "      ")


def _for_csv(row: Row) -> dict[str, Any]:
    diagnostics = row["diagnostics"]
    order = diagnostics["concentration"].get("order_ci") or (None, None)
    flat = {
        "electrode": row["electrode"],
        **{key: row[key] for key in GROUPS if key in row},
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
    return flat | flat_shares(row.get("budget_by_time", ()))
