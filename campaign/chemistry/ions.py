"""Insertion ions: symbol and charge number, as written in papers."""

from __future__ import annotations

import re
from dataclasses import dataclass

from campaign.chemistry.spelling import clean_or_empty
from campaign.errors import refused

DEFAULT_CHARGES = {"Li": 1, "Na": 1, "K": 1, "Mg": 2, "Ca": 2, "Zn": 2, "Al": 3, "H": 1}

_BY_FOLD = {symbol.casefold(): symbol for symbol in DEFAULT_CHARGES}
_NAMES = {
    "lithium": "Li", "sodium": "Na", "potassium": "K", "magnesium": "Mg", "calcium": "Ca",
    "zinc": "Zn", "aluminium": "Al", "aluminum": "Al", "hydrogen": "H", "proton": "H",
}  # fmt: skip
_ION = re.compile(
    r"(?P<symbol>[A-Za-z]{1,2})"
    r" ?\(?\^?(?:(?P<before>[1-9])\+|\+\^?(?P<after>[1-9])|(?P<pluses>\+{1,3}))?\)?"
)
EXPECTED = "one of " + ", ".join(DEFAULT_CHARGES) + ", with or without its charge (Na, Na+, Mg2+)"


@dataclass(frozen=True)
class Ion:
    """An insertion ion: element symbol and charge number [1]."""

    symbol: str
    charge: int

    @property
    def label(self) -> str:
        """Return the ion as written in text: 'Na+', 'Mg2+'."""
        return f"{self.symbol}{self.charge if self.charge > 1 else ''}+"


def parse_ion(text: str) -> Ion:
    """Return the ion that 'Na', 'Na+', 'Mg2+', 'Zn+2', 'Li⁺' or 'sodium' stands for.

    Raises campaign.errors.Refused for an unknown ion or a charge that it does not have.
    """
    cleaned = clean_or_empty(text)
    named = _NAMES.get(cleaned.casefold().removesuffix(" ion"))
    if named is not None:
        return Ion(named, DEFAULT_CHARGES[named])
    found = _ION.fullmatch(cleaned)
    symbol = _BY_FOLD.get(found["symbol"].casefold()) if found is not None else None
    if found is None or symbol is None or cleaned.count("(") != cleaned.count(")"):
        raise refused(f"'{text[:40]}' is not a known ion", value=text[:40], expected=EXPECTED)
    expected = DEFAULT_CHARGES[symbol]
    charge = int(found["before"] or found["after"] or 0) or len(found["pluses"] or "")
    if charge not in (0, expected):
        raise refused(
            f"'{text[:40]}' has charge {charge}+, but {symbol} inserts with charge {expected}+",
            value=text[:40],
            expected=Ion(symbol, expected).label,
        )
    return Ion(symbol, expected)
