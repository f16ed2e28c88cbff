"""The criteria in force, and how they came to be so."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.tables import Column, show_csv, show_json, show_table

Row = Mapping[str, Any]

# What each criterion is called in a sentence, and how its value is written, in order.
WORDING: Mapping[str, tuple[str, str]] = {
    "order_margin": ("order margin", ""),
    "ratio_margin": ("factor margin", ""),
    "barrier_margin_kJ_mol": ("barrier margin", " kJ/mol"),
    "error_probability": ("error probability", ""),
    "potential_window_V": ("least potential window", " V"),
    "working_time_s": ("working time", " s"),
    "temperature_tolerance_K": ("temperatures matched within", " K"),
    "potential_tolerance_V": ("potentials within", " V"),
    "content_tolerance": ("ion contents within", ""),
    "confounding_r": ("confounded above |r|", ""),
    "heterogeneity_p": ("strata told apart below p", ""),
}


def criteria_sentence(criteria: Mapping[str, Any]) -> str:
    """Return every criterion that a verdict used, in one sentence."""
    parts = [f"{name} {criteria[key]:g}{unit}" for key, (name, unit) in WORDING.items()]
    return f"Criteria: {'; '.join(parts)}. Ea: form ln R."


def interval_level(criteria: Mapping[str, Any]) -> str:
    """Return the level of the intervals shown, such as '95 %'."""
    return f"{100 * (1 - criteria['error_probability']):.4g} %"


def show_criteria(
    rows: Sequence[Row],
    past: Sequence[Row],
    changed: Mapping[str, tuple[float, float]],
    *,
    as_json: bool,
    as_csv: bool,
) -> None:
    """Print what was changed, the criteria in force and every change so far."""
    if as_json:
        show_json(
            {
                "criteria": {row["name"]: row["value"] for row in rows},
                "rows": rows,
                "history": past,
                "changed": {name: {"was": a, "is": b} for name, (a, b) in changed.items()},
            }
        )
        return
    if as_csv:
        show_csv(rows)
        return
    for name, (was, now) in changed.items():
        print(f"{name}: was {was:g}, is {now:g}")
    if changed:
        print()
    show_table([_shown(row) for row in rows], COLUMNS)
    if past:
        print()
        show_table([_event(row) for row in past], EVENTS, "Changes, oldest first")


def figure(value: Any) -> str:
    """Return a criterion's value as it was set."""
    return "" if value is None else f"{value:.6g}"


COLUMNS = (
    Column("name", "criterion"),
    Column("value", "value", figure, right=True),
    Column("unit", "unit"),
    Column("default", "default", figure, right=True),
    Column("meaning", "meaning"),
)
EVENTS = (
    Column("entry", "entry", right=True),
    Column("at", "at (UTC)"),
    Column("who", "who"),
    Column("name", "criterion"),
    Column("was", "was", figure, right=True),
    Column("is", "is", figure, right=True),
    Column("reason", "reason"),
)


def _shown(row: Row) -> dict[str, Any]:
    return {**row, "default": None if row["value"] == row["default"] else row["default"]}


def _event(row: Row) -> dict[str, Any]:
    return {**row, "at": str(row["at"])[:16].replace("T", " ")}
