"""Durations as people write them: '10 s', '0.5 h', '200ms'; a bare number is in seconds."""

from __future__ import annotations

import math
import re
from typing import Final

from campaign.errors import refused

UNITS_s: Final = {
    "us": 1e-6, "µs": 1e-6, "μs": 1e-6, "ms": 1e-3, "s": 1.0, "min": 60.0, "h": 3600.0,
    "d": 86400.0,
}  # fmt: skip
EXPECTED: Final = "a number with ms, s, min, h or d, such as 0.1s or 5min"

LONGEST_s: Final = 1e9
SHORTEST_s: Final = 1e-6

_FORM = re.compile(r"([+]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*([^\d\s]*)", re.ASCII)


def read_duration(text: str, name: str) -> float:
    """Return a duration [s] above zero; `name` says in a refusal where it was written.

    Raises Refused for anything else, and for durations under 1 us or over 1e9 s.
    """
    match = _FORM.fullmatch(text.strip())
    unit = match.group(2) if match else ""
    if match is None or (unit and unit not in UNITS_s):
        raise refused(
            f"{name} is '{text.strip()}', which is not a duration; write {EXPECTED}",
            column=name, value=text.strip(), expected=EXPECTED,
        )  # fmt: skip
    seconds = float(match.group(1)) * UNITS_s.get(unit, 1.0)
    if not (math.isfinite(seconds) and SHORTEST_s <= seconds <= LONGEST_s):
        raise refused(
            f"{name} is '{text.strip()}', outside 1e-6 to 1e9 s; a response of an electrode "
            "within that range is expected",
            column=name, value=text.strip(), expected="1e-6 to 1e9 s",
        )  # fmt: skip
    return seconds


def read_durations(text: str, name: str) -> tuple[float, ...]:
    """Return comma-separated durations [s] in rising order, each once. Raises Refused."""
    parts = [part for part in re.split(r"[,;]", text) if part.strip()]
    if not parts:
        raise refused(
            f"{name} names no time; write {EXPECTED}, separated by commas",
            column=name, value=text, expected=EXPECTED,
        )  # fmt: skip
    return tuple(sorted({read_duration(part, name) for part in parts}))
