"""The timeline: what each verdict was at the end of each period."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.criteria import criteria_sentence, interval_level
from campaign.present.numbers import share, significant, with_interval
from campaign.present.paragraphs import say
from campaign.present.refusals import note
from campaign.present.tables import Column, show_csv, show_json, show_table

Row = Mapping[str, Any]

def _columns(level: str) -> tuple[Column, ...]:
    return (
        Column("period", "end of"),
        Column("n", "readings", right=True),
        Column("slowest", "dominant"),
        Column("order", f"order ({level})"),
        Column("solvent", "solvents"),
        Column("Ea", "Ea/(kJ/mol)"),
        Column("verdict", "verdict"),
    )


def show_timeline(
    found: Mapping[str, Any], *, as_json: bool, as_csv: bool, stated: Mapping[str, Any]
) -> None:
    """Print the rows in the form asked for, an electrode after the other."""
    rows: Sequence[Row] = found["rows"]
    if as_json:
        show_json(found)
        return
    if as_csv:
        show_csv([_for_csv(row) for row in rows])
        return
    if not rows:
        asked = ", ".join(f"--{k.replace('_', '-')} {v}" for k, v in stated.items())
        note(f"No measurements match {asked}." if asked else "There are no measurements yet.")
        return
    columns = _columns(interval_level(found["criteria"]))
    for conclusion in found["conclusions"]:
        label = conclusion["electrode"]
        own = [_shown(row) for row in rows if row["electrode"] == label]
        say(f"{label}: {conclusion_text(conclusion)}")
        show_table(own, columns)
        print()
    what = (
        "readings by the time they were entered, with the criteria of then"
        if found["clock"] == "logged"
        else "readings by the time they were measured, with the fits and criteria of now"
    )
    say(f"Clock {found['clock']} ({found['clock_because']}): {what}.")
    say(criteria_sentence(found["criteria"]))


def conclusion_text(one: Row) -> str:
    """Return in words when an electrode's question was settled and whether it flipped."""
    if not one["ever_named"]:
        return f"not settled, now {one['verdict']}"
    flips = (
        "never flipped"
        if not one["flips"]
        else f"flipped in {', '.join(str(period) for period in one['flipped_in'])}"
    )
    if one["settled_in"] is None:
        return f"not settled, now {one['verdict']}; {flips}"
    return f"{one['verdict']}, settled {_when(one['settled_in'])}; {flips}"


def _when(period: str) -> str:
    return f"by {period.removeprefix('to ')}" if period.startswith("to ") else f"in {period}"


def _shown(row: Row) -> dict[str, Any]:
    ratio, barriers = row["solvent_ratio"], row["Ea_kJ_mol"]
    return {
        "period": row["period"],
        "n": row["n_measurements"],
        "slowest": f"{row['dominant'] or '-'} {share(row['share'])}".strip(),
        "order": with_interval(row["order"], row["order_ci"]),
        "solvent": "-" if ratio is None else f"x {significant(max(ratio, 1 / ratio), 2)}",
        "Ea": "-" if barriers is None else _range(*barriers),
        "verdict": _verdict(row),
    }


def _verdict(row: Row) -> str:
    strength = f" ({row['strength']})" if row["strength"] else ""
    mark = f": {row['mark']}" if row["mark"] else ""
    return f"{row['text']}{strength}{mark}"


def _range(low: float, high: float) -> str:
    return f"{low:.0f}" if round(low) == round(high) else f"{low:.0f} to {high:.0f}"


def _for_csv(row: Row) -> dict[str, Any]:
    flat: dict[str, Any] = {}
    for key, value in row.items():
        if key.endswith("_ci") or key == "Ea_kJ_mol":
            name = key.removesuffix("_ci")
            low, high = value or (None, None)
            flat |= {f"{name}_low": low, f"{name}_high": high}
        elif key == "decisions":
            flat |= {f"{axis}_decision": decision for axis, decision in value.items()}
        elif key == "solvent_between":
            flat[key] = " / ".join(value) if value else None
        else:
            flat[key] = value
    return flat
