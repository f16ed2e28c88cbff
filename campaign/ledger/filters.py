"""What a query is asked to look at."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any

from campaign.errors import refused


@dataclass(frozen=True)
class Range:
    """A closed range; an open end is infinite."""

    low: float
    high: float


@dataclass(frozen=True)
class Filter:
    """Conditions of a query; None or '' asks for everything.

    salt, solvents, additives: canonical keys. potential [V] as measured, temperature [degC].
    since, until: UTC instants of the measurement in the fixed-width form. as_of: the number of
    a journal entry, the state after which is meant.
    """

    electrode: str | None = None
    salt: str | None = None
    solvents: str | None = None
    additives: str | None = None
    potential: Range | None = None
    temperature: Range | None = None
    since: str | None = None
    until: str | None = None
    as_of: int | None = None

    def stated(self) -> dict[str, Any]:
        """Return the conditions that are set, by name."""
        return {
            item.name: getattr(self, item.name)
            for item in fields(self)
            if getattr(self, item.name) is not None
        }


def read_range(text: str, name: str) -> Range:
    """Return the range a user wrote as LOW:HIGH, either end left out for open.

    Raises Refused for anything else.
    """
    parts = text.split(":")
    try:
        if len(parts) != 2 or not (parts[0].strip() or parts[1].strip()):
            raise ValueError
        low = float(parts[0]) if parts[0].strip() else float("-inf")
        high = float(parts[1]) if parts[1].strip() else float("inf")
    except ValueError:
        raise _bad_range(text, name) from None
    if not low <= high:
        raise _bad_range(text, name)
    return Range(low, high)


def _bad_range(text: str, name: str) -> Exception:
    return refused(
        f"--{name} is '{text}', which is not a range; write LOW:HIGH such as 3.2:3.6, with "
        "either end left out for open",
        column=name,
        value=text,
        expected="LOW:HIGH",
    )
