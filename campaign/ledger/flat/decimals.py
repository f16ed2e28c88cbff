"""Which decimal mark a file uses: one mark a file, and never a guess.

A mark is taken where it can only be read one way. A file in which every number could as well
have thousands separators is refused until the user says.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from campaign.errors import Fault
from campaign.ledger.flat.headers import Header
from campaign.ledger.flat.values import BOUNDS, looks_numeric

_THOUSANDS = {
    mark: re.compile(rf"[+-]?[1-9]\d{{0,2}}(?:{re.escape(mark)}\d{{3}})+", re.ASCII)
    for mark in ".,"
}
EXPECTED = "one decimal mark in the whole file"


@dataclass
class MarkFinder:
    """Collects the marks of a file's numbers, until one of them is beyond doubt.

    first: where each mark was met first, as (line, column, text).
    """

    file: str
    first: dict[str, tuple[int, str, str]] = field(default_factory=dict)
    only_thousands: dict[str, bool] = field(default_factory=lambda: {".": True, ",": True})

    @property
    def settled(self) -> bool:
        """Whether one mark was met that can only be a decimal mark, or both were met."""
        return len(self.first) == 2 or any(not self.only_thousands[mark] for mark in self.first)

    def see(self, line: int, header: Header, text: str) -> None:
        """Take note of one number's text in a column."""
        if not looks_numeric(text):
            return
        for mark in ".,":
            if mark not in text:
                continue
            self.first.setdefault(mark, (line, header.written, text))
            if self.only_thousands[mark] and not _may_be_thousands(mark, header, text):
                self.only_thousands[mark] = False

    def decide(self) -> tuple[str | None, list[Fault]]:
        """Return the decimal mark; None, and a fault, where there is not exactly one reading."""
        if len(self.first) == 2:
            point, comma = self.first["."], self.first[","]
            return None, [
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
            return None, [
                Fault(
                    f"'{text}' could be read with a decimal mark or with thousands separators, "
                    f"and so could every number of this file; if it is a decimal mark say "
                    f"--decimal '{mark}', else take the separators out",
                    self.file,
                    line,
                    name,
                    text,
                    EXPECTED,
                )
            ]
        return ".", []


def _may_be_thousands(mark: str, header: Header, text: str) -> bool:
    """Return whether a text, read with thousands separators, is still in its column's range."""
    if not _THOUSANDS[mark].fullmatch(text):
        return False
    bounds = BOUNDS.get(header.name)
    if bounds is None:
        return True
    number = float(text.replace(mark, "")) * header.scale.factor + header.scale.offset
    low = number <= bounds.low if bounds.above else number < bounds.low
    return not (low or number > bounds.high)
