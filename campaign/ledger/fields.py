"""What a person can state of an electrode, an electrolyte, a cell or a measurement.

One table of fields serves `add`, `amend`, `show` and the prompts of `log`: the name a user
writes, the column it is stored in, and the values it may take. Units are in the name.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from campaign.errors import Fault, refused

ZERO_C = 273.15  # K at 0 degC, exact (SI Brochure, 9th edition)


@dataclass(frozen=True)
class Field:
    """One attribute: `name` as written, `column` as stored, and how text becomes a value."""

    name: str
    column: str
    kind: str  # 'text', 'number', 'integer', 'yes-no', 'instant', 'reference', 'choice'
    low: float = -math.inf
    high: float = math.inf
    above: bool = False  # True: strictly above `low`
    factor: float = 1.0  # stored = factor * written + offset
    offset: float = 0.0
    choices: tuple[str, ...] = ()
    required: bool = False

    @property
    def expected(self) -> str:
        """What a value of this field must be, in words."""
        if self.choices:
            return "one of " + ", ".join(self.choices)
        if self.kind in ("number", "integer"):
            noun = "a whole number" if self.kind == "integer" else "a number"
            return noun + self._range()
        return {
            "yes-no": "yes or no",
            "instant": "a date and time such as 2026-03-14T09:30+01:00",
            "reference": "a reference electrode such as Na/Na+ or Ag/AgCl",
        }.get(self.kind, "a short text")

    def _range(self) -> str:
        low, high = self.low, self.high
        if math.isfinite(low) and math.isfinite(high):
            return f" above {low:g} up to {high:g}" if self.above else f" from {low:g} to {high:g}"
        if math.isfinite(low):
            return f" above {low:g}" if self.above else f" of at least {low:g}"
        return ""

    def written(self, stored: Any) -> Any:
        """Return a stored value as the user writes it."""
        if stored is None:
            return None
        if self.kind == "number":
            return round((float(stored) - self.offset) / self.factor, 9)
        if self.kind == "yes-no":
            return "yes" if stored else "no"
        return stored


def _number(name: str, column: str | None = None, **rules: Any) -> Field:
    return Field(name, column or name, "number", **rules)


def _celsius(name: str) -> Field:
    return Field(
        name, name.removesuffix("C") + "K", "number", low=-ZERO_C, above=True, offset=ZERO_C
    )


def _text(name: str, *, required: bool = False) -> Field:
    return Field(name, name, "text", required=required)


ELECTRODE = (
    _text("label", required=True),
    _text("material"),
    Field("ion", "ion", "ion", required=True),
    _text("form"),
    _number("diffusion_length_um", "diffusion_length_cm", low=0, above=True, factor=1e-4),
    _number("diffusivity_cm2_s", low=0, above=True),
    _number("porosity", low=0, high=0.999999, above=True),
    _number("pore_resistance_ohm_cm2", low=0, above=True),
    Field("pore_electrolyte", "pore_electrolyte", "electrolyte"),
    _celsius("pore_temperature_C"),
    _number("window_low_V", low=-100, high=100),
    _number("window_high_V", low=-100, high=100),
    Field("window_reference", "window_reference", "reference"),
    _celsius("maximum_temperature_C"),
    _text("note"),
)

ELECTROLYTE = (
    Field("aqueous", "aqueous", "yes-no"),
    _number("density_g_cm3", low=0, high=30, above=True),
    _celsius("minimum_temperature_C"),
    _celsius("maximum_temperature_C"),
    _text("note"),
)

CONFIGURATIONS = ("three-electrode", "two-electrode", "symmetric")

CELL = (
    _text("label", required=True),
    Field("electrode", "electrode", "electrode", required=True),
    Field("electrolyte", "electrolyte", "electrolyte", required=True),
    _text("specimen"),
    _number("area_cm2", low=0, above=True, required=True),
    Field("configuration", "configuration", "choice", choices=CONFIGURATIONS),
    Field("reference", "reference", "reference"),
    Field("assembled_at", "assembled_at", "instant"),
    _text("operator"),
    _text("note"),
)

MEASUREMENT = (
    Field("measured_at", "measured_at", "instant", required=True),
    _number("potential_V", low=-100, high=100),
    _celsius("temperature_C"),
    _number("ion_content", low=0, high=1),
    _number("E_half_V", low=-100, high=100),
    Field("cycle", "cycle", "integer", low=0, high=10**9),
    _text("direction"),
    _number("rest_h", low=0),
    _number("amplitude_mV", low=0, above=True),
    _number("f_min_Hz", low=0, above=True),
    _number("f_max_Hz", low=0, above=True),
    _text("operator"),
    _text("instrument"),
    _text("spectrum"),
    _text("note"),
)

FIT = (
    Field("fitted_at", "fitted_at", "instant"),
    _text("fitted_by"),
    _text("circuit"),
    _text("weighting"),
    _number("chi2", low=0),
)

# What each command calls a kind of record, and the fields it has.
KINDS: Mapping[str, tuple[Field, ...]] = {
    "electrode": ELECTRODE,
    "electrolyte": ELECTROLYTE,
    "cell": CELL,
    "measurement": MEASUREMENT,
    "fit": FIT,
}


def field_of(kind: str, name: str) -> Field:
    """Return the field a user named; raise Refused with near names otherwise."""
    from difflib import get_close_matches

    names = {field.name: field for field in KINDS[kind]}
    if name in names:
        return names[name]
    near = get_close_matches(name, names, n=3)
    hint = f"; near: {', '.join(near)}" if near else ""
    raise refused(
        f"a {kind} has no field '{name}'{hint}",
        column=name,
        value=name,
        expected="one of " + ", ".join(names),
    )


# Pairs of stored columns of which the first must lie below the second.
_ORDERED = (
    ("window_low_V", "window_high_V"),
    ("f_min_Hz", "f_max_Hz"),
    ("minimum_temperature_K", "maximum_temperature_K"),
)


def refuse_disorder(kind: str, stored: Mapping[str, Any]) -> None:
    """Raise Refused where the stored values of a record contradict each other."""
    written = {field.column: field for field in KINDS[kind]}
    for low, high in _ORDERED:
        below, above = stored.get(low), stored.get(high)
        if below is None or above is None or below < above:
            continue
        field, other = written[low], written[high]
        raise refused(
            f"{field.name} ({field.written(below):g}) is not below {other.name} "
            f"({other.written(above):g}); mend one of the two",
            column=field.name,
            value=field.written(below),
            expected=f"a {field.name} below {other.name}",
        )
    windowed = any(stored.get(name) is not None for name in _ORDERED[0])
    if windowed and not stored.get("window_reference"):
        raise refused(
            "a potential window needs its scale; give window_reference, such as Na/Na+",
            column="window_reference",
            expected="a reference electrode",
        )


def _bad(field: Field, text: object, why: str) -> Exception:
    return refused(
        f"{field.name} is {text!r}, {why}; write {field.expected}",
        column=field.name,
        value=text,
        expected=field.expected,
    )


def _as_number(field: Field, text: object) -> float:
    try:
        number = float(str(text).strip())
        if "_" in str(text):  # a number in program code, a slip anywhere else
            raise ValueError
    except ValueError:
        raise _bad(field, text, "which is not a number") from None
    if not math.isfinite(number):
        raise _bad(field, text, "which is not finite")
    too_low = number <= field.low if field.above else number < field.low
    if too_low or number > field.high:
        raise _bad(field, text, "which is out of range")
    stored = number * field.factor + field.offset
    if field.above and field.low == 0 and stored <= 0:
        raise _bad(field, text, "which is too small to be kept")
    return stored


def _as_integer(field: Field, text: object) -> int:
    number = _as_number(field, text)
    if number != int(number):
        raise _bad(field, text, "which is not a whole number")
    return int(number)


def _as_yes_no(field: Field, text: object) -> int:
    word = str(text).strip().lower()
    if word in ("yes", "true", "1"):
        return 1
    if word in ("no", "false", "0"):
        return 0
    raise _bad(field, text, "which is neither yes nor no")


def _as_text(field: Field, text: object) -> str:
    return clean_text(str(text), field.name)


def _as_choice(field: Field, text: object) -> str:
    word = str(text).strip().lower().replace(" ", "-")
    if word not in field.choices:
        raise _bad(field, text, "which is not known")
    return word


def _as_reference(field: Field, text: object) -> str:
    from campaign.chemistry.references import canonical_reference

    return canonical_reference(clean_text(str(text), field.name))


_READERS: Mapping[str, Callable[[Field, object], Any]] = {
    "number": _as_number,
    "integer": _as_integer,
    "yes-no": _as_yes_no,
    "text": _as_text,
    "choice": _as_choice,
    "reference": _as_reference,
}


def read_value(field: Field, text: object) -> Any:
    """Return what is stored for the text a user wrote (kinds that need no database).

    Raises Refused when the text is not a value of the field.
    """
    return _READERS[field.kind](field, text)


def clean_text(text: str, name: str) -> str:
    """Return a label or remark in normal form (NFC, no outer spaces).

    Raises Refused for empty text, over 500 characters, and control or direction characters,
    which could change what a terminal shows.
    """
    import unicodedata

    shown = unicodedata.normalize("NFC", text).strip()
    limit = 4000 if name in ("note", "reason", "circuit", "caution", "source") else 500
    if not shown:
        raise refused(f"{name} is empty; write a short text", column=name, expected="a text")
    if len(shown) > limit:
        raise refused(
            f"{name} has {len(shown)} characters; write at most {limit}",
            column=name,
            expected=f"at most {limit} characters",
        )
    for place, character in enumerate(shown):
        if unicodedata.category(character) in ("Cc", "Cf", "Cs", "Co", "Zl", "Zp"):
            raise refused(
                f"{name} holds a character that cannot be shown (U+{ord(character):04X} at "
                f"place {place + 1}); remove it",
                column=name,
                value=f"U+{ord(character):04X}",
                expected="visible characters",
            )
    return shown


def unknown_label(kind: str, label: str, known: list[str]) -> Fault:
    """Return the fault for a label that is not in the campaign, with near ones."""
    from difflib import get_close_matches

    near = get_close_matches(label, known, n=3)
    hint = f"; near: {', '.join(near)}" if near else ""
    return Fault(
        f"there is no {kind} '{label}' in this campaign{hint}",
        column=kind,
        value=label,
        expected=f"the label of an {kind}" if kind[0] in "aeiou" else f"the label of a {kind}",
    )
