"""The headers of the flat table: canonical names, other usual names, units in the header."""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass

from campaign.ledger.flat.units import Scale, UnitError, scale

# Canonical header -> (kind, canonical unit). Kinds: text, number, integer, instant, choice,
# ion, reference, recipe, value (a fitted quantity), error (its standard error).
COLUMNS: dict[str, tuple[str, str]] = {
    "electrode": ("text", ""),
    "material": ("text", ""),
    "ion": ("ion", ""),
    "form": ("text", ""),
    "cell": ("text", ""),
    "specimen": ("text", ""),
    "area_cm2": ("number", "cm2"),
    "configuration": ("choice", ""),
    "reference": ("reference", ""),
    "electrolyte": ("text", ""),
    "assembled_at": ("instant", ""),
    "measured_at": ("instant", ""),
    "potential_V": ("number", "V"),
    "temperature_C": ("number", "K"),
    "ion_content": ("number", "1"),
    "E_half_V": ("number", "V"),
    "cycle": ("integer", ""),
    "direction": ("text", ""),
    "rest_h": ("number", "h"),
    "R_el": ("value", "ohm"),
    "R_el_se": ("error", "ohm"),
    "R_sl": ("value", "ohm"),
    "R_sl_se": ("error", "ohm"),
    "Q_sl": ("value", "S s^n"),
    "n_sl": ("value", "1"),
    "R_ct": ("value", "ohm"),
    "R_ct_se": ("error", "ohm"),
    "Q_ct": ("value", "S s^n"),
    "n_ct": ("value", "1"),
    "R_lat": ("value", "ohm"),
    "R_lat_se": ("error", "ohm"),
    "Q_lat": ("value", "S s^n"),
    "n_lat": ("value", "1"),
    "sigma_w": ("value", "ohm s^-1/2"),
    "sigma_w_se": ("error", "ohm s^-1/2"),
    "chi2": ("number", "1"),
    "circuit": ("text", ""),
    "weighting": ("text", ""),
    "fitted_at": ("instant", ""),
    "fitted_by": ("text", ""),
    "amplitude_mV": ("number", "mV"),
    "f_min_Hz": ("number", "Hz"),
    "f_max_Hz": ("number", "Hz"),
    "operator": ("text", ""),
    "instrument": ("text", ""),
    "spectrum": ("text", ""),
    "note": ("text", ""),
}

CANONICAL = tuple(COLUMNS)

# Usual other names, folded (lower case, no spaces, underscores, hyphens, dots).
_OTHER: dict[str, str] = {
    "potential": "potential_V",
    "voltage": "potential_V",
    "temperature": "temperature_C",
    "temp": "temperature_C",
    "area": "area_cm2",
    "electrodearea": "area_cm2",
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
    "soc": "ion_content",
    "x": "ion_content",
    "ioncontent": "ion_content",
    "referenceelectrode": "reference",
    "celllabel": "cell",
    "cellid": "cell",
    "date": "measured_at",
    "datetime": "measured_at",
    "time": "measured_at",
    "measured": "measured_at",
    "assembled": "assembled_at",
    "fitted": "fitted_at",
    "insertionion": "ion",
    "comment": "note",
    "comments": "note",
    "remark": "note",
    "notes": "note",
    "file": "spectrum",
    "spectrumfile": "spectrum",
    "model": "circuit",
    "equivalentcircuit": "circuit",
    "solution": "electrolyte",
    "sigma": "sigma_w",
    "σ": "sigma_w",
    "σw": "sigma_w",
    "aw": "sigma_w",
    "warburg": "sigma_w",
}
# Single letters keep their case: T is a temperature, t a time.
_LETTERS = {"T": "temperature_C", "E": "potential_V", "A": "area_cm2", "Θ": "temperature_C"}
_PARTS = {
    "el": ("s", "rs", "sol", "solution", "ohm", "ohmic", "e", "hf", "el", "electrolyte", "0", "Ω"),
    "sl": ("sei", "cei", "film", "f", "sl", "surfacelayer", "surface", "sf", "surf", "1"),
    "ct": ("ct", "chargetransfer", "transfer", "2"),
    "lat": ("lat", "lattice", "inc", "incorporation", "in", "ad", "lf", "3"),
}


