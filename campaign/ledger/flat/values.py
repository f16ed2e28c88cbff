"""One table cell as a typed value: numbers, uncertainties, instants, words.

Uncertainties are standard uncertainties in the value's own unit [1].

[1] JCGM 100:2008 (GUM), 7.2.2: 41.2(8) means 41.2 with a standard uncertainty of 0.8.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import date, datetime
from typing import Any, NamedTuple

from campaign.errors import Refused
from campaign.ledger.fields import CONFIGURATIONS, clean_text
from campaign.ledger.flat.canonical import COLUMNS
from campaign.ledger.flat.headers import shown
from campaign.ledger.quantities import MAY_BE_ABSENT


class Value(NamedTuple):
    """A fitted value with its standard error, in canonical units; value None means absent.

    A named tuple, because a table of 100,000 rows makes a million of them.
    """

    value: float | None
    se: float | None = None

    @property
    def absent(self) -> bool:
        """Whether the arc was looked for and is not there."""
        return self.value is None


@dataclass(frozen=True)
class Uncalculated:
    """A spreadsheet's formula whose result the file does not hold."""

    formula: str

    def __str__(self) -> str:
        return self.formula


class ValueFault(ValueError):
    """A cell is not a value of its column; `expected` says what could stand there."""

    def __init__(self, message: str, expected: str) -> None:
        self.expected = expected
        super().__init__(shown(message, 600))


@dataclass(frozen=True)
class Bounds:
    """The range of a number: from low (excluded where `above`) to high."""

    low: float = -math.inf
    high: float = math.inf
    above: bool = False
    text: str = "a number"


_POSITIVE = Bounds(0.0, math.inf, True, "a number above 0")
BOUNDS: Mapping[str, Bounds] = {
    "area_cm2": _POSITIVE,
    "potential_V": Bounds(-100, 100, text="a potential in V between -100 and 100"),
    "E_half_V": Bounds(-100, 100, text="a potential in V between -100 and 100"),
    "temperature_C": Bounds(0.0, 2273.15, True, "a temperature above 0 K (-273.15 degC)"),
    "ion_content": Bounds(0, 1, text="an ion content from 0 to 1"),
    "cycle": Bounds(0, 1e9, text="a whole number from 0"),
    "rest_h": Bounds(0, text="a time of at least 0"),
    "chi2": Bounds(0, text="a number of at least 0"),
    "amplitude_mV": _POSITIVE,
    "f_min_Hz": _POSITIVE,
    "f_max_Hz": _POSITIVE,
    **{name: _POSITIVE for name, (kind, _) in COLUMNS.items() if kind in ("value", "error")},
    **{name: Bounds(0, 1, True, "an exponent above 0 and up to 1")
       for name in ("n_sl", "n_ct", "n_lat")},
}  # fmt: skip

# Results of a spreadsheet's formula that went wrong.
SHEET_ERRORS = ("#N/A", "#DIV/0!", "#REF!", "#VALUE!", "#NAME?", "#NUM!", "#NULL!")

_NUMBER = r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)"
_EXPONENT = r"(?:[eE][+-]?\d{1,3})?"
_PLAIN = re.compile(_NUMBER + _EXPONENT, re.ASCII)
_PLUS_MINUS = re.compile(
    rf"(\()?\s*({_NUMBER}{_EXPONENT})\s*(?:±|\+/-|\+-)\s*({_NUMBER}{_EXPONENT})\s*(\))?"
    rf"\s*({_EXPONENT})",
    re.ASCII,
)
_CONCISE = re.compile(rf"({_NUMBER})\s*\((\d+(?:\.\d+)?)\)({_EXPONENT})", re.ASCII)

LONGEST = 80  # characters of a number with its uncertainty


def plain_number(text: str) -> float:
    """Return the finite number a text with a decimal point states; raises ValueError."""
    if len(text) > LONGEST or not _PLAIN.fullmatch(text):
        raise ValueError
    number = float(text)
    if not math.isfinite(number):
        raise ValueError
    return number


def with_uncertainty(text: str) -> tuple[float, float | None]:
    """Return value and standard uncertainty of a text with a decimal point.

    Raises ValueError for anything else than a number or a number with one uncertainty.
    """
    if _PLAIN.fullmatch(text):
        return plain_number(text), None
    match = _PLUS_MINUS.fullmatch(text) if len(text) <= LONGEST else None
    if match:
        opening, value, error, closing, power = match.groups()
        if bool(opening) != bool(closing) or (power and not opening):
            raise ValueError
        factor = float(f"1{power}") if power else 1.0
        return _finite(plain_number(value) * factor), _finite(plain_number(error) * factor)
    match = _CONCISE.fullmatch(text) if len(text) <= LONGEST else None
    if match:
        value, error, power = match.groups()
        # The digits in brackets stand for the last digits of the value [1].
        last = 0 if "." in error else -len(value.partition(".")[2])
        exponent = last + int(power[1:] or 0)
        return _finite(float(value + power)), _finite(float(f"{error}e{exponent}"))
    raise ValueError


def _finite(number: float) -> float:
    if not math.isfinite(number):
        raise ValueError
    return number


# Spaces that typesetting puts into numbers, and the minus sign.
_PLAINER = str.maketrans({"−": "-", "\u00a0": None, "\u202f": None, "\u2009": None})


_NUMERIC = re.compile(r"[\d\s.,+\-−±()eE/]*\d[\d\s.,+\-−±()eE/]*")


