"""Reads the words of a recipe: numbers, amounts with units, species names, ratios, bases.

Each reader starts at the cursor, moves it past what it read and returns that, or returns
None and leaves the cursor where it was, or raises RecipeError at the character at fault.
All patterns run over a text whose spaces are collapsed and hold no nested repetition, so
reading takes time linear in the length of the text.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction

from campaign.chemistry.species import Index, Species
from campaign.chemistry.spelling import Cleaned, number_text
from campaign.errors import RecipeError

MOLAR, MOLAL, MASS, VOLUME, MOLE = "mol/L", "mol/kg", "wt%", "vol%", "mol%"
PERCENTAGES = (MASS, VOLUME, MOLE)
LEAST, MOST = 1e-9, 1000.0

EXPECT_AMOUNT = "an amount with its unit, such as '1 M', '0.5 mol/L', '3 mol/kg' or '2 wt%'"
EXPECT_NAME = "the name of a species, such as NaPF6, PC or FEC"
EXPECT_BASIS = "v/v, w/w or mol/mol"

_NUMBER = re.compile(
    r"(?P<mantissa>[0-9]+(?:[.,][0-9]+)?|\.[0-9]+)"
    r"(?:[eE](?P<e>[+-]?[0-9]+)| ?[×x*·] ?10\^(?P<times>[+-]?[0-9]+)|\^(?P<power>[+-]?[0-9]+))?"
)
_THOUSANDS = re.compile(r"[1-9][0-9]{0,2},[0-9]{3}")
_END = r"(?![A-Za-z0-9])"
_PER_VOLUME = re.compile(
    r" ?(?P<prefix>[mμu])?(?:mol|Mol|MOL)"
    r"(?:(?: ?/ ?| per )(?P<per>L|l|lit(?:er|re)|dm\^?3|m\^?3|kg|Kg)"
    r"| ?[·.*]? ?(?P<base>L|l|dm|m|kg|Kg) ?\^?-(?P<exponent>[13]))" + _END
)
_MOLARITY = re.compile(r" ?(?:(?P<prefix>[mμu])?M|molar)" + _END)
_MOLALITY = re.compile(r" ?(?:(?P<m>m)|molal)" + _END)
_PERCENT = re.compile(
    r" ?(?:(?P<before>wt|w/w|w|mass|weight|vol|v/v|volume|v|mole|mol)\.? ?-? ?%"
    r"|% ?\(? ?(?:by )?(?P<after>wt|w/w|m/m|weight|mass|vol|v/v|volume)\b\.?\)?|%)",
    re.IGNORECASE,
)
_PER = {"L": 1, "l": 1, "liter": 1, "litre": 1, "dm3": 1, "dm^3": 1, "m3": 1000, "m^3": 1000}
_BASES = {("L", "1"): 1, ("l", "1"): 1, ("dm", "3"): 1, ("m", "3"): 1000}
_PREFIX = {None: 1, "m": 1000, "μ": 1_000_000, "u": 1_000_000}
_KINDS = {
    **dict.fromkeys(("v", "vol", "volume"), "v/v"),
    **dict.fromkeys(("w", "wt", "weight", "mass", "m"), "w/w"),
    **dict.fromkeys(("mol", "mole", "moles", "molar", "n"), "mol/mol"),
}
_BASIS_START = re.compile(
    r" ?(?:by |in |in a )?%? ?(?P<word>volume|vol|v|weight|wt|w|mass|moles|mole|molar|mol|m|n)"
    r"(?![A-Za-z0-9^-])",
    re.IGNORECASE,
)
_BASIS_MORE = re.compile(
    r"\.? ?[:/] ?(?P<word>volume|vol|v|weight|wt|w|mass|mole|mol|m|n)(?![A-Za-z0-9])",
    re.IGNORECASE,
)
_BASIS_END = re.compile(r"\.?(?: ?%)?(?: (?:ratio|parts|fraction)(?: of)?)?", re.IGNORECASE)
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
class Amount:
    """An amount as read: value [unit], unit, where it began, and a remark of the reader."""

    value: Fraction
    unit: str
    start: int
    remark: str = ""


@dataclass(frozen=True)
class Name:
    """A species as named: canonical name, the species if known, where it began."""

    text: str
    species: Species | None
    start: int


class Scanner:
    """A cursor over a cleaned text; `position` counts its characters from 0."""

    def __init__(self, cleaned: Cleaned, index: Index) -> None:
        self.text = cleaned.text
        self.position = 0
        self._at = cleaned.at
        self._index = index

    def fault(self, message: str, position: int | None = None, expected: str = "") -> RecipeError:
        """Return the refusal for a fault at `position` (default: the cursor)."""
        where = self.position if position is None else position
        return RecipeError(message, self._at[min(where, len(self.text))], expected)

    def unexpected(self, expected: str, position: int | None = None) -> RecipeError:
        """Return the refusal for finding something else than `expected`."""
        where = self.position if position is None else position
        rest = self.text[where : where + 20].strip()
        found = f"found '{rest}'" if rest else "the text ends"
        if self.text[where : where + 1] == " ":
            where += 1
        return self.fault(f"{found} where {expected} was expected", where, expected)

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

    # -- numbers and amounts ---------------------------------------------------------------

    def number(self) -> Fraction | None:
        """Read a positive number, rounded to 12 significant digits."""
        start = self.position
        if self.text[start : start + 1] == "-" and self.text[start + 1 : start + 2].isdigit():
            raise self.fault("a negative amount", start, "a number above zero")
        found = _NUMBER.match(self.text, start)
        if found is None:
            return None
        return self._value(found)

    def _value(self, found: re.Match[str]) -> Fraction:
        start, mantissa, after = found.start(), found["mantissa"], found.end()
        follows = self.text[after : after + 2]
        if follows[:1] in (".", ",") and follows[1:].isdigit():
            raise self.fault("a number with two decimal marks", start, "a number such as 0.5")
        exponent = found["e"] or found["times"] or "0"
        if found["power"] is not None:
            if mantissa != "10":
                raise self.fault("a power of something other than 10", start, "10^-3 or 0.001")
            mantissa, exponent = "1", found["power"]
        if _THOUSANDS.fullmatch(mantissa):
            raise self.fault(
                f"'{mantissa}' may be a decimal comma or a thousands separator",
                start,
                f"'{mantissa.replace(',', '.')}' or '{mantissa.replace(',', '')}'",
            )
        value = float(f"{mantissa.replace(',', '.')}e{exponent}")
        if value == 0.0:
            raise self.fault("an amount of zero", start, "a number above zero")
        if not LEAST <= value <= 1e9:
            raise self.fault("a number out of range", start, f"a number from {LEAST:g} to 1e9")
        self.position = after
        return Fraction(number_text(value))

    def peek_amount(self, position: int) -> bool:
        """Return whether an amount with a unit stands at `position`."""
        found = _NUMBER.match(self.text, position)
        return found is not None and self._unit(found.end()) is not None

    def amount(self) -> Amount | None:
        """Read a number with its unit; None where no number with a unit stands."""
        start = self.position
        if self.text[start : start + 1] != "-" and not self.peek_amount(start):
            return None
        value = self.number()
        unit = None if value is None else self._unit(self.position)
        if value is None or unit is None:
            self.position = start
            return None
        name, divisor, remark, self.position = unit
        return self._checked(value / divisor, name, start, remark)

    def _checked(self, exact: Fraction, unit: str, start: int, remark: str) -> Amount:
        value = Fraction(number_text(float(exact)))
        if unit in PERCENTAGES and value >= 100:
            raise self.fault("a percentage of 100 or more", start, "a percentage below 100")
        if not LEAST <= value <= MOST:
            raise self.fault(
                f"an amount of {number_text(float(value))} {unit}",
                start,
                f"an amount from {LEAST:g} to {MOST:g} {unit}",
            )
        return Amount(value, unit, start, remark)

    def _unit(self, position: int) -> tuple[str, int, str, int] | None:
        """Return unit, divisor, remark and end of the unit at `position`; None if none."""
        text = self.text
        if found := _PERCENT.match(text, position):
            unit, remark = _percentage(found)
            return unit, 1, remark, found.end()
        if found := _PER_VOLUME.match(text, position):
            per, base = found["per"], (found["base"], found["exponent"])
            divisor = _PREFIX[found["prefix"]]
            if (per or base[0]).lower() == "kg":
                return (MOLAL, divisor, "", found.end()) if per or base[1] == "1" else None
            scale = _PER.get(per) if per else _BASES.get(base)
            return (MOLAR, divisor * scale, "", found.end()) if scale else None
        if found := _MOLARITY.match(text, position):
            return MOLAR, _PREFIX[found["prefix"]], "", found.end()
        if found := _MOLALITY.match(text, position):
            remark = "'m' is read as molality, mol/kg; write M for mol/L" if found["m"] else ""
            return MOLAL, 1, remark, found.end()
        return None

    # -- names -----------------------------------------------------------------------------

    def name(self) -> Name:
        """Read the name of a species, known or not. Raises RecipeError where none stands."""
        name = self._name_at(self.position)
        if name is None:
            raise self.unexpected(EXPECT_NAME)
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

    # -- ratios ----------------------------------------------------------------------------

    def peek_ratio(self) -> bool:
        """Return whether NUMBER:NUMBER stands at the cursor."""
        start = self.position
        first = _NUMBER.match(self.text, start)
        if first is None:
            return False
        self.position = first.end()
        found = bool(self.take_mark(":/")) and _NUMBER.match(self.text, self.position) is not None
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
            if _NUMBER.match(self.text, self.position) is None and self._starts_basis():
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


def _percentage(found: re.Match[str]) -> tuple[str, str]:
    word = (found["before"] or found["after"] or "").lower()
    if not word:
        return MASS, "a percentage without basis is read as wt%"
    if word.startswith("mol"):
        return MOLE, ""
    return (VOLUME, "") if word.startswith("v") else (MASS, "")