def _part_names() -> dict[str, str]:
    names: dict[str, str] = {}
    for part, spellings in _PARTS.items():
        for spelling in spellings:
            names.setdefault(f"r{spelling}", f"R_{part}")
            if part != "el":
                for symbol in ("q", "cpe", "y0", "cpeq", "cpet"):
                    names.setdefault(f"{symbol}{spelling}", f"Q_{part}")
                for symbol in ("n", "alpha", "α", "cpen", "cpep"):
                    names.setdefault(f"{symbol}{spelling}", f"n_{part}")
    return names


def fold(name: str) -> str:
    """Return a name as it is compared: NFKC, lower case, without spaces, _, - and dots."""
    text = unicodedata.normalize("NFKC", name).casefold()
    return "".join(c for c in text if c not in " _-." and not c.isspace())


_BY_FOLD = {**_part_names(), **_OTHER, **{fold(name): name for name in CANONICAL}}
_ERROR_ENDINGS = ("_se", " se", "_err", " err", "_error", " error", "_std", "_sd", "_u",
                  "_stderr", " standard error", "_unc")  # fmt: skip


@dataclass(frozen=True)
class Header:
    """A column: its canonical name, the scale of its numbers, and how it was written."""

    name: str
    scale: Scale
    written: str
    unit_stated: bool


class HeaderError(ValueError):
    """A header cannot be read; `expected` says what could stand there."""

    def __init__(self, message: str, expected: str) -> None:
        self.expected = expected
        super().__init__(message)


def read_header(written: str) -> Header:
    """Return the column a header names; raises HeaderError."""
    text = unicodedata.normalize("NFKC", written).strip().lstrip("\ufeff")
    name = lookup(text)
    if name is not None:
        return Header(name, _default(name), written, unit_stated=name in CANONICAL)
    for base, unit in _splits(text):
        name = lookup(base)
        if name is not None:
            return Header(name, _scale(name, unit, written), written, unit_stated=True)
    raise HeaderError(
        f"the column '{written.strip()[:60]}' is not known{_hint(text)}",
        "a header of the flat table, or a mapping file that renames or ignores it",
    )


def lookup(text: str) -> str | None:
    """Return the canonical name of a header without unit, or None."""
    text = text.strip()
    if text in _LETTERS:
        return _LETTERS[text]
    if len(text) == 1 and text not in ("x", "σ"):
        return None
    found = _BY_FOLD.get(fold(text))
    if found is not None:
        return found
    lowered = text.casefold()
    for ending in _ERROR_ENDINGS:
        if lowered.endswith(ending):
            base = _BY_FOLD.get(fold(text[: -len(ending)]))
            if base is not None and f"{base}_se" in COLUMNS:
                return f"{base}_se"
    return None


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
    for mark in ("_", " in ", " "):
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
    if kind == "error" and unit.strip() in ("%", "percent"):
        return Scale(1e-2, relative=True)
    if not canonical:
        raise HeaderError(
            f"the column '{written.strip()}' states a unit, but {name} has none", expected
        )
    try:
        return scale(unit, canonical)
    except UnitError as error:
        raise HeaderError(f"the unit in '{written.strip()}' is not read: {error}", expected) from None


def _hint(text: str) -> str:
    from difflib import get_close_matches

    near = get_close_matches(text[:60].lower(), [n.lower() for n in CANONICAL], n=3, cutoff=0.6)
    by_lower = {name.lower(): name for name in CANONICAL}
    return f"; near: {', '.join(by_lower[n] for n in near)}" if near else ""
