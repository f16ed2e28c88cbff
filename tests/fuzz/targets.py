"""What is fuzzed, and what must hold whatever the input: a result or a refusal, never a crash.

Each target takes bytes. A target that finds something wrong raises; a refusal is no fault.
"""

from __future__ import annotations

import math
import os
import tempfile
from collections.abc import Callable
from pathlib import Path

from campaign.chemistry.recipes import parse_recipe
from campaign.errors import RecipeError
from campaign.ledger.flat.reading import read_table
from campaign.ledger.flat.values import OtherMark, as_point, with_uncertainty


class Wrong(AssertionError):
    """Something that must hold does not."""


def _must(holds: bool, what: str) -> None:
    if not holds:
        raise Wrong(what)


def recipe(content: bytes) -> bool:
    """Read a recipe; return whether it was accepted. Its canonical key must read back as itself.

    Bytes that are no UTF-8 become lone surrogates, as in the arguments of a command.
    """
    text = content.decode("utf-8", "surrogateescape")
    try:
        read = parse_recipe(text)
    except RecipeError as error:
        _must(0 <= error.position <= len(text), f"fault at {error.position} of {len(text)}")
        _must(bool(error.message), "a refusal without a message")
        return False
    _must(all(0 < part.amount < math.inf for part in read.components), "an amount out of range")
    _must(parse_recipe(read.key).key == read.key, f"{read.key!r} does not read back as itself")
    return True


def number(content: bytes) -> bool:
    """Read a number with or without its uncertainty, with either decimal mark.

    Whether value and uncertainty are in the range of their column is asked where they are used.
    """
    text = content.decode("utf-8", "surrogateescape")
    accepted = False
    for mark in ".,":
        try:
            value, error = with_uncertainty(as_point(text, mark))
        except (ValueError, OtherMark):
            continue
        accepted = True
        _must(math.isfinite(value), f"{value} is not finite")
        _must(error is None or math.isfinite(error), f"uncertainty {error}")
    return accepted


_FOLDER = "/dev/shm" if os.access("/dev/shm", os.W_OK) else None
_FILE = Path(tempfile.mkdtemp(prefix="campaign-fuzz-", dir=_FOLDER)) / "table.csv"


def table(content: bytes) -> bool:
    """Read a file as a flat table; rows or faults, and every fault a sentence."""
    _FILE.write_bytes(content)
    read = read_table(_FILE, zone="Europe/Paris")
    _must(bool(read.rows or read.faults), "neither rows nor faults")
    for fault in read.faults:
        _must(bool(fault.message), "a fault without a message")
        fault.sentence().encode()
    for row in read.rows:
        _must(all(name in row.values for name in row.values), "a row without values")
        for value in row.values.values():
            _must(not isinstance(value, float) or math.isfinite(value), f"{value} is not finite")
    return not read.faults


TARGETS: dict[str, Callable[[bytes], bool]] = {"recipe": recipe, "number": number, "table": table}

_HEAD = b"cell,measured_at,potential_V,temperature_C,R_ct,note\n"
_FULL = b"electrode,ion,cell,area_cm2,electrolyte,measured_at,E/mV,T/K,R_ct/kOhm,R_sl,n_ct\n"

SEEDS: dict[str, tuple[bytes, ...]] = {
    "recipe": (
        b"1 M NaPF6 in EC:DMC (1:1 v/v) + 2 wt% FEC",
        b"1.0 mol/L NaClO4 in PC",
        b"0.5 mol dm-3 NaClO4 / PC",
        b"3 mol/kg NaTFSI in water",
        b"0.8M NaPF6 + 0.2 M NaTFSI in EC/DEC 3:7 wt + 1 vol% VC + 0.5 wt% NaDFOB",
        "1 mol·L⁻¹ LiPF₆ in EC:EMC:DMC (1:1:1 by volume)".encode(),
        b"1,5 m Zn(OTf)2 in H2O",
        b"saturated NaCl in water",
    ),
    "number": (
        b"41.2", b"-0.5e-3", "41.2±0.8".encode(), b"41.2+/-0.8", b"41.2(8)", b"(41.2+/-0.8)e3",
        b"41,2(8)", b"4.12(8)e1", "−3".encode(), b"1 234.5", b"absent",
    ),
    "table": (
        _HEAD + b"A,2026-03-14T09:30+01:00,3.4,25,41.2,fine\n",
        _HEAD.replace(b",", b";") + b"A;2026-03-14 09:30;3,4;25;41,2(8);\n",
        _FULL + b'E,Na,A,1.1,"1 M NaPF6 in EC:DMC (1:1 v/v)",2026-03-14T09:30Z,'
        b"3400,298,0.04,absent,0.9\n",
        _HEAD.replace(b",", b"\t") + "A\t2026-03-14T09:30Z\t3.4\t25\t41.2±0.8\t\n".encode(),
        b"sep=;\n" + _HEAD.replace(b",", b";"),
    ),
}  # fmt: skip

TOKENS: dict[str, tuple[bytes, ...]] = {
    "recipe": (
        b" M ", b" m ", b" mM ", b"mol/L", b"mol/kg", b"mol dm-3", b" in ", b" / ", b" + ", b":",
        b"(1:1 v/v)", b"(3:7 w/w)", b"wt%", b"vol%", b"mol%", b"NaPF6", b"NaClO4", b"NaTFSI",
        b"LiPF6", b"KFSI", b"Zn(OTf)2", b"Mg(TFSI)2", b"EC", b"DMC", b"DEC", b"PC", b"FEC",
        b"VC", b"water", b"H2O", b"1.0", b"0,5", b"1e3", b"by volume", b"by weight",
        "·".encode(), "⁻¹".encode(), "₆".encode(), "\u00a0".encode(), b"\xff", b"\x00",
    ),
    "number": (
        b"+/-", "±".encode(), b"(8)", b"e", b"E-", b".", b",", b"-", b"nan", b"inf", b"1e308",
        b"_", b" ", "\u2009".encode(), "−".encode(), "٣".encode(), b"0x1p3",
    ),
    "table": (
        b",", b";", b"\t", b'"', b'""', b"\r\n", b"\n", b"\x00", b"\xef\xbb\xbf", b"\xff\xfe",
        b"cell", b"measured_at", b"potential_V", b"temperature_C", b"R_ct", b"R_ct_se", b"R_sl",
        b"R_ct/(Ohm cm2)", b"T/K", b"E/mV", b"A/mm2", b"R_ct_se/%", b"absent", b"41.2(8)",
        b"=1+1", b"2026-03-14T09:30+01:00", b"2026-03-29 02:30", b"03/04/2026", b"sep=;", b"#",
        b"symmetric", b"Na/Na+", b"Ag/AgCl", b"1e999", b"PK\x03\x04", b"1,234", b"3,4",
    ),
}  # fmt: skip
