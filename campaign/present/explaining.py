"""Everything behind one electrode's verdict, in the order a referee would ask."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.numbers import number, share, with_interval
from campaign.present.summary import AXES, barriers
from campaign.present.tables import Column, show_json, show_table

Row = Mapping[str, Any]


def show_explanation(row: Row, *, as_json: bool) -> None:
    """Print verdict, budget, diagnostics, candidates, checks and robustness."""
    if as_json:
        show_json(row)
        return
    strength = f" ({row['strength']})" if row["strength"] else ""
    print(f"{row['electrode']}: {row['text']}{strength}")
    print(f"{row['n_specimens']} specimens, {row['n_measurements']} measurements")
    _list("Because", row["because"])
    _list("Missing", row["missing"])
    _budget(row)
    _diagnostics("Diagnostics of the dominant term", row["diagnostics"])
    for term, found in row["terms"].items():
        _candidates(term, found)
    _checks(row["checks"])
    _robustness(row["robustness"])
    _list("What would change the verdict", row["would_change"])
    _list("Notes", row["warnings"])


def _list(title: str, lines: Sequence[str]) -> None:
    if lines:
        print(f"\n{title}")
        for line in lines:
            print(f"  - {line}")


def _budget(row: Row) -> None:
    budgets = row["budget_by_time"]
    if not budgets:
        return
    condition = budgets[0]["condition"]
    potential = (
        ""
        if condition["potential_V"] is None
        else f", {condition['potential_V']:g} V vs {condition['reference'] or 'reference not stated'}"
    )
    print()
    terms = [term for term in ("R_sl", "R_ct", "R_lat", "diffusion") if term in budgets[0]]
    columns = (
        Column("time_s", "t/s", right=True),
        *(Column(term, term, share, right=True) for term in terms),
        Column("R_el_ohm_cm2", "R_el/(ohm cm2)", right=True),
    )
    show_table(
        budgets,
        columns,
        f"Shares at {condition['electrolyte']}, {number(condition['temperature_C'])} degC"
        f"{potential}, after a current step",
    )
    for crossing in row["budget"].get("crossings", ()):
        print(
            f"  {crossing['after']} overtakes {crossing['before']} at "
            f"{number(crossing['time_s'], 2)} s"
        )


def _diagnostics(title: str, diagnostics: Mapping[str, Row]) -> None:
    rows = []
    for axis in AXES:
        one = diagnostics[axis]
        between = one.get("between")
        rows.append(
            {
                "axis": axis,
                "estimate": with_interval(one["estimate"], one["interval"])
                if one["estimate"] is not None
                else "-",
                "what": _what(axis, between),
                "n": one.get("n_specimens"),
                "decision": one["decision"],
            }
        )
    print()
    show_table(
        rows,
        (
            Column("axis", "axis"),
            Column("what", "estimate of"),
            Column("estimate", "value (95 %)"),
            Column("n", "specimens", right=True),
            Column("decision", "decision"),
        ),
        title,
    )
    shown = barriers(diagnostics["barrier"])
    if shown != "-":
        print(f"  Ea (form ln R) by electrolyte: {shown} kJ/mol")


def _what(axis: str, between: Sequence[str] | None) -> str:
    if axis == "concentration":
        return "order"
    if not between:
        return ""
    kind = "Ea difference, kJ/mol" if axis == "barrier" else "factor"
    return f"{kind}: {between[0]} / {between[1]}"


def _candidates(term: str, found: Row) -> None:
    print(f"\nCandidate steps for {term} (alone: {found['verdict']})")
    for one in found["candidates"]:
        print(f"  {one['step']} [{one['control']}]: {one['status']}")
        for text in one["for"]:
            print(f"    for      {text}")
        for text in one["against"]:
            print(f"    against  {text}")


def _checks(checks: Sequence[Row]) -> None:
    if not checks:
        return
    rows = [
        {
            **one,
            "numbers": ", ".join(map(str, one["measurements"][:8]))
            + (" ..." if len(one["measurements"]) > 8 else ""),
        }
        for one in checks
    ]
    print()
    show_table(
        rows,
        (
            Column("name", "assignment check"),
            Column("outcome", "outcome"),
            Column("tested", "tested", right=True),
            Column("sentence", "finding"),
            Column("numbers", "measurements"),
        ),
    )


def _robustness(found: Row | None) -> None:
    if found is None:
        return
    print(f"\nRobustness: {len(found['tried'])} trials, one thing changed in each")
    if not found["changing"]:
        print("  none changes the verdict")
    for one in found["changing"]:
        print(f"  {one['kind']} {one['what']}: the verdict would be {one['verdict']}")
    for one in found["influences"][:5]:
        print(
            f"  specimen {one['specimen']} moves {one['axis']} by {one['shift']:+.1f} standard errors"
        )
