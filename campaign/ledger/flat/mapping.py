"""The mapping file (TOML): renames columns, gives constants, names the sheet of an XLSX."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from campaign.errors import Fault, Refused, refused
from campaign.ledger.flat.headers import HeaderError, read_header

KEYS = {
    "columns": 'a table such as [columns] "charge transfer" = "R_ct/Ω"',
    "constants": 'a table such as [constants] electrode = "film A"',
    "ignore": 'a list such as ["remarks"]',
    "sheet": "the name of a sheet",
    "decimal": "'.' or ','",
}


@dataclass(frozen=True)
class TableMapping:
    """columns: their header -> ours (with unit); constants: our header -> value for each row."""

    columns: Mapping[str, str] = field(default_factory=dict)
    constants: Mapping[str, Any] = field(default_factory=dict)
    ignore: frozenset[str] = frozenset()
    sheet: str | None = None
    decimal: str | None = None


def read_mapping(path: Path) -> TableMapping:
    """Return the mapping a TOML file states; raises Refused with every fault in it."""
    try:
        stated = tomllib.loads(path.read_text(encoding="utf-8-sig"))
    except OSError as error:
        raise refused(
            f"the mapping file {path} cannot be read: {error.strerror}",
            file=str(path),
            expected="a TOML file",
        ) from None
    except (tomllib.TOMLDecodeError, UnicodeDecodeError, RecursionError) as error:
        raise refused(
            f"the mapping file is not TOML: {error}", file=str(path), expected="a TOML file"
        ) from None
    faults = [*_shape(stated), *_names(stated)]
    if faults:
        raise Refused(Fault(f.message, str(path), None, f.column, f.value, f.expected) for f in faults)
    return TableMapping(
        columns=stated.get("columns", {}),
        constants=stated.get("constants", {}),
        ignore=frozenset(stated.get("ignore", ())),
        sheet=stated.get("sheet"),
        decimal=stated.get("decimal"),
    )


def _shape(stated: Mapping[str, Any]) -> list[Fault]:
    right = {
        "columns": lambda v: isinstance(v, dict) and all(isinstance(x, str) for x in v.values()),
        "constants": lambda v: isinstance(v, dict)
        and all(isinstance(x, (str, int, float)) for x in v.values()),
        "ignore": lambda v: isinstance(v, list) and all(isinstance(x, str) for x in v),
        "sheet": lambda v: isinstance(v, str),
        "decimal": lambda v: v in (".", ","),
    }
    faults = []
    for key, value in stated.items():
        if key not in KEYS:
            faults.append(
                Fault(
                    f"the key '{key}' is not known here",
                    column=key,
                    value=key,
                    expected="one of " + ", ".join(KEYS),
                )
            )
        elif not right[key](value):
            faults.append(
                Fault(f"the key '{key}' has the wrong form", column=key, expected=KEYS[key])
            )
    return faults


def _names(stated: Mapping[str, Any]) -> list[Fault]:
    faults = []
    columns, constants = stated.get("columns"), stated.get("constants")
    ours = list(columns.values()) if isinstance(columns, dict) else []
    ours += list(constants) if isinstance(constants, dict) else []
    for name in ours:
        try:
            read_header(str(name))
        except HeaderError as error:
            faults.append(Fault(str(error), column=str(name), value=str(name), expected=error.expected))
    return faults
