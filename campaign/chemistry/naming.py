"""Reads the names of species, known or not, with brackets, commas and hyphens in them."""

from __future__ import annotations

import re
from dataclasses import dataclass

from campaign.chemistry.amounts import NUMBER, AmountReader
from campaign.chemistry.species import Index, Species
from campaign.chemistry.spelling import Cleaned

EXPECT_NAME_OR_AMOUNT = "the name of a species, or an amount with its unit such as 2 wt%"
EXPECT_NAME = "the name of a species, such as NaPF6, PC or FEC"

_PAREN_RATIO = re.compile(
    r"\( ?(?:[0-9.]|(?:by |in )?(?:v|vol|volume|w|wt|weight|mass|m|aq)\b)", re.IGNORECASE
)
_NOT_A_NAME = frozenset(
    ("in", "with", "and", "by", "plus", "containing", "dissolved", "wt", "vol", "v", "w", "mol",
     "mass", "weight", "volume", "ratio", "additive", "additives", "as", "aq", "a", "an", "of",
     "mixture", "blend", "per", "mixed")
)  # fmt: skip
_HYDRATE = re.compile(r" ?[·*.] ?(?:[0-9]{1,2}(?:\.[0-9])? ?)?H2O(?![A-Za-z0-9])")
_NUMBERED_NAME = re.compile(r"[0-9]{1,2}(?:,[0-9]{1,2})*-")


@dataclass(frozen=True)
class Name:
    """A species as named: canonical name, the species if known, where it began."""

    text: str
    species: Species | None
    start: int


class NameReader(AmountReader):
    """Reads names of species at the cursor."""

    def __init__(self, cleaned: Cleaned, index: Index) -> None:
        super().__init__(cleaned)
        self._index = index

    def name(self) -> Name:
        """Read the name of a species, known or not. Raises RecipeError where none stands."""
        name = self._name_at(self.position)
        if name is None:
            number = NUMBER.match(self.text, self.position)
            raise self.unexpected(EXPECT_NAME if number is None else EXPECT_NAME_OR_AMOUNT)
        found, self.position = name
        if found.species is not None:
            self._explanation(found)
        return found

    def name_then_amount(self, position: int) -> bool:
        """Return whether 'NAME (AMOUNT)' stands at `position`."""
        name = self._name_at(position)
        if name is None:
            return False
        at = name[1] + (self.text[name[1] : name[1] + 1] == " ")
        if self.text[at : at + 1] != "(":
            return False
        return self.peek_amount(at + 1 + (self.text[at + 1 : at + 2] == " "))

    def hyphen_joins(self) -> bool:
        """Return whether '-' at the cursor joins two known solvents, as in EC-DMC."""
        if self.text[self.position : self.position + 1] != "-":
            return False
        return self._index.longest_at(self.text, self.position + 1) is not None

    def take_hydrate(self) -> bool:
        """Read water of crystallisation such as ·7H2O."""
        return self.take(_HYDRATE) is not None

    def _name_at(self, start: int) -> tuple[Name, int] | None:
        known = self._index.longest_at(self.text, start)
        if known is not None:
            species, end = known
            glued = self.text[end : end + 1] == "-" and self.text[end + 1 : end + 2].isalnum()
            if not glued or self._index.longest_at(self.text, end + 1) is not None:
                return Name(species.name, species, start), end
        return self._unknown(start)

    def _unknown(self, start: int) -> tuple[Name, int] | None:
        end = self._word_end(start)
        word = self.text[start:end]
        if len(word) < 2 or not any(c.isalpha() for c in word) or word.lower() in _NOT_A_NAME:
            return None
        if word[0].isdigit() and not _NUMBERED_NAME.match(word):
            return None
        while self.text[end : end + 1] == " ":
            after = self._word_end(end + 1)
            word = self.text[end + 1 : after]
            plain = len(word) > 1 and word[0].isalpha() and word.lower() not in _NOT_A_NAME
            if not plain or self._index.longest_at(self.text, end + 1) is not None:
                break
            end = after
        return Name(self.text[start:end], None, start), end

    def _word_end(self, start: int) -> int:
        """Return where a word of an unknown name ends; brackets in it must be closed."""
        text, depth, opened, end = self.text, 0, start, start
        while end < len(text):
            character = text[end]
            if character == "(":
                if depth == 0 and not self._bracket_in_name(start, end):
                    break
                opened = opened if depth else end
                depth += 1
            elif character == ")":
                if depth == 0:
                    break
                depth -= 1
            elif not self._in_word(start, end):
                break
            end += 1
        if depth:
            raise self.fault("a bracket that is not closed", opened, "a closing bracket ')'")
        while end > start and text[end - 1] in "-'_·.":
            end -= 1
        return end

    def _bracket_in_name(self, start: int, at: int) -> bool:
        follows = self.text[at + 1 : at + 2]
        if at > start and _PAREN_RATIO.match(self.text, at):
            return False
        return follows.isalpha()

    def _in_word(self, start: int, at: int) -> bool:
        character = self.text[at]
        if character.isalnum() or character in "[]":
            return True
        before, after = self.text[at - 1 : at], self.text[at + 1 : at + 2]
        if at == start:
            return False
        if character == ",":
            return before.isdigit() and after.isdigit()
        if character in ".·":
            return before.isalnum() and after.isalnum()
        return character in "-'_"

    def _explanation(self, name: Name) -> None:
        """Read a second name in brackets, as in 'ethylene carbonate (EC)'."""
        at = self.position + (self.text[self.position : self.position + 1] == " ")
        if self.text[at : at + 1] != "(":
            return
        inner = self._index.longest_at(self.text, at + 1)
        if inner is None or self.text[inner[1] : inner[1] + 1] != ")":
            return
        if inner[0].name != name.text:
            raise self.fault(
                f"'{inner[0].name}' in brackets is not another name of {name.text}",
                at + 1,
                "one name, or a second name of the same species",
            )
        self.position = inner[1] + 1
