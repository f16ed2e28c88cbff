"""Reference electrodes as the trade writes them, and conversion between potential scales."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from campaign.chemistry.ions import DEFAULT_CHARGES, Ion
from campaign.chemistry.spelling import MAX_LENGTH, clean
from campaign.errors import RecipeError, refused

AQUEOUS, NON_AQUEOUS, EITHER = "aqueous", "non-aqueous", "either"

CRC = "standard potential, 25 degC, water: CRC Handbook, electrochemical series (from memory)"
BARD = "Bard & Faulkner, Electrochemical Methods, 2nd ed. (2001), back cover, 25 degC (from memory)"
EXPECTED = "Na/Na+, Li/Li+, Zn/Zn2+, Ag/AgCl, SCE, SHE, Hg/HgO, Ag/Ag+ or Fc/Fc+"

JUNCTION = (
    "between aqueous and non-aqueous scales no table removes the liquid-junction and solvation "
    "offset, often 0.1 V and more"
)
SOLVATION = (
    "the offset is that of standard potentials in water; in another solvent or concentration the "
    "solvation of each ion moves it, often by 0.1 V and more"
)
FILLING = "the filling solution is not stated: saturated KCl is assumed"


@dataclass(frozen=True)
class Reference:
    """A reference electrode.

    offset_V: its potential against SHE at 25 degC [V], None where none is tabulated;
    scale: 'aqueous', 'non-aqueous' or 'either'; source: of the offset; known: whether it is
    in the table; ion: symbol of the metal whose own electrode it is, else ''.
    """

    name: str
    offset_V: float | None
    scale: str
    source: str = ""
    known: bool = True
    ion: str = ""
    remark: str = ""


@dataclass(frozen=True)
class Conversion:
    """A potential on another scale [V] and what to be careful of ('' where nothing)."""

    value: float
    caution: str


def _metal(symbol: str, offset_V: float, scale: str) -> Reference:
    label = Ion(symbol, DEFAULT_CHARGES[symbol]).label
    return Reference(f"{symbol}/{label}", offset_V, scale, CRC, ion=symbol, remark=SOLVATION)


_TABLE = (
    _metal("Li", -3.0401, NON_AQUEOUS),
    _metal("Na", -2.71, NON_AQUEOUS),
    _metal("K", -2.931, NON_AQUEOUS),
    _metal("Mg", -2.372, NON_AQUEOUS),
    _metal("Ca", -2.868, NON_AQUEOUS),
    _metal("Al", -1.662, NON_AQUEOUS),
    _metal("Zn", -0.7618, EITHER),
    Reference("SHE", 0.0, AQUEOUS, "by definition (IUPAC Green Book, section 2.13)"),
    Reference(
        "RHE", None, AQUEOUS, ion="H",
        remark="RHE moves with the pH by 59 mV per unit at 25 degC",
    ),
    Reference("SCE", 0.2412, AQUEOUS, BARD),
    Reference("Ag/AgCl", 0.197, AQUEOUS, BARD, remark=FILLING),
    Reference("Ag/AgCl (sat. KCl)", 0.197, AQUEOUS, BARD),
    Reference("Ag/AgCl (3.5 M KCl)", 0.205, AQUEOUS, "from memory"),
    Reference("Ag/AgCl (3 M KCl)", 0.210, AQUEOUS, "from memory"),
    Reference("Ag/AgCl (3 M NaCl)", 0.209, AQUEOUS, "from memory"),
    Reference("Ag/AgCl (1 M KCl)", 0.236, AQUEOUS, "from memory"),
    Reference("Hg/Hg2SO4", 0.64, AQUEOUS, BARD, remark=FILLING.replace("KCl", "K2SO4")),
    Reference("Hg/HgO", 0.098, AQUEOUS, "standard potential, CRC Handbook (from memory)",
              remark="the alkali is not stated: the standard potential is taken"),
    Reference("Ag/Ag+", None, NON_AQUEOUS,
              remark="the potential of Ag/Ag+ depends on its solvent and silver salt"),
    Reference("Fc/Fc+", 0.400, NON_AQUEOUS,
              "ferrocene in water, Gritzner & Kuta, Pure Appl. Chem. 56 (1984) 461 (from memory)",
              remark="the offset of ferrocene in water is taken; it is nearly, not exactly, the "
                     "same in every solvent"),
)  # fmt: skip
_BY_NAME = {reference.name: reference for reference in _TABLE}

_SPELLINGS = {
    "she": "SHE", "nhe": "SHE", "rhe": "RHE", "sce": "SCE",
    "calomel": "SCE", "hg/hg2cl2": "SCE", "saturatedcalomel": "SCE",
    "saturatedcalomelelectrode": "SCE", "standardhydrogenelectrode": "SHE",
    "reversiblehydrogenelectrode": "RHE",
    "ag/agcl": "Ag/AgCl", "agcl/ag": "Ag/AgCl", "silver/silverchloride": "Ag/AgCl",
    "ag/ag+": "Ag/Ag+", "ag+/ag": "Ag/Ag+",
    "hg/hgo": "Hg/HgO", "hgo/hg": "Hg/HgO",
    "hg/hg2so4": "Hg/Hg2SO4", "hg2so4/hg": "Hg/Hg2SO4", "mse": "Hg/Hg2SO4",
    "fc/fc+": "Fc/Fc+", "fc+/fc": "Fc/Fc+", "ferrocene": "Fc/Fc+",
    "ferrocene/ferrocenium": "Fc/Fc+",
}  # fmt: skip
_FILLINGS = {
    "satkcl": "Ag/AgCl (sat. KCl)", "saturatedkcl": "Ag/AgCl (sat. KCl)",
    "sat'dkcl": "Ag/AgCl (sat. KCl)", "kclsat": "Ag/AgCl (sat. KCl)",
    "3.5mkcl": "Ag/AgCl (3.5 M KCl)", "3mkcl": "Ag/AgCl (3 M KCl)",
    "3mnacl": "Ag/AgCl (3 M NaCl)", "1mkcl": "Ag/AgCl (1 M KCl)",
}  # fmt: skip
_METAL_ION = r"(?P<{0}>[a-z]{{1,2}})\(?\^?(?P<{0}a>[1-9]?)\+(?P<{0}b>[1-9]?)\)?"
_METAL_FIRST = re.compile(r"(?P<metal>[a-z]{1,2})/" + _METAL_ION.format("ion"))
_ION_FIRST = re.compile(_METAL_ION.format("ion") + r"/(?P<metal>[a-z]{1,2})")
_VERSUS = re.compile(r"v(?:ersu)?s\.?(?: |$)", re.IGNORECASE)


def read_reference(text: str) -> Reference:
    """Return the reference electrode that `text` names; an unknown one as written.

    'Na+/Na', 'Na|Na+', 'vs. Na⁺/Na' are Na/Na+; NHE is SHE. An unknown reference has
    `known` False and no offset. Raises campaign.errors.Refused for an empty or unreadable text.
    """
    try:
        written = clean(text).text
    except RecipeError as error:
        raise refused(
            f"the reference electrode cannot be read: {error}", value=text[:40], expected=EXPECTED
        ) from error
    written = _VERSUS.sub("", written)
    if not written or len(written) > MAX_LENGTH // 5:
        found = "is empty" if not written else f"has {len(written)} characters"
        raise refused(f"the reference electrode {found}", value=text[:40], expected=EXPECTED)
    name = _canonical(written.replace("|", "/"))
    return _BY_NAME.get(name) or Reference(written, None, EITHER, known=False)


def canonical_reference(text: str) -> str:
    """Return the one spelling of a reference electrode; an unknown one as written.

    Raises campaign.errors.Refused for an empty or unreadable text.
    """
    return read_reference(text).name


def is_known_reference(text: str) -> bool:
    """Return whether the reference electrode is in the table."""
    return read_reference(text).known


def is_same_ion(reference: str, ion: str) -> bool:
    """Return whether the reference is the ion's own electrode: Na/Na+ for 'Na' or 'Na+'.

    RHE is the hydrogen ion's own electrode; SHE, with an electrolyte of its own, is not.
    """
    symbol = ion.strip().rstrip("+").rstrip("123").casefold()
    found = read_reference(reference)
    return bool(found.ion) and found.ion.casefold() == symbol


def convert(potential_V: float, source: str, target: str) -> Conversion:
    """Return a potential [V] against `source` as a potential against `target`, with a caution.

    E(target) = E(source) + offset(source) - offset(target), offsets against SHE at 25 degC
    as tabulated here with their sources.
    Raises campaign.errors.Refused where a reference has no tabulated offset.
    """
    if not math.isfinite(potential_V):
        raise refused(
            f"a potential of {potential_V} cannot be converted",
            value=potential_V,
            expected="a finite number [V]",
        )
    first, second = read_reference(source), read_reference(target)
    if first.name == second.name:
        return Conversion(potential_V, "")
    value = potential_V + _offset(first) - _offset(second)
    return Conversion(round(value, 9), _caution(first, second))


def _offset(reference: Reference) -> float:
    if reference.offset_V is None:
        why = reference.remark or "it is not in the table"
        raise refused(
            f"no offset is tabulated for {reference.name}: {why}",
            value=reference.name,
            expected="a reference electrode with a tabulated offset",
        )
    return reference.offset_V


def _caution(first: Reference, second: Reference) -> str:
    parts = [first.remark, second.remark]
    if {first.scale, second.scale} == {AQUEOUS, NON_AQUEOUS}:
        parts.append(JUNCTION)
    return "; ".join(dict.fromkeys(part for part in parts if part))


def _canonical(written: str) -> str:
    """Return the name in the table that a cleaned text stands for; '' if none."""
    folded = written.casefold()
    compact = folded.replace(" ", "").replace("^", "")
    if compact in _SPELLINGS:
        return _SPELLINGS[compact]
    if metal := _own_metal(compact):
        return metal
    for start in ("ag/agcl", "agcl/ag"):
        if compact.startswith(start):
            filling = compact.removeprefix(start).strip("()/,-").replace("mol/l", "m")
            filling = filling.replace("sat.", "sat").replace(".0m", "m")
            return _FILLINGS.get(filling.replace("in", "", 1), "")
    return ""


def _own_metal(compact: str) -> str:
    found = _METAL_FIRST.fullmatch(compact) or _ION_FIRST.fullmatch(compact)
    if found is None or found["metal"] != found["ion"]:
        return ""
    symbol = found["metal"].capitalize()
    charge = DEFAULT_CHARGES.get(symbol)
    written = int(found["iona"] or found["ionb"] or charge or 0)
    name = f"{symbol}/{Ion(symbol, charge).label}" if charge else ""
    return name if written == charge and name in _BY_NAME else ""
