"""What to build and measure next, with reasons and cautions, for a person at the bench."""

from __future__ import annotations

import textwrap
from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.refusals import note
from campaign.present.tables import WIDEST, show_csv, show_json

Row = Mapping[str, Any]


def show_next(
    found: Mapping[str, Any],
    *,
    as_json: bool,
    as_csv: bool = False,
    stated: Mapping[str, Any] | None = None,
) -> None:
    """Print proposals in rank order in the form asked for."""
    if as_json:
        show_json(found)
        return
    rows: Sequence[Row] = found["rows"]
    if as_csv:
        show_csv([_for_csv(row) for row in rows])
        return
    if not found["electrodes"]:
        note("No measurements match." if stated else "There are no measurements yet.")
        return
    for number, row in enumerate(rows, start=1):
        _line(number, row)
    _settled(found["electrodes"], bool(rows))
    if rows and found.get("budget") is not None:
        print(f"Together {found['hours_together']:g} h of {found['budget']:g} h.\n")
    _cautions(rows)
    levels = sorted({row["error_probability"] for row in rows if row["chance"] is not None})
    if levels:
        shown = " or ".join(f"{1 - one:.4g}" for one in levels)
        _wrapped(f"Decided means: at a confidence of {shown}, as eliminating a step asks for.")
    costs = "; ".join(f"{name} {hours:g}" for name, hours in found["costs"].items())
    _wrapped(
        f"Bench hours: {costs}. Chance asked for: {found['chance_asked']:g}; seed "
        f"{found['seed']}."
    )


def _wrapped(text: str, first: str = "", rest: str = "") -> None:
    print(
        textwrap.fill(
            text, WIDEST, initial_indent=first, subsequent_indent=rest, break_long_words=False,
            break_on_hyphens=False,
        )
    )  # fmt: skip


def _line(number: int, row: Row) -> None:
    label = f"{number:>2}. "
    of = "" if row["axis"] == "largest term" else f" of {row['response']}"
    print(f"{label}{row['electrode']}: {row['axis']}{of}")
    _wrapped(row["why"], "    ", "    ")
    answers = {word: verdict for word, verdict in row["outcomes"].items() if verdict}
    if len(set(answers.values())) > 1:
        said = ", ".join(f"{word}: {verdict}" for word, verdict in answers.items())
        _wrapped(f"the verdict would be, if {said}", "    ", "      ")
    for text in row["assumed"]:
        _wrapped(f"assumed: {text}", "    ", "      ")
    print()


def _settled(electrodes: Sequence[Row], any_rows: bool) -> None:
    quiet = [one for one in electrodes if not one["proposals"]]
    for one in quiet:
        strength = f", {one['strength']}" if one["strength"] else ""
        _wrapped(
            f"{one['electrode']}: {one['verdict']}{strength}; nothing open here could change that",
            "", "  ",
        )  # fmt: skip
    if quiet:
        print()
    if not any_rows and len(quiet) < len(electrodes):
        _wrapped("Nothing fits the hours.")
        print()


def _cautions(rows: Sequence[Row]) -> None:
    """Print each caution once, with the numbers of the proposals it goes with."""
    from campaign.chemistry.cautions import CLOSING

    concerned: dict[str, list[int]] = {}
    for number, row in enumerate(rows, start=1):
        for text in row["cautions"]:
            concerned.setdefault(text, []).append(number)
    if not concerned:
        return
    print("Caution")
    # who decides comes last
    for text, numbers in sorted(concerned.items(), key=lambda one: one[0] == CLOSING):
        which = "" if len(numbers) == len(rows) else f"[{', '.join(map(str, numbers))}] "
        _wrapped(f"{which}{text}", "  ", "    ")
    print()


def _for_csv(row: Row) -> dict[str, Any]:
    now, expected = row["interval_now"] or (None, None), row["interval_expected"] or (None, None)
    return {
        "electrode": row["electrode"],
        "axis": row["axis"],
        "response": row["response"],
        "add": "; ".join(f"{one['cells']} x {one['electrolyte']}" for one in row["add"]),
        "specimens": row["specimens"],
        "hours": row["hours"],
        "interval_of": row["interval_of"],
        "now_low": now[0],
        "now_high": now[1],
        "expected_low": expected[0],
        "expected_high": expected[1],
        "chance": row["chance"],
        "settles": row["settles"],
        "why": row["why"],
        "cautions": " ".join(row["cautions"]),
    }
