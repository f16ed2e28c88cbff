"""What became of dropped files, a line each."""

from __future__ import annotations

from campaign.ledger.watching import Taken
from campaign.present.tables import show_json

SHOWN = 3


def show_taken(one: Taken, *, as_json: bool) -> None:
    """Print what became of one file; with JSON, one object a line."""
    if as_json:
        found = {
            "file": one.name,
            "moved_to": str(one.moved_to),
            "outcome": one.outcome.as_dict() if one.outcome is not None else None,
            "errors": [fault.as_dict() for fault in one.faults],
        }
        show_json(found)
        return
    if one.outcome is not None:
        print(
            f"{one.name}: {one.outcome.measurements} added, {one.outcome.refits} refitted, "
            f"{one.outcome.unchanged} unchanged; moved to {one.moved_to}", flush=True,
        )  # fmt: skip
        return
    print(f"{one.name}: faulty; moved to {one.moved_to}, the message beside it", flush=True)
    for fault in one.faults[:SHOWN]:
        print(f"  {fault.sentence()}", flush=True)
    left = len(one.faults) - SHOWN
    if left > 0:
        print(f"  and {left} more", flush=True)
