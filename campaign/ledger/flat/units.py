"""Units in headers: quantity/unit notation (IUPAC Green Book; ISO 80000-1).

The usual units are in a small table; anything else is asked of pint, which is loaded then.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache
from typing import Any


@dataclass(frozen=True)
class Scale:
    """How a column's numbers become canonical: stored = factor * number + offset.

    per_area: the number is already per geometric area, so it still has to be divided
    (resistances) or multiplied (CPE admittances) by the cell's area. relative: a standard
    error in per cent of its value.
    """

    factor: float = 1.0
    offset: float = 0.0
    per_area: bool = False
    relative: bool = False


_OHM = {"ohm": 1.0, "Ω": 1.0, "kohm": 1e3, "kΩ": 1e3, "mohm": 1e-3, "mΩ": 1e-3, "Mohm": 1e6,
        "MΩ": 1e6}  # fmt: skip

# Canonical dimension -> {unit: factor}; temperature is handled by itself.
_TABLE: dict[str, dict[str, float]] = {
    "V": {"V": 1.0, "mV": 1e-3, "uV": 1e-6},
    "mV": {"mV": 1.0, "V": 1e3, "uV": 1e-3},
    "cm2": {"cm2": 1.0, "mm2": 1e-2, "m2": 1e4, "um2": 1e-8},
    "h": {"h": 1.0, "min": 1 / 60, "s": 1 / 3600, "d": 24.0},
    "Hz": {"Hz": 1.0, "kHz": 1e3, "MHz": 1e6, "mHz": 1e-3, "uHz": 1e-6},
    "ohm": _OHM,
    "1": {"1": 1.0, "%": 1e-2},
}

_PINT = {
    "V": "volt",
    "mV": "millivolt",
    "cm2": "centimeter**2",
    "h": "hour",
    "Hz": "hertz",
    "ohm": "ohm",
    "ohm s^-1/2": "ohm/second**0.5",
}

_PREFIX = {"": 1.0, "m": 1e-3, "u": 1e-6, "n": 1e-9, "p": 1e-12}
_DOT = r"\s?\*?\s?"
_PER_CM2 = rf"(?:{_DOT}cm\^?-2|\s?/\s?cm\^?2)"
_ADMITTANCE = re.compile(
    rf"(?:([munp]?)S|(?:ohm|Ω)\^?-1|1/(?:ohm|Ω)|([munp]?)F)({_PER_CM2})?"
    rf"{_DOT}s\^?(?:\(?(n)\)?|\(?(n ?- ?1)\)?)({_PER_CM2})?"
)
_PLAIN_FARAD = re.compile(r"([munp]?)F")


class UnitError(ValueError):
    """A unit cannot be read, or measures something else."""


_SPELLINGS = (
    ("μ", "u"), ("·", " "), ("⋅", " "), ("×", " "), ("−", "-"), ("–", "-"), ("⁄", "/"),
    ("**", "^"), ("degC", "°C"), ("oC", "°C"), ("Ohm", "ohm"), ("OHM", "ohm"), ("ohms", "ohm"),
    ("√s", "s^(1/2)"), ("sqrt(s)", "s^(1/2)"),
)  # fmt: skip


def tidy(unit: str) -> str:
    """Return a unit (already NFKC) in one spelling: Ω for ohm signs, u for micro, no outer ()."""
    text = unit.strip()
    while text.startswith("(") and text.endswith(")"):
        text = text[1:-1].strip()
    for written, meant in _SPELLINGS:
        text = text.replace(written, meant)
    text = re.sub(r"(?<=[A-Za-zΩ0-9)])[.-](?=[A-Za-zΩ])", " ", text)  # ohm-cm2, ohm.cm2
    return " ".join(text.split())


@lru_cache(maxsize=256)
def scale(unit: str, canonical: str) -> Scale:
    """Return how numbers in `unit` become numbers in the canonical unit.

    Raises UnitError where the unit is unknown or of another dimension.
    """
    text = tidy(unit)
    if canonical == "K":
        return _temperature(text)
    if canonical == "S s^n":
        return _admittance(text)
    if canonical == "ohm s^-1/2":
        return _warburg(text)
    known = _TABLE[canonical]
    plain = text.replace("^", "")
    if plain in known:
        return Scale(known[plain])
    if canonical == "ohm":
        return _resistance(text)
    return Scale(_by_pint(text, canonical))


def _temperature(text: str) -> Scale:
    if text in ("K", "kelvin"):
        return Scale()
    if text in ("°C", "C", "celsius", "Celsius", "deg C"):
        return Scale(1.0, 273.15)
    raise UnitError(f"'{text}' is not a unit of temperature that is read here")


_AREA = re.compile(r"(.+?)\s*\*?\s*(cm\^?2|mm\^?2|m\^?2)")


def _resistance(text: str) -> Scale:
    match = _AREA.fullmatch(text)
    if match and match[1] in _OHM:
        area = _TABLE["cm2"][match[2].replace("^", "")]
        return Scale(_OHM[match[1]] * area, per_area=True)
    return Scale(_by_pint(text, "ohm"))


_ROOT = re.compile(r"(.+?)\s*(?:\*\s*)?(?:s\^?\(?-(?:1/2|0\.5)\)?|/\s*s\^?\(?(?:1/2|0\.5)\)?)")


def _warburg(text: str) -> Scale:
    match = _ROOT.fullmatch(text)
    if match is None:
        raise UnitError(f"'{text}' is not a unit of a Warburg coefficient; write Ω s^-1/2")
    return scale(match[1], "ohm")


def _admittance(text: str) -> Scale:
    match = _ADMITTANCE.fullmatch(text)
    if match:
        siemens, farad, area, _, power_less_one, late_area = match.groups()
        if (farad is None) == (power_less_one is None) and not (area and late_area):
            factor = _PREFIX[(farad if farad is not None else siemens) or ""]
            return Scale(factor, per_area=bool(area or late_area))
    if _PLAIN_FARAD.fullmatch(text):
        raise UnitError(
            f"'{text}' is a capacitance; a CPE parameter Q has the unit S s^n (or F s^(n-1))"
        )
    raise UnitError(f"'{text}' is not a unit of a CPE parameter; write S s^n or uS s^n")


# What pint is asked about: names with small powers. It evaluates arithmetic, so that numbers
# raised to numbers would keep it busy for ever.
_POWER = r"(?:\^?\(?-?\d(?:\.\d)?\)?)?"
_ASKED = re.compile(rf"[A-Za-zΩ]{{1,20}}{_POWER}(?:[ */][A-Za-zΩ]{{1,20}}{_POWER}){{0,4}}")


def _by_pint(text: str, canonical: str) -> float:
    if canonical not in _PINT or not _ASKED.fullmatch(text):
        raise UnitError(f"'{text}' is not a unit that is read here")
    spaced = re.sub(r"(?<=[A-Za-zΩ])\^?(-?\d)", r"**\1", text)
    spaced = re.sub(r"(?<=[\w)])\s+(?=[A-Za-zΩ(])", "*", spaced)
    try:
        return float(_registry().Quantity(1.0, spaced).to(_PINT[canonical]).magnitude)
    except Exception:  # pint and its tokenizer raise errors of many kinds
        raise UnitError(f"'{text}' is not a unit of the expected kind") from None


@lru_cache(maxsize=1)
def _registry() -> Any:
    import pint

    return pint.UnitRegistry()
