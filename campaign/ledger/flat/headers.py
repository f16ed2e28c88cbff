"""The headers of the flat table: canonical names, other usual names, units in the header.

Units stand in quantity/unit notation [1], in brackets, or after an underscore, comma or space.

[1] IUPAC, Quantities, Units and Symbols in Physical Chemistry (Green Book), 3rd ed., 1.1.
"""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass

from campaign.ledger.flat.canonical import CANONICAL, COLUMNS
from campaign.ledger.flat.units import Scale, UnitError, scale

# Usual other names, folded (lower case, no spaces, underscores, hyphens, dots).
_OTHER: dict[str, str] = {
    "potential": "potential_V",
    "voltage": "potential_V",
    "temperature": "temperature_C",
    "temp": "temperature_C",
    "area": "area_cm2",
    "electrodearea": "area_cm2",
    "geometricarea": "area_cm2",
    "ehalf": "E_half_V",
    "e1/2": "E_half_V",
    "halffillingpotential": "E_half_V",
    "rest": "rest_h",
    "resttime": "rest_h",
    "amplitude": "amplitude_mV",
    "acamplitude": "amplitude_mV",
    "fmin": "f_min_Hz",
    "fmax": "f_max_Hz",
    "chisquare": "chi2",
    "chisquared": "chi2",
    "chi^2": "chi2",
    "χ2": "chi2",
    "χ^2": "chi2",
    "reducedchi2": "chi2",
    "reducedchisquare": "chi2",
    "soc": "ion_content",
    "x": "ion_content",
    "θ": "ion_content",
    "referenceelectrode": "reference",
    "celllabel": "cell",
    "cellid": "cell",
    "cellname": "cell",
    "date": "measured_at",
    "datetime": "measured_at",
    "time": "measured_at",
    "measured": "measured_at",
    "assembled": "assembled_at",
    "fitted": "fitted_at",
    "insertionion": "ion",
    "cyclenumber": "cycle",
    "comment": "note",
    "comments": "note",
    "remark": "note",
    "remarks": "note",
    "notes": "note",
    "spectrumfile": "spectrum",
    "equivalentcircuit": "circuit",
    "sigma": "sigma_w",
    "σ": "sigma_w",
    "σw": "sigma_w",
    "aw": "sigma_w",
    "warburg": "sigma_w",
    "warburgcoefficient": "sigma_w",
}
# Single letters keep their case: T is a temperature, t a time.
_LETTERS = {"T": "temperature_C", "E": "potential_V", "A": "area_cm2", "x": "ion_content",
            "σ": "sigma_w", "θ": "ion_content"}  # fmt: skip
# Usual indices of each arc. A bare number (R1, R2) and R_hf, which is an intercept for some and
# an arc for others, are left to a mapping file.
_PARTS = {
    "el": ("s", "sol", "solution", "ohm", "ohmic", "e", "el", "electrolyte", "0", "Ω"),
    "sl": ("sei", "cei", "film", "f", "sl", "surfacelayer", "surface", "sf", "surf"),
    "ct": ("ct", "chargetransfer", "transfer", "mf"),
    "lat": ("lat", "lattice", "inc", "incorporation", "ad", "lf"),
}


def _part_names() -> dict[str, str]:
    names: dict[str, str] = {}
    for part, spellings in _PARTS.items():
        for spelling in (s.casefold() for s in spellings):
            names[f"r{spelling}"] = f"R_{part}"
            if part != "el":
                names |= dict.fromkeys(
                    (f"{symbol}{spelling}" for symbol in ("q", "cpe", "y0", "cpeq", "qcpe")),
                    f"Q_{part}",
                )
                names |= dict.fromkeys(
                    (f"{symbol}{spelling}" for symbol in ("n", "alpha", "α", "cpen", "ncpe")),
                    f"n_{part}",
                )
    return names


_LONGEST = 120  # characters of a header
_STRAIGHT = str.maketrans({"\u2044": "/", "\u2212": "-", "\u2010": "-", "\u2011": "-",
                           "\u2013": "-", "\u200b": "", "\ufeff": ""})  # fmt: skip


def tidy_header(written: str) -> str:
    """Return a header in one spelling: NFKC, single spaces, plain slash and hyphen."""
    text = unicodedata.normalize("NFKC", written).translate(_STRAIGHT)
    return " ".join(text.split())


def fold(name: str) -> str:
    """Return a name as it is compared: NFKC, lower case, without spaces, _, - and dots."""
    text = unicodedata.normalize("NFKC", name).casefold()
    return "".join(c for c in text if c not in " _-." and not c.isspace())


_BY_FOLD = {**_part_names(), **_OTHER, **{fold(name): name for name in CANONICAL}}
_ERROR_ENDING = re.compile(
    r"(.+?)[_ ](?:se|s\.e\.|err(?:or)?|std ?err(?:or)?|standard error|std|sd|unc(?:ertainty)?|u)",
    re.IGNORECASE,
)
# A small u is a standard uncertainty; a capital U an expanded one, which is not taken.
_ERROR_BEFORE = re.compile(
    r"(?:(?:(?-i:u|s)|se|σ|err|error)\((.+)\)|(?:se|err|error|standard error)[_ ](?:of )?(.+)"
    r"|(?:Δ|δ|±) ?(.+))",
    re.IGNORECASE,
)
_VERSUS = re.compile(r"\s*(?<![A-Za-z])(?:vs\b\.?|versus\b)\s*", re.IGNORECASE)


