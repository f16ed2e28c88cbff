"""A cursor over a cleaned text that knows where each character stood as typed."""

from __future__ import annotations

import re

from campaign.chemistry.spelling import Cleaned
from campaign.errors import RecipeError


class Cursor:
    """A cursor over a cleaned text; `position` counts its characters from 0."""

    def __init__(self, cleaned: Cleaned) -> None:
        self.text = cleaned.text
        self.position = 0
        self._at = cleaned.at

    def fault(self, message: str, position: int | None = None, expected: str = "") -> RecipeError:
        """Return the refusal for a fault at `position` (default: the cursor)."""
        where = self.position if position is None else position
        full = f"{message}; expected {expected}" if expected else message
        return RecipeError(full, self._at[min(where, len(self.text))], expected)

    def unexpected(self, expected: str, position: int | None = None) -> RecipeError:
        """Return the refusal for finding something other than `expected`."""
        where = self.position if position is None else position
        rest = self.text[where : where + 20].strip()
        found = f"found '{rest}'" if rest else "the text ends too early"
        if self.text[where : where + 1] == " ":
            where += 1
        return self.fault(found, where, expected)

    def at_end(self) -> bool:
        """Return whether everything was read."""
        return self.position >= len(self.text)

    def skip_space(self) -> None:
        """Move past a space."""
        if self.text.startswith(" ", self.position):
            self.position += 1

    def take(self, pattern: re.Pattern[str]) -> re.Match[str] | None:
        """Read what matches the pattern at the cursor."""
        found = pattern.match(self.text, self.position)
        if found is not None:
            self.position = found.end()
        return found

    def take_mark(self, marks: str) -> str:
        """Read one of the characters of `marks`, with a space on either side; '' if none."""
        at = self.position + (self.text[self.position : self.position + 1] == " ")
        mark = self.text[at : at + 1]
        if not mark or mark not in marks:
            return ""
        self.position = at + 1
        self.skip_space()
        return mark
