"""The budget: what share of the resistance each term makes up, at several times."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.numbers import number, percent
from campaign.present.paragraphs import say
from campaign.present.tables import Column, show_table

Row = Mapping[str, Any]

TERMS = ("R_sl", "R_ct", "R_lat", "diffusion")


def condition_text(budget: Row) -> str:
    """Return the reference condition of a budget: electrolyte, temperature, potential."""
    condition = budget["condition"]
    text = f"{condition['electrolyte']}, {condition['temperature_C']:.1f} °C"
    if condition["potential_V"] is None:
        return text
    against = condition["reference"] or "a reference not stated"
    return f"{text}, {condition['potential_V']:.4g} V vs {against}"


def terms_of(budgets: Sequence[Row]) -> list[str]:
    """Return the terms that any of the budgets holds, in the order of the arcs."""
    return [term for term in TERMS if any(term in one for one in budgets)]


def time_rows(budgets: Sequence[Row]) -> list[dict[str, Any]]:
    """Return a row a time: shares with intervals in percent, R_el, the largest term."""
    return [
        {
            "time": f"{one['time_s']:g}",
            **{
                term: percent(one[term], one["share_ci"].get(term))
                for term in terms_of(budgets)
                if term in one
            },
            "R_el": number(one["R_el_ohm_cm2"], 3),
            "largest": _largest(one),
        }
        for one in budgets
    ]


def _largest(budget: Row) -> str:
    if budget["cell_limited"]:
        return "R_el (cell-limited)"
    largest = max(terms_of([budget]), key=lambda term: budget[term])
    rivals = budget["not_told_apart"]
    return f"{largest}, not told from {', '.join(rivals)}" if rivals else largest


def show_budgets(budgets: Sequence[Row], title: str) -> None:
    """Print the shares at several times as a small table."""
    columns = (
        Column("time", "t/s", right=True),
        *(Column(term, f"{term}/%", right=True) for term in terms_of(budgets)),
        Column("R_el", "R_el/(ohm cm2)", right=True),
        Column("largest", "largest"),
    )
    say(title)
    show_table(time_rows(budgets), columns)


def flat_shares(budgets: Sequence[Row]) -> dict[str, float | None]:
    """Return the shares at several times as columns of one row of a CSV file."""
    return {
        f"share_{term}_{one['time_s']:g}s": one.get(term)
        for one in budgets
        for term in terms_of(budgets)
    }


def leading_sentence(budget: Row) -> str:
    """Return which term is the largest over time, '' where no crossing changes it."""
    crossings = [one for one in budget.get("crossings", ()) if one["leading"]]
    if not crossings:
        return ""
    parts = [f"{one['before']} until {number(one['time_s'], 2)} s" for one in crossings]
    return f"Largest term over time: {', then '.join(parts)}, then {crossings[-1]['after']}"
