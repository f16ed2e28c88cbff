"""How chemists type: one spelling for sub- and superscripts, dashes, dots and spaces.

Everything here is linear in the length of the text, and positions in the cleaned text
can be traced back to the text as it was typed.
"""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass

from campaign.errors import RecipeError

MAX_LENGTH = 500

_DASHES = "\u2010\u2011\u2012\u2013\u2014\u2015\u2212\u00ad\ufe58\ufe63\uff0d"
_DOTS = "\u00b7\u22c5\u2022\u2219\u30fb\u0387\u2027"
_SINGLE = {**dict.fromkeys(_DASHES, "-"), **dict.fromkeys(_DOTS, "·")}
_SINGLE |= {"\u00d7": "×", "\u2044": "/", "\u2215": "/", "\u2236": ":", "\u2019": "'"}
# Left behind by copying from web pages and PDF files; they carry no meaning.
_DROPPED = "\u200b\ufeff\u2060\u00ad"
_REFUSED_CATEGORIES = ("Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp")


@dataclass(frozen=True)
class Cleaned:
    """A text in one spelling; `at[i]` is where its character i stood in the original.

    `at` is one longer than `text`: its last entry is the length of the original.
    """

    text: str
    at: tuple[int, ...]


def clean(text: str) -> Cleaned:
    """Return `text` with one spelling for what typists vary, and where each character stood.

    Compatibility forms are resolved (NFKC), dashes and middle dots unified, runs of space
    collapsed and a run of superscripts opened by '^' so that 10⁻³ stays a power.
    Raises RecipeError for control and invisible characters and for a text that is too long.
    """
    if len(text) > MAX_LENGTH:
        raise RecipeError(
            f"the text has {len(text)} characters; at most {MAX_LENGTH} can be read",
            MAX_LENGTH,
            f"at most {MAX_LENGTH} characters",
        )
    out: list[str] = []
    at: list[int] = []
    raised = False
    start = 0
    while start < len(text):
        end = start + 1
        while end < len(text) and unicodedata.combining(text[end]):
            end += 1
        raised = _append(text[start:end], start, raised, out, at)
        start = end
    while out and out[-1] == " ":
        out.pop()
        at.pop()
    at.append(len(text))
    return Cleaned("".join(out), tuple(at))


def _append(group: str, start: int, raised: bool, out: list[str], at: list[int]) -> bool:
    """Append one character (with its combining marks); return whether it was superscript."""
    plain = _plain(group, start)
    is_raised = not group.isascii() and unicodedata.decomposition(group[0]).startswith("<super>")
    if is_raised and not raised and plain and plain[0] in "0123456789+-" and out[-1:] != ["^"]:
        plain = "^" + plain
    for character in plain:
        if character == " " and (not out or out[-1] == " "):
            continue
        out.append(character)
        at.append(start)
    return is_raised


def _plain(group: str, start: int) -> str:
    if len(group) == 1:
        if group.isascii() and group.isprintable():
            return group
        if group == "\t":
            return " "
        if group in _DROPPED:
            return ""
        if unicodedata.category(group) in _REFUSED_CATEGORIES:
            raise RecipeError(
                f"character U+{ord(group):04X} cannot be part of a name or a recipe",
                start,
                "letters, digits, spaces and punctuation",
            )
    resolved = unicodedata.normalize("NFKC", "".join(_SINGLE.get(c, c) for c in group))
    return "".join(" " if c.isspace() else _SINGLE.get(c, c) for c in resolved)


def fold(name: str) -> str:
    """Return an already cleaned name without case, for comparison only."""
    return name.casefold()


def clean_or_empty(name: str) -> str:
    """Return a typed name cleaned; '' if it cannot be a name."""
    try:
        return clean(name).text
    except RecipeError:
        return ""


def number_text(value: float) -> str:
    """Return the shortest text of a number to 12 significant digits: 1, 1.0, 1.00 are '1'."""
    return f"{value:.12g}"
