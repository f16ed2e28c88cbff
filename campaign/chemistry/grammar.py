"""The grammar of a recipe: salts, the solvent blend, additives, in the order papers write them.

    recipe    = salt { "+" salt } ("in" | "/" | "aq") blend { ("+" | "with" | ",") additive }
    salt      = AMOUNT NAME | NAME "(" AMOUNT ")"
    blend     = [RATIO [BASIS]] NAME { (":" | "/" | "+" | "-" | "and") NAME } [RATIO [BASIS]]
              | PERCENTAGE NAME { "+" PERCENTAGE NAME }   until they add up to 100 %
    additive  = AMOUNT NAME | NAME "(" AMOUNT ")"

Reading keeps what was written and where; the canonical form is made in `recipes`.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction

from campaign.chemistry.amounts import (
    EXPECT_AMOUNT,
    MASS,
    MOLE,
    PERCENTAGES,
    VOLUME,
    Amount,
)
from campaign.chemistry.naming import Name
from campaign.chemistry.scanner import EXPECT_BASIS, Scanner
from campaign.errors import RecipeError

_AND = re.compile(r" ?(?:\+|&|,|;| and (?:with )?| plus )(?: ?and )? ?", re.IGNORECASE)
_WITH = re.compile(r" ?,? ?(?:with|containing|\+)(?:(?: an| the)? additives?:?)? ", re.IGNORECASE)
_IN = re.compile(r" (?:dissolved |solution )?in(?![A-Za-z0-9]) ?", re.IGNORECASE)
_MIXTURE = re.compile(r"(?:(?:an?|the) )?(?:mixture|blend) of ", re.IGNORECASE)
_ARTICLE = re.compile(r"an? (?=[0-9])")
_AQUEOUS = re.compile(
    r" ?(?:\( ?aq\.? ?\)|(?<= )aq(?:ueous(?: solution)?)?(?![A-Za-z0-9])\.?)", re.IGNORECASE
)
_OF = re.compile(r" ?(?:of )?", re.IGNORECASE)
_TAIL = re.compile(r"(?: as)?(?: an)? additives?(?![A-Za-z0-9])", re.IGNORECASE)
_LEAD = re.compile(r" ?(?:(?:=|in an?|in|with an?|with|at an?|at|of) ?)?", re.IGNORECASE)
_BRACKET_IN_NAME = re.compile(r"\([^():/+ ]*\)")
_RATIO_OF = re.compile(r" ?[=,]? ?")
_CLOSE = re.compile(r" ?\)")
_NEXT_BASIS = re.compile(r" ?[,/]? ?")


_BLEND_BASIS = {VOLUME: "v/v", MASS: "w/w", MOLE: "mol/mol"}


@dataclass(frozen=True)
class Entry:
    """A salt or an additive as written."""

    name: Name
    amount: Amount
    hydrate: bool = False


@dataclass(frozen=True)
class Blend:
    """Solvents as written; `parts` is empty where no ratio stands, `basis` None where none."""

    names: tuple[Name, ...]
    parts: tuple[Fraction, ...]
    basis: str | None
    ratio_start: int


@dataclass(frozen=True)
class Written:
    """A recipe as written."""

    salts: tuple[Entry, ...]
    blend: Blend
    additives: tuple[Entry, ...]


def read_recipe(scanner: Scanner, water: Name) -> Written:
    """Read a whole recipe. `water` is the solvent that 'aq' stands for."""
    if scanner.at_end():
        raise RecipeError("an empty recipe; expected one such as '1 M NaPF6 in PC'", 0, "a recipe")
    entries = _read_solutes(scanner)
    if scanner.take(_AQUEOUS):
        blend = Blend((water,), (), None, scanner.position)
    else:
        if not scanner.take(_IN) and not scanner.take_mark("/"):
            raise scanner.unexpected("'in' and the solvent")
        blend = read_blend(scanner)
    additives = [entry for entry in entries if entry.amount.unit in PERCENTAGES]
    salts = [entry for entry in entries if entry.amount.unit not in PERCENTAGES]
    if not salts:
        raise scanner.fault("no salt", entries[0].amount.start, "a salt such as '1 M NaPF6'")
    additives.extend(_read_additives(scanner))
    more = "':' and a solvent, " if len(blend.names) == 1 and not additives else ""
    _finish(scanner, f"{more}'+' and an additive, or the end")
    return Written(tuple(salts), blend, tuple(additives))


def read_blend(scanner: Scanner) -> Blend:
    """Read a solvent blend with its ratio before or behind the names, in brackets or not."""
    bracketed = scanner.text[scanner.position : scanner.position + 1] == "("
    if not bracketed or _BRACKET_IN_NAME.match(scanner.text, scanner.position):
        return _read_bare_blend(scanner)
    scanner.take_mark("(")
    blend = _read_bare_blend(scanner)
    if not scanner.take(_CLOSE):
        raise scanner.unexpected("a closing bracket ')'")
    if blend.parts:
        return blend
    start, parts, basis = _read_ratio(scanner)
    return Blend(blend.names, tuple(parts), basis, start)


def _read_bare_blend(scanner: Scanner) -> Blend:
    if not scanner.take(_MIXTURE):
        scanner.take(_ARTICLE)
    start, parts, basis = scanner.position, [], None
    if scanner.peek_amount(start) or scanner.name_then_amount(start):
        return _read_percentages(scanner)
    if scanner.peek_ratio():
        parts, basis = scanner.ratio(), _read_basis(scanner)
        scanner.skip_space()
        scanner.take(_MIXTURE)
    names = [scanner.name()]
    while _take_separator(scanner):
        names.append(scanner.name())
    if not parts:
        start, parts, basis = _read_ratio(scanner)
    elif basis is None:
        basis = _read_basis(scanner)
    return Blend(tuple(names), tuple(parts), basis, start)


def _read_percentages(scanner: Scanner) -> Blend:
    """Read '30 vol% EC + 70 vol% DMC' or 'EC (30 vol%) + DMC (70 vol%)'."""
    start, entries, total = scanner.position, [_read_additive(scanner)], Fraction(0)
    while (total := total + _percentage(scanner, entries)) < 100:
        if not (scanner.take(_AND) or scanner.take_mark(":/")):
            raise scanner.fault(
                f"the solvents add up to {float(total):.6g} %", start, "solvents of 100 % together"
            )
        entries.append(_read_additive(scanner))
    if total > 100:
        raise scanner.fault(
            f"the solvents add up to {float(total):.6g} %", start, "solvents of 100 % together"
        )
    basis = None if entries[0].amount.remark else _BLEND_BASIS[entries[0].amount.unit]
    parts = tuple(entry.amount.value for entry in entries)
    return Blend(tuple(entry.name for entry in entries), parts, basis, start)


def _percentage(scanner: Scanner, entries: list[Entry]) -> Fraction:
    first, last = entries[0].amount, entries[-1].amount
    if last.unit not in PERCENTAGES or (last.unit, last.remark) != (first.unit, first.remark):
        raise scanner.fault("solvents on two bases", last.start, "vol%, wt% or mol% throughout")
    return last.value


def read_additives(scanner: Scanner) -> tuple[Entry, ...]:
    """Read additives alone: '2 wt% FEC + 1 vol% VC'."""
    entries = [_read_additive(scanner), *_read_additives(scanner)]
    _finish(scanner, "'+' and an additive, or the end")
    return tuple(entries)


def read_salts(scanner: Scanner) -> tuple[list[Name], list[Fraction], int]:
    """Read salts alone: 'NaPF6:NaTFSI (0.8:0.2)' or '0.8 M NaPF6 + 0.2 M NaTFSI'."""
    if scanner.peek_amount(scanner.position):
        entries = _read_solutes(scanner)
        _finish(scanner, "'+' and a salt, or the end")
        return [e.name for e in entries], [e.amount.value for e in entries], 0
    blend = read_blend(scanner)
    _finish(scanner, "a ratio such as (0.8:0.2), or the end")
    if blend.basis not in (None, "mol/mol"):
        raise scanner.fault("salts are counted in moles", blend.ratio_start, "a ratio of moles")
    return list(blend.names), list(blend.parts), blend.ratio_start


def _finish(scanner: Scanner, expected: str) -> None:
    scanner.take_mark(".")
    if not scanner.at_end():
        raise scanner.unexpected(expected)


def _read_solutes(scanner: Scanner) -> list[Entry]:
    entries = [_read_solute(scanner)]
    while True:
        before = scanner.position
        if not scanner.take(_AND) and not scanner.take_mark("/"):
            return entries
        at = scanner.position
        if not scanner.peek_amount(at) and not scanner.name_then_amount(at):
            if scanner.text[before : scanner.position].strip() == "/":
                scanner.position = before
                return entries
            raise _no_amount(scanner)
        entries.append(_read_solute(scanner))


def _read_solute(scanner: Scanner) -> Entry:
    amount = scanner.amount()
    if amount is None:
        if not scanner.name_then_amount(scanner.position):
            raise _no_amount(scanner)
        name = scanner.name()
        return Entry(name, _amount_behind(scanner))
    scanner.take(_OF)
    name = scanner.name()
    return Entry(name, amount, scanner.take_hydrate())


def _no_amount(scanner: Scanner) -> RecipeError:
    if scanner.number() is None:
        return scanner.unexpected(EXPECT_AMOUNT)
    return scanner.unexpected("a unit such as M, mol/L, mol/kg or wt%")


def _take_separator(scanner: Scanner) -> bool:
    """Read what joins two solvents; False where the blend ends or an additive follows."""
    before = scanner.position
    if scanner.take_mark(":/|"):
        return True
    if scanner.hyphen_joins():
        scanner.position += 1
        return True
    if not scanner.take(_AND):
        return False
    at = scanner.position
    if scanner.peek_amount(at) or scanner.text[at : at + 1] == "-" or scanner.name_then_amount(at):
        scanner.position = before
        return False
    if scanner.peek_ratio():
        scanner.position = before
        return False
    return True


def _read_ratio(scanner: Scanner) -> tuple[int, list[Fraction], str | None]:
    """Read the ratio behind the names, in brackets or not; no parts where there is none."""
    before = scanner.position
    if scanner.take_mark("("):
        return _read_bracketed(scanner)
    scanner.take(_RATIO_OF)
    scanner.take(_LEAD)
    start = scanner.position
    basis = scanner.basis()
    if basis is not None:
        scanner.take(_RATIO_OF)
    if not scanner.peek_ratio():
        scanner.position = before
        return before, [], None
    parts = scanner.ratio()
    return start, parts, basis or _read_basis(scanner)


def _read_bracketed(scanner: Scanner) -> tuple[int, list[Fraction], str | None]:
    start = scanner.position
    basis = scanner.basis()
    if basis is not None:
        scanner.take(_RATIO_OF)
    parts = scanner.ratio()
    if basis is None:
        scanner.take(_NEXT_BASIS)
        basis = scanner.basis()
    if not scanner.take(_CLOSE):
        raise scanner.unexpected(f"{EXPECT_BASIS} or a closing bracket")
    return start, parts, basis or _read_basis(scanner)


def _read_basis(scanner: Scanner) -> str | None:
    """Read a basis that stands behind a ratio, in brackets or not."""
    before = scanner.position
    scanner.take(_NEXT_BASIS)
    if scanner.take_mark("("):
        basis = scanner.basis()
        if basis is None or not scanner.take_mark(")"):
            scanner.position = before
            return None
        _give_back_space(scanner)
        return basis
    basis = scanner.basis()
    if basis is None:
        scanner.position = before
    return basis


def _give_back_space(scanner: Scanner) -> None:
    if scanner.text[scanner.position - 1 : scanner.position] == " ":
        scanner.position -= 1


def _read_additives(scanner: Scanner) -> list[Entry]:
    entries = []
    while scanner.take(_WITH) or scanner.take(_AND):
        entries.append(_read_additive(scanner))
    return entries


def _read_additive(scanner: Scanner) -> Entry:
    scanner.skip_space()
    amount = scanner.amount()
    if amount is not None:
        scanner.take(_OF)
        name = scanner.name()
    else:
        if scanner.text[scanner.position : scanner.position + 1].isdigit() and not _named(scanner):
            raise _no_amount(scanner)
        name = scanner.name()
        amount = _amount_behind(scanner)
    scanner.take(_TAIL)
    return Entry(name, amount)


def _named(scanner: Scanner) -> bool:
    return scanner.name_then_amount(scanner.position)


def _amount_behind(scanner: Scanner) -> Amount:
    bracketed = scanner.take_mark("(")
    if not bracketed:
        scanner.skip_space()
    amount = scanner.amount()
    if amount is None:
        raise scanner.unexpected("the amount of the additive, such as 2 wt%")
    if bracketed and not scanner.take_mark(")"):
        raise scanner.unexpected("a closing bracket")
    if bracketed:
        _give_back_space(scanner)
    return amount