@dataclass(frozen=True)
class Header:
    """A column: its canonical name, the scale of its numbers, and how it was written.

    unit_stated: by its unit, or by a canonical name. reference: the electrode that a header
    such as `E/V vs. Na/Na+` names.
    """

    name: str
    scale: Scale
    written: str
    unit_stated: bool
    reference: str = ""

    @property
    def kind(self) -> str:
        """The kind of value the column holds."""
        return COLUMNS[self.name][0]


class HeaderError(ValueError):
    """A header cannot be read; `expected` says what could stand there."""

    def __init__(self, message: str, expected: str) -> None:
        self.expected = expected
        super().__init__(shown(message, 600))


def read_header(written: str) -> Header:
    """Return the column a header names; raises HeaderError."""
    if len(written) > _LONGEST:
        raise HeaderError(
            f"a header has {len(written)} characters; at most {_LONGEST} are read",
            "a header of the flat table",
        )
    text = tidy_header(written)
    versus = _VERSUS.search(text)
    found = None if versus is None else _read_versus(text, versus, written)
    found = found or _read(text, written)
    if found is not None:
        return found
    raise HeaderError(
        f"the column '{shown(written, 60)}' is not known{_hint(text)}",
        "a header of the flat table, or a mapping file that renames or ignores it",
    )


def _read(text: str, written: str) -> Header | None:
    name = lookup(text)
    if name is not None:
        return Header(name, _default(name), written.strip(), unit_stated=name == text)
    for base, unit in _splits(text):
        name = lookup(base)
        if name is not None:
            scale = _scale(name, unit, written)
            return Header(name, scale, written.strip(), unit_stated=True)
    return None


def _read_versus(text: str, versus: re.Match[str], written: str) -> Header | None:
    """Read `E vs Na/Na+`, `E/V vs. Na/Na+`, `E (V vs Na/Na+)` and `E vs Na/Na+ / V`."""
    before, after = text[: versus.start()], text[versus.end() :]
    closing = ""
    for opening, mark in ("()", "[]"):
        if before.count(opening) > before.count(mark) and after.endswith(mark):
            after, closing = after[:-1], mark
    reference, slash, unit = after.rpartition("/")
    if not closing and slash and unit.strip() in ("V", "mV"):
        before, after = f"{before}/{unit.strip()}", reference
    found = _read(before.strip() + closing, written)
    if found is None or found.name not in ("potential_V", "E_half_V") or not after.strip():
        return None
    return Header(found.name, found.scale, found.written, found.unit_stated, after.strip())


def lookup(text: str) -> str | None:
    """Return the canonical name of a header without unit, or None."""
    text = text.strip()
    if len(text) <= 1:
        return _LETTERS.get(text)
    found = _BY_FOLD.get(fold(text))
    if found is not None:
        return found
    match = _ERROR_ENDING.fullmatch(text) or _ERROR_BEFORE.fullmatch(text)
    if match is None:
        return None
    base = lookup(next(group for group in match.groups() if group))
    error = f"{base}_se"
    return error if error in COLUMNS else None


def _splits(text: str) -> list[tuple[str, str]]:
    """Return ways to read a header as name and unit: name/unit, name [unit], name_unit."""
    ways = []
    slash = text.find("/")
    while slash > 0:
        ways.append((text[:slash], text[slash + 1 :]))
        slash = text.find("/", slash + 1)
    for opening, closing in ("[]", "()"):
        start = text.find(opening)
        if start > 0 and text.endswith(closing):
            ways.append((text[:start], text[start + 1 : -1]))
    for mark in (",", " in ", "_", " "):
        base, found, unit = text.rpartition(mark)
        if found and base:
            ways.append((base, unit))
    return ways


def _default(name: str) -> Scale:
    """Return the scale of a column whose header states no unit."""
    return Scale(1.0, 273.15) if name == "temperature_C" else Scale()


def _scale(name: str, unit: str, written: str) -> Scale:
    kind, canonical = COLUMNS[name]
    expected = f"a unit of {name}, such as {canonical or 'none'}"
    if kind == "error" and unit.strip() in ("%", "percent", "(%)"):
        return Scale(1e-2, relative=True)
    if not canonical:
        raise HeaderError(
            f"the column '{shown(written, 60)}' states a unit, but {name} has none", expected
        )
    try:
        return scale(unit, canonical)
    except UnitError as error:
        raise HeaderError(
            f"the unit in '{shown(written, 60)}' is not read: {error}", expected
        ) from None


def shown(given: object, longest: int) -> str:
    """Return what was found as it may be printed: cut, without control characters."""
    text = str(given).strip()[:longest]
    return "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in text)


def _hint(text: str) -> str:
    from difflib import get_close_matches

    near = get_close_matches(text[:60].lower(), [n.lower() for n in CANONICAL], n=3, cutoff=0.6)
    by_lower = {name.lower(): name for name in CANONICAL}
    return f"; near: {', '.join(by_lower[n] for n in near)}" if near else ""
