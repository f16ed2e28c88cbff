"""The mapping file (TOML): renames columns, gives constants, names the sheet of an XLSX."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from datetime import date
from pathlib import Path
from typing import Any

from campaign.errors import Fault, Refused, refused
from campaign.ledger.flat.headers import HeaderError, read_header, shown

KEYS = {
    "columns": 'a table such as [columns] "charge transfer" = "R_ct/Ω"',
    "constants": 'a table such as [constants] electrode = "film A"',
    "ignore": 'a list such as ["remarks"]',
    "sheet": "the name of a sheet",
    "decimal": "'.' or ','",
}


@dataclass(frozen=True)
class TableMapping:
    """columns: their header -> ours (with unit); constants: our header -> value for each row.

    ignore: headers that are passed over. file: the mapping file's name.
    """

    columns: Mapping[str, str] = field(default_factory=dict)
    constants: Mapping[str, Any] = field(default_factory=dict)
    ignore: frozenset[str] = frozenset()
    sheet: str | None = None
    decimal: str | None = None
    file: str | None = None


LARGEST = 1 << 20  # bytes of a mapping file


def read_mapping(path: Path) -> TableMapping:
    """Return the mapping a TOML file states; raises Refused with every fault in it."""
    try:
        with path.open("rb") as stream:
            content = stream.read(LARGEST + 1)
        if len(content) > LARGEST:
            raise refused(
                "the mapping file is larger than a mapping can be",
                file=str(path),
                expected=f"at most {LARGEST} bytes",
            )
        stated = tomllib.loads(content.decode("utf-8-sig").replace("\r\n", "\n"))
    except OSError as error:
        raise refused(
            f"the mapping file {path} cannot be read: {error.strerror}",
            file=str(path),
            expected="a TOML file",
        ) from None
    except (ValueError, RecursionError) as error:  # of TOML, of UTF-8, of its numbers
        raise refused(
            f"the mapping file is not TOML: {error}", file=str(path), expected="a TOML file"
        ) from None
    faults = [*_shape(stated), *_names(stated)]
    if faults:
        raise Refused(replace(fault, file=str(path)) for fault in faults)
    return TableMapping(
        columns=stated.get("columns", {}),
        constants=stated.get("constants", {}),
        ignore=frozenset(stated.get("ignore", ())),
        sheet=stated.get("sheet"),
        decimal=stated.get("decimal"),
        file=path.name,
    )


def _shape(stated: Mapping[str, Any]) -> list[Fault]:
    right = {
        "columns": lambda v: isinstance(v, dict) and all(isinstance(x, str) for x in v.values()),
        "constants": lambda v: isinstance(v, dict)
        and all(isinstance(x, (str, int, float, date)) and type(x) is not bool for x in v.values()),
        "ignore": lambda v: isinstance(v, list) and all(isinstance(x, str) for x in v),
        "sheet": lambda v: isinstance(v, str),
        "decimal": lambda v: v in (".", ","),
    }
    faults = []
    for key, value in stated.items():
        if key not in KEYS:
            faults.append(
                Fault(
                    f"the key '{shown(key, 60)}' is not known here",
                    column=shown(key, 60),
                    value=shown(key, 60),
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
        if not isinstance(name, str):
            continue  # the wrong form of the table is a fault already
        try:
            read_header(name)
        except HeaderError as error:
            name = shown(name, 80)
            faults.append(Fault(str(error), column=name, value=name, expected=error.expected))
    return faults
