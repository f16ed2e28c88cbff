"""How a refusal is shown: sentences on standard error, JSON on standard output."""

from __future__ import annotations

import sys

from campaign.errors import Refused

MOST = 50


def show_refusal(error: Refused, as_json: bool) -> None:
    """Print every fault of a refusal, and that nothing was written."""
    if as_json:
        from campaign.present.tables import show_json

        show_json({"errors": [fault.as_dict() for fault in error.faults]})
    for fault in error.faults[:MOST]:
        print(f"campaign: {visible(fault.sentence())}", file=sys.stderr)
    left = len(error.faults) - MOST
    if left > 0:
        print(f"campaign: and {left} more of the kind; all are in --json", file=sys.stderr)


def note(message: str) -> None:
    """Print a remark for a person on standard error."""
    print(visible(message), file=sys.stderr)


def visible(text: str) -> str:
    """Return text in which characters that steer a terminal are spelt out."""
    return "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in text)
