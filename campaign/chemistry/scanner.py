"""Reads the words of a recipe: numbers, amounts with units, species names, ratios, bases.

Each reader starts at the cursor, moves it past what it read and returns that, or returns
None and leaves the cursor where it was, or raises RecipeError at the character at fault.
All patterns run over a text whose spaces are collapsed and hold no nested repetition, so
reading takes time linear in the length of the text.
"""

from __future__ import annotations

import re
from fractions import Fraction

from campaign.chemistry.amounts import NUMBER
from campaign.chemistry.naming import NameReader

EXPECT_BASIS = "v/v, w/w or mol/mol"


_KINDS = {
    **dict.fromkeys(("v", "vol", "volume"), "v/v"),
    **dict.fromkeys(("w", "wt", "weight", "mass", "m"), "w/w"),
    **dict.fromkeys(("mol", "mole", "moles", "molar"), "mol/mol"),
}
_BASIS_START = re.compile(
    r" ?(?:by |in |in a )?%? ?(?P<word>volume|vol|v|weight|wt|w|mass|moles|mole|molar|mol|m)"
    r"(?![A-Za-z0-9^-])",
    re.IGNORECASE,
)
_BASIS_MORE = re.compile(
    r"\.? ?[:/] ?(?P<word>volume|vol|v|weight|wt|w|mass|mole|mol|m)(?![A-Za-z0-9])",
    re.IGNORECASE,
)
_BASIS_END = re.compile(r"\.?(?: ?%)?(?: (?:ratio|parts|fraction)(?: of)?)?", re.IGNORECASE)


class Scanner(NameReader):
    """Reads everything a recipe is made of."""

    def peek_ratio(self) -> bool:
        """Return whether NUMBER:NUMBER stands at the cursor."""
        start = self.position
        first = NUMBER.match(self.text, start)
        if first is None:
            return False
        self.position = first.end()
        found = bool(self.take_mark(":/")) and NUMBER.match(self.text, self.position) is not None
        self.position = start
        return found

    def ratio(self) -> list[Fraction]:
        """Read numbers joined by ':' or '/'. Raises RecipeError where no number stands."""
        first = self.number()
        if first is None:
            raise self.unexpected("a ratio such as 1:1")
        parts = [first]
        while True:
            before = self.position
            if not self.take_mark(":/"):
                if len(parts) < 2:
                    raise self.unexpected("a ratio such as 1:1")
                return parts
            if NUMBER.match(self.text, self.position) is None and self._starts_basis():
                self.position = before
                return parts
            part = self.number()
            if part is None:
                raise self.unexpected("the next number of the ratio")
            parts.append(part)

    def _starts_basis(self) -> bool:
        return _BASIS_START.match(self.text, self.position) is not None

    def basis(self) -> str | None:
        """Read what a ratio counts: 'v/v', 'w/w', 'mol/mol', 'by volume', 'wt%' ..."""
        found = self.take(_BASIS_START)
        if found is None:
            return None
        kind = _KINDS[found["word"].lower()]
        while more := _BASIS_MORE.match(self.text, self.position):
            if _KINDS[more["word"].lower()] != kind:
                raise self.fault("a ratio on two bases", more.start("word"), EXPECT_BASIS)
            self.position = more.end()
        self.take(_BASIS_END)
        return kind