def looks_numeric(text: str) -> bool:
    """Return whether a text is made of what numbers are made of, in any notation."""
    return _NUMERIC.fullmatch(text) is not None


class OtherMark(ValueError):
    """A number is written with another decimal mark than its file."""


def as_point(text: str, decimal: str) -> str:
    """Return a number's text with a decimal point and an ASCII minus.

    Raises OtherMark for a number with the other mark, ValueError for what is no number.
    """
    text = text.strip()
    if not text.isascii():
        text = text.translate(_PLAINER)
    other = "." if decimal == "," else ","
    if other in text:
        raise OtherMark if looks_numeric(text) else ValueError
    return text.replace(",", ".")


def in_bounds(name: str, number: float, given: object) -> float:
    """Return a number in canonical units after checking its range; raises ValueFault."""
    bounds = BOUNDS.get(name)
    if bounds is None:
        return number
    low = number <= bounds.low if bounds.above else number < bounds.low
    if low or number > bounds.high or not math.isfinite(number):
        raise ValueFault(f"{name} is {shown(given, 60)}, which is out of range", bounds.text)
    return number


def _text(name: str, given: Any) -> str:
    if isinstance(given, float) and given.is_integer():
        given = int(given)  # a spreadsheet's 7 is the label 7
    text = str(given)
    if text.strip() in SHEET_ERRORS:
        raise ValueFault(f"{name} is the error {text.strip()} of a spreadsheet", "a text")
    try:
        return clean_text(text, name)
    except Refused as error:
        fault = error.faults[0]
        raise ValueFault(fault.message, fault.expected or "a text") from None


def _choice(name: str, given: Any) -> str:
    word = "-".join(str(given).lower().replace("-", " ").replace("_", " ").split())
    word = word.removesuffix("-cell").removesuffix("-configuration").removesuffix("-setup")
    word = _CONFIGURATION.get(word, word)
    if word not in CONFIGURATIONS:
        raise ValueFault(
            f"{name} is '{shown(given, 40)}', which is not known",
            "one of " + ", ".join(CONFIGURATIONS),
        )
    return word


_CONFIGURATION = {
    "3-electrode": "three-electrode", "three-electrodes": "three-electrode",
    "2-electrode": "two-electrode", "two-electrodes": "two-electrode",
    "symmetrical": "symmetric",
}  # fmt: skip


def _ion(name: str, given: Any) -> Any:
    from campaign.chemistry.ions import parse_ion

    try:
        return parse_ion(str(given))
    except Refused as error:
        fault = error.faults[0]
        raise ValueFault(fault.message, fault.expected or "an ion such as Na") from None


def read_reference(name: str, given: Any) -> str:
    """Return the one spelling of a reference electrode; raises ValueFault."""
    from campaign.chemistry.references import canonical_reference

    try:
        return canonical_reference(_text(name, given))
    except Refused as error:
        fault = error.faults[0]
        raise ValueFault(fault.message, fault.expected or "a reference electrode") from None


WORDS: Mapping[str, Callable[[str, Any], Any]] = {
    "text": _text,
    "choice": _choice,
    "ion": _ion,
    "reference": read_reference,
}


def instant_reader(zone: str) -> Callable[[str, Any], Any]:
    """Return a reader of instants in a campaign's zone."""
    from campaign.ledger.instants import InstantError, parse_instant

    def read(name: str, given: Any) -> Any:
        if isinstance(given, date) and not isinstance(given, datetime):
            given = datetime(given.year, given.month, given.day)
        try:
            return parse_instant(given if isinstance(given, datetime) else str(given), zone)
        except InstantError as error:
            raise ValueFault(f"{name} is '{shown(given, 60)}': {error}", error.expected) from None

    return read


def is_absent(name: str, given: Any) -> bool:
    """Return whether a cell says `absent`; raises ValueFault where an arc cannot be absent."""
    if not (isinstance(given, str) and given.strip().lower() == "absent"):
        return False
    if name not in MAY_BE_ABSENT:
        raise ValueFault(
            f"{name} is 'absent', which only {' and '.join(MAY_BE_ABSENT)} can be",
            "a number, or empty where it was not fitted",
        )
    return True


def read_amended(
    quantity: str, is_error: bool, text: str, before: Mapping[str, Any]
) -> dict[str, float | None] | None:
    """Return value and error of a quantity after an amendment; None empties the quantity.

    Raises Refused for what cannot be read.
    """
    from campaign.errors import refused

    name = f"{quantity}_se" if is_error else quantity
    try:
        if not text.strip():
            if not is_error:
                return None
            return {"value": before["value"], "se": None}
        if not is_error and is_absent(name, text):
            return {"value": None, "se": None}
        value, error = with_uncertainty(as_point(text, "."))
        in_bounds(name, value, text)
        if is_error:
            if before["value"] is None:
                raise ValueFault(f"{quantity} has no value, so no error", "a value first")
            return {"value": before["value"], "se": value}
        if error is not None:
            in_bounds(f"{quantity}_se", error, text)
        return {"value": value, "se": error if error is not None else before["se"]}
    except ValueFault as fault:
        raise refused(str(fault), column=name, value=text, expected=fault.expected) from None
    except ValueError:
        raise refused(
            f"{name} is '{text}', which is not a number",
            column=name,
            value=text,
            expected="a number such as 41.2 or 41.2(8), or absent",
        ) from None
