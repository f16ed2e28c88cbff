"""Reads numbers and amounts with their units, as papers write them."""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction

from campaign.chemistry.cursor import Cursor
from campaign.chemistry.spelling import number_text

MOLAR, MOLAL, MASS, VOLUME, MOLE = "mol/L", "mol/kg", "wt%", "vol%", "mol%"
PERCENTAGES = (MASS, VOLUME, MOLE)
LEAST, MOST = 1e-9, 1000.0

EXPECT_AMOUNT = "an amount with its unit, such as '1 M', '0.5 mol/L', '3 mol/kg' or '2 wt%'"

NUMBER = re.compile(
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
_PPM = re.compile(r" ?ppm" + _END)
_PERCENT = re.compile(
    r" ?(?:(?P<before>wt|w/w|w|mass|weight|vol|v/v|volume|v|mole|mol)\.? ?-? ?%"
    r"|% ?\(? ?(?:by )?(?P<after>wt|w/w|m/m|weight|mass|vol|v/v|volume)\b\.?\)?|%)",
    re.IGNORECASE,
)
_PER = {"L": 1, "l": 1, "liter": 1, "litre": 1, "dm3": 1, "dm^3": 1, "m3": 1000, "m^3": 1000}
_BASES = {("L", "1"): 1, ("l", "1"): 1, ("dm", "3"): 1, ("m", "3"): 1000}
_PREFIX = {None: 1, "m": 1000, "μ": 1_000_000, "u": 1_000_000}


@dataclass(frozen=True)
class Amount:
    """An amount as read: value [unit], unit, where it began, and a remark of the reader."""

    value: Fraction
    unit: str
    start: int
    remark: str = ""


class AmountReader(Cursor):
    """Reads numbers and amounts at the cursor."""

    def number(self) -> Fraction | None:
        """Read a positive number, rounded to 12 significant digits."""
        start = self.position
        if self.text[start : start + 1] == "-" and self.text[start + 1 : start + 2].isdigit():
            raise self.fault("a negative amount", start, "a number above zero")
        found = NUMBER.match(self.text, start)
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
        found = NUMBER.match(self.text, position)
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
        if found := _PPM.match(text, position):
            return MASS, 10_000, "ppm is read by mass", found.end()
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


def _percentage(found: re.Match[str]) -> tuple[str, str]:
    word = (found["before"] or found["after"] or "").lower()
    if not word:
        return MASS, "a percentage without basis is read as wt%"
    if word.startswith("mol"):
        return MOLE, ""
    return (VOLUME, "") if word.startswith("v") else (MASS, "")
