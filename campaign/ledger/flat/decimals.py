"""Which decimal mark a file uses: one mark a file, and never a guess.

A mark is taken where it can only be read one way. A file in which every number could as well
have thousands separators is refused until the user says.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from campaign.errors import Fault
from campaign.ledger.flat.values import BOUNDS

_THOUSANDS = {
    mark: re.compile(rf"[+-]?\d{{1,3}}(?:{re.escape(mark)}\d{{3}})+", re.ASCII) for mark in ".,"
}
EXPECTED = "one decimal mark in the whole file"


@dataclass
class MarkFinder:
    """Collects the marks of a file's numbers; `place` is (line, column, text)."""

    file: str
    first: dict[str, tuple[int, str, str]] = field(default_factory=dict)
    only_thousands: dict[str, bool] = field(default_factory=lambda: {".": True, ",": True})

    def see(self, line: int, name: str, factor: float, offset: float, text: str) -> None:
        """Take note of one number's text in a column with its scale."""
        for mark in ".,":
            if mark not in text:
                continue
            if mark not in self.first:
                self.first[mark] = (line, name, text)
            if self.only_thousands[mark] and not _may_be_thousands(
                mark, name, factor, offset, text
            ):
                self.only_thousands[mark] = False

    def decide(self) -> tuple[str, list[Fault]]:
        """Return the decimal mark, and a fault where there is not exactly one reading."""
        if len(self.first) == 2:
            point, comma = self.first["."], self.first[","]
            return ".", [
                Fault(
                    f"this file has decimal points ('{point[2]}' in line {point[0]}, column "
                    f"{point[1]}) and commas ('{comma[2]}' in line {comma[0]}, column "
                    f"{comma[1]}); write every number with one mark and without thousands "
                    "separators, or say which with --decimal",
                    self.file,
                    comma[0],
                    comma[1],
                    comma[2],
                    EXPECTED,
                )
            ]
        for mark, (line, name, text) in self.first.items():
            if not self.only_thousands[mark]:
                return mark, []
            return mark, [
                Fault(
                    f"'{text}' could have a decimal mark or thousands separators, and so could "
                    f"every number of this file; say which with --decimal '{mark}' (decimal) or "
                    f"--decimal '{_other(mark)}' (thousands separators, to be removed)",
                    self.file,
                    line,
                    name,
                    text,
                    EXPECTED,
                )
            ]
        return ".", []


def _other(mark: str) -> str:
    return "," if mark == "." else "."


def _may_be_thousands(mark: str, name: str, factor: float, offset: float, text: str) -> bool:
    """Return whether a text, read with thousands separators, is still in its column's range."""
    if not _THOUSANDS[mark].fullmatch(text):
        return False
    bounds = BOUNDS.get(name)
    if bounds is None:
        return True
    number = float(text.replace(mark, "")) * factor + offset
    low = number <= bounds.low if bounds.above else number < bounds.low
    return not (low or number > bounds.high)


