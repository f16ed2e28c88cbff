"""Everything behind one electrode's verdict, in the order a referee would ask."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import groupby
from typing import Any

from campaign.present.budgets import condition_text, leading_sentence, show_budgets
from campaign.present.criteria import criteria_sentence, interval_level
from campaign.present.numbers import number, percent, with_interval
from campaign.present.paragraphs import heading, say
from campaign.present.summary import AXES
from campaign.present.tables import Column, show_csv, show_json, show_table

Row = Mapping[str, Any]

ITEM, HANG = "  - ", "    "
KINDS = {"specimen": "one specimen", "stratum": "one stratum", "criterion": "a criterion moved"}


def show_explanation(row: Row, *, as_json: bool, as_csv: bool = False) -> None:
    """Print verdict, budget, diagnostics, candidates, checks, robustness and criteria.

    CSV holds the diagnostics of every term, a row an axis.
    """
    if as_json:
        show_json(row)
        return
    if as_csv:
        show_csv(_flat_diagnostics(row))
        return
    strength = f" ({row['strength']})" if row["strength"] else ""
    print(f"{row['electrode']}: {row['text']}{strength}")
    print(f"{row['n_specimens']} specimens, {row['n_measurements']} measurements")
    _list("Because", row["because"])
    _list("Missing", row["missing"])
    _dominance(row)
    _diagnostics(row)
    _candidates(row)
    _carried(row["robustness"])
    _robustness(row["robustness"])
    _list("What would change the verdict", row["would_change"])
    _checks(row["checks"])
    _list("Notes", row["warnings"])
    print()
    say(criteria_sentence(row["criteria"]))


def _list(title: str, lines: Sequence[str]) -> None:
    if lines:
        heading(title)
        for line in lines:
            say(line, ITEM, HANG)


def _dominance(row: Row) -> None:
    budgets, weighed = row["budget_by_time"], row["budget"]
    if not budgets or not weighed:
        return
    heading("What dominates, and when")
    say(_dominant_sentence(row, weighed), ITEM, HANG)
    leading = leading_sentence(weighed)
    if leading:
        say(leading, ITEM, HANG)
    others = [
        f"{one['after']} overtakes {one['before']} at {number(one['time_s'], 2)} s"
        for one in weighed["crossings"]
        if not one["leading"]
    ]
    if others:
        say(f"Below it: {'; '.join(others)}", ITEM, HANG)
    say(f"Intervals from {weighed['scatter_from']}" if weighed["scatter_from"] != "none"
        else "No scatter to take intervals from: one specimen", ITEM, HANG)  # fmt: skip
    print()
    show_budgets(budgets, f"Shares at {condition_text(budgets[0])}")


def _dominant_sentence(row: Row, weighed: Row) -> str:
    level = interval_level(row["criteria"])
    text = (
        f"{weighed['time_s']:g} s after a current step {row['dominant']} is the largest term: "
        f"{percent(row['share'], row['share_ci'])} %"
    )
    if weighed["next"] is None or weighed["difference"] is None:
        return text
    gap = percent(weighed["difference"], weighed["difference_ci"])
    shown = "not shown to be larger" if weighed["not_told_apart"] else "shown to be larger"
    return (
        f"{text}, and {gap} % more than {weighed['next']}, the next ({level} intervals): {shown}"
    )


def _diagnostics(row: Row) -> None:
    diagnostics = row["diagnostics"]
    print()
    show_table(
        [_diagnostic(axis, diagnostics[axis]) for axis in AXES],
        (
            Column("axis", "axis"),
            Column("what", "estimate of"),
            Column("estimate", f"value ({interval_level(row['criteria'])})"),
            Column("specimens", "specimens", right=True),
            Column("readings", "readings", right=True),
            Column("decision", "decision"),
        ),
        f"Diagnostics of {row['dominant'] or 'the dominant term'}",
    )
    for axis in AXES:
        one = diagnostics[axis]
        reason = one["decision"].partition(": ")[2]
        reason = reason or (one.get("because") if _untested(one) else "")
        if reason:
            say(f"{axis} open: {reason}", "  ", "    ")
    _law(diagnostics["potential"])
    _barriers(diagnostics["barrier"], interval_level(row["criteria"]))


def _diagnostic(axis: str, one: Row) -> dict[str, Any]:
    tested = one["estimate"] is not None
    return {
        "axis": axis,
        "what": _what(axis, one.get("between")) if tested else "",
        "estimate": with_interval(one["estimate"], one["interval"]) if tested else "-",
        "specimens": one.get("n_specimens") if tested else None,
        "readings": one.get("n_measurements") if tested else None,
        "decision": one["decision"].partition(": ")[0],
    }


def _untested(one: Row) -> bool:
    return one["decision"] == "open" and one["estimate"] is None


def _what(axis: str, between: Sequence[str] | None) -> str:
    if axis == "concentration":
        return "order"
    if not between:
        return ""
    if axis == "barrier":
        return f"Ea {between[0]} less {between[1]}, kJ/mol"
    return f"factor {between[0]} / {between[1]}"


def _law(potential: Row) -> None:
    name = potential.get("law")
    if not name:
        return
    if name == "open":
        reason = potential.get("law_because")
        say(f"law over the potential open{f': {reason}' if reason else ''}", "  ", "    ")
        return
    parts = [f"law over the potential: {name}"]
    if potential.get("E0_V") is not None:
        parts.append(
            f"E0 {with_interval(potential['E0_V'], potential['E0_ci'])} V vs "
            f"{potential['reference']}"
        )
    if potential.get("g") is not None:
        parts.append(f"g {with_interval(potential['g'], potential['g_ci'])}")
    if potential.get("slope_per_V") is not None:
        slope = with_interval(potential["slope_per_V"], potential["slope_ci"])
        parts.append(f"d ln R/dE {slope} /V")
    say(f"{', '.join(parts)} ({potential['law_specimens']} specimens)", "  ", "    ")


def _barriers(barrier: Row, level: str) -> None:
    series = [one for one in barrier.get("series", ()) if one["Ea_kJ_mol"] is not None]
    if not series:
        return
    print()
    show_table(
        [
            {
                "salt": one["salt"],
                "blend": one["solvents"]
                + (f" + {one['additives']}" if one["additives"] != "none" else ""),
                "Ea": with_interval(one["Ea_kJ_mol"], one["Ea_ci"]),
                "Ea_T": with_interval(one["Ea_lnRT_kJ_mol"], one["Ea_lnRT_ci"]),
                "n": one["n_specimens"],
            }
            for one in series
        ],
        (
            Column("salt", "salt"),
            Column("blend", "solvents + additives"),
            Column("Ea", "Ea of ln R"),
            Column("Ea_T", "Ea of ln(R/T)"),
            Column("n", "specimens", right=True),
        ),
        f"Barriers by electrolyte in kJ/mol ({level})",
    )


def _candidates(row: Row) -> None:
    weighed = row["budget"]
    judged = [row["dominant"], *weighed.get("not_told_apart", ())] if weighed else []
    others = {}
    for term, found in row["terms"].items():
        if term not in judged:
            others[term] = found
            continue
        heading(f"Candidate steps for {term} (alone: {found['verdict']})")
        for one in found["candidates"]:
            print(f"  {one['step']} [{one['control']}]: {one['status']}")
            for text in one["for"]:
                say(text, "    for      ")
            for text in one["against"]:
                say(text, "    against  ")
    if others:
        heading("Smaller terms, each judged alone (all figures: --json)")
    for term, found in others.items():
        steps = "; ".join(f"{one['step']} {one['status']}" for one in found["candidates"])
        say(f"{term}: {found['verdict']} ({steps or 'no candidate'})", ITEM, HANG)


def _carried(found: Row | None) -> None:
    """Print which specimens carry which decision, with their measurements."""
    if found is None or not found["influences"]:
        return
    print()
    say(
        "What carries the decisions: specimens whose removal moves an estimate most, in its "
        "standard errors"
    )
    show_table(
        [
            {
                "axis": one["axis"],
                "specimen": one["specimen"],
                "shift": f"{one['shift']:.1f}",
                "numbers": ranges(one["measurements"]),
            }
            for one in found["influences"]
        ],
        (
            Column("axis", "axis"),
            Column("specimen", "specimen"),
            Column("shift", "moves by", right=True),
            Column("numbers", "its measurements"),
        ),
    )


def ranges(numbers: Sequence[int]) -> str:
    """Return record numbers as runs: '1-4, 7'."""
    ordered = sorted(set(numbers))
    runs = []
    for _, group in groupby(enumerate(ordered), key=lambda pair: pair[1] - pair[0]):
        run = [value for _, value in group]
        runs.append(str(run[0]) if len(run) == 1 else f"{run[0]}-{run[-1]}")
    return ", ".join(runs)


def _robustness(found: Row | None) -> None:
    if found is None:
        return
    tried, changing = found["tried"], found["changing"]
    heading("Robustness: one thing changed at a time")
    for kind, what in KINDS.items():
        trials = sum(one["kind"] == kind for one in tried)
        if not trials:
            continue
        moved = "moved by a quarter, both ways" if kind == "criterion" else "left out"
        name = "each criterion" if kind == "criterion" else what.replace("one", "each")
        changes = [one for one in changing if one["kind"] == kind]
        outcome = (
            f"{len(changes)} change the verdict" if len(changes) > 1
            else "one changes the verdict" if changes else "none changes the verdict"
        )  # fmt: skip
        say(f"{name} {moved}, {trials} trials: {outcome}", ITEM, HANG)
        for verdict in dict.fromkeys(one["verdict"] for one in changes):
            named = [one["what"] for one in changes if one["verdict"] == verdict]
            say(f"{verdict} with {', '.join(named)}" if kind == "criterion"
                else f"{verdict} without {', or '.join(named)}", "      ", "        ")  # fmt: skip


def _checks(checks: Sequence[Row]) -> None:
    if not checks:
        return
    print()
    show_table(
        [{**one, "numbers": _named(one["measurements"])} for one in checks],
        (
            Column("name", "assignment check"),
            Column("outcome", "outcome"),
            Column("tested", "readings", right=True),
            Column("numbers", "breaking it"),
        ),
    )
    for one in checks:
        if one["outcome"] != "untested":
            say(f"{one['name']}: {one['sentence']}", "  ", "    ")


def _named(numbers: Sequence[int], most: int = 40) -> str:
    text = ranges(numbers)
    return text if len(text) <= most else f"{text[:most].rsplit(',', 1)[0]} ..."


def _flat_diagnostics(row: Row) -> list[dict[str, Any]]:
    rows = []
    for term, found in row["terms"].items():
        for axis in AXES:
            one = found["diagnostics"][axis]
            low, high = one["interval"] or (None, None)
            rows.append(
                {
                    "electrode": row["electrode"], "term": term, "axis": axis,
                    "estimate": one["estimate"], "low": low, "high": high,
                    "between": " / ".join(one.get("between") or ()),
                    "n_specimens": one.get("n_specimens"),
                    "n_measurements": one.get("n_measurements"), "decision": one["decision"],
                }
            )  # fmt: skip
    return rows
