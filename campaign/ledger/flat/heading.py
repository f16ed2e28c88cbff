"""The header line of a file, and the keys of a JSON object: which column is which."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

from campaign.errors import Fault
from campaign.ledger.flat.canonical import COLUMNS
from campaign.ledger.flat.columns import column_for
from campaign.ledger.flat.headers import Header, HeaderError, read_header, shown, tidy_header
from campaign.ledger.flat.mapping import TableMapping
from campaign.ledger.flat.rows import REQUIRED
from campaign.ledger.flat.values import ValueFault, read_reference
from campaign.ledger.quantities import QUANTITIES


@dataclass
class Heading:
    """What a header line says: a column a place (None: passed over), its faults.

    written: the headers as they stand. fixed: values every row has, from the mapping file or
    from a header that names the reference electrode. required: columns whose empty cells are
    faults.
    """

    headers: list[Header | None] = field(default_factory=list)
    written: list[str] = field(default_factory=list)
    fixed: dict[str, Any] = field(default_factory=dict)
    required: tuple[str, ...] = ()
    faults: list[Fault] = field(default_factory=list)
    warnings: list[str] = field(default_factory=list)


def read_heading(
    file: str, line: int, cells: Sequence[Any], mapping: TableMapping, zone: str
) -> Heading:
    """Return what the header line of a file says, with every fault in it."""
    heading = Heading()
    columns = {tidy_header(theirs): ours for theirs, ours in mapping.columns.items()}
    ignored = {tidy_header(name) for name in mapping.ignore}
    for cell in cells:
        text = "" if cell is None else str(cell).strip().lstrip("\ufeff")
        name = tidy_header(text[:500])
        heading.written.append(text)
        if not text or name in ignored:
            heading.headers.append(None)
            continue
        try:
            header = read_header(columns.get(name, text))
            heading.headers.append(_once(heading, header, text, file, line))
        except HeaderError as error:
            heading.headers.append(None)
            column = shown(text, 80)
            heading.faults.append(Fault(str(error), file, line, column, column, error.expected))
    _unused_names(heading, columns, file, line)
    _constants(heading, mapping, zone)
    _references(heading, file, line)
    _units_of_errors(heading, file, line)
    _unstated(heading)
    _missing(heading, file, line)
    return heading


def _once(heading: Heading, header: Header, text: str, file: str, line: int) -> Header | None:
    """Return a header as written in the file; None, and a fault, where it is there already."""
    header = replace(header, written=shown(text, 80))
    other = next((h for h in heading.headers if h is not None and h.name == header.name), None)
    if other is None:
        return header
    heading.faults.append(
        Fault(
            f"the columns '{other.written}' and '{header.written}' both mean {header.name}; keep "
            "one, or ignore one in a mapping file",
            file, line, header.written, header.written, f"one column {header.name}",
        )
    )  # fmt: skip
    return None


def _unused_names(heading: Heading, columns: Mapping[str, str], file: str, line: int) -> None:
    there = {tidy_header(text[:500]) for text in heading.written}
    for theirs in columns:
        if theirs not in there:
            heading.faults.append(
                Fault(
                    f"the mapping file renames a column '{shown(theirs, 60)}' that this file does "
                    "not have",
                    file, line, shown(theirs, 60), None, "a column of the file",
                )
            )  # fmt: skip


def _constants(heading: Heading, mapping: TableMapping, zone: str) -> None:
    """Read the mapping file's constants once; its decimal mark is a point."""
    there = {h.name for h in heading.headers if h is not None}
    for name, value in mapping.constants.items():
        header = read_header(name)
        if header.name in there or header.name in heading.fixed:
            message = (
                f"the mapping file gives {header.name} as a constant, and there is a column or "
                "another constant for it"
            )
            heading.faults.append(
                Fault(message, mapping.file, None, name, shown(value, 80), "one of the two")
            )
            continue
        found = column_for(header, ".", zone, guarded=False).convert(
            [value], _reporter(heading, mapping.file, name, value)
        )
        if found[0] is not None:
            heading.fixed[header.name] = found[0]


def _reporter(heading: Heading, file: str | None, name: str, value: object) -> Any:
    def report(place: int, cell: object, fault: ValueFault | None) -> None:
        if fault is not None:
            heading.faults.append(
                Fault(str(fault), file, None, name, shown(value, 80), fault.expected)
            )

    return report


def _references(heading: Heading, file: str, line: int) -> None:
    """Take the reference electrode from a header such as `E/V vs. Na/Na+`."""
    named = [h for h in heading.headers if h is not None and h.reference]
    has_column = any(h is not None and h.name == "reference" for h in heading.headers)
    for header in named:
        try:
            reference = read_reference("reference", header.reference)
        except ValueFault as fault:
            heading.faults.append(
                Fault(str(fault), file, line, header.written, header.reference, fault.expected)
            )
            continue
        known = heading.fixed.get("reference")
        if has_column or known not in (None, reference):
            other = "a column reference" if has_column else f"'{known}'"
            heading.faults.append(
                Fault(
                    f"the header names the reference electrode '{reference}' and there is also "
                    f"{other}; say it in one place",
                    file, line, header.written, header.reference, "one reference electrode",
                )
            )  # fmt: skip
        else:
            heading.fixed["reference"] = reference


def _units_of_errors(heading: Heading, file: str, line: int) -> None:
    """Compare the unit of each standard error with that of its value."""
    by_name = {h.name: h for h in heading.headers if h is not None}
    for header in by_name.values():
        value = by_name.get(header.name.removesuffix("_se"))
        if header.kind != "error" or value is None or header.scale.relative:
            continue
        if header.scale.per_area != value.scale.per_area:
            heading.faults.append(
                Fault(
                    f"one of '{value.written}' and '{header.written}' is per area and the other "
                    "is not; state the same unit for both",
                    file, line, header.written, header.written, "the unit of its value, or %",
                )
            )  # fmt: skip
        elif header.scale != value.scale and "/" not in header.written:
            heading.warnings.append(
                f"'{header.written}' states no unit and was read in the canonical one, although "
                f"'{value.written}' states another"
            )


def _unstated(heading: Heading) -> None:
    """Say which units were taken for other names than ours that state none."""
    taken = [
        f"{header.written} in {'degC' if unit == 'K' else unit}"
        for header in heading.headers
        if header is not None and not header.unit_stated
        for unit in (COLUMNS[header.name][1],)
        if unit not in ("", "1")
    ]
    if taken:
        heading.warnings.append(f"headers that state no unit were read so: {', '.join(taken)}")


def _missing(heading: Heading, file: str, line: int) -> None:
    """Note the required columns that are not there; the cells of those that are get checked."""
    there = {h.name for h in heading.headers if h is not None} | set(heading.fixed)
    heading.required = tuple(name for name in REQUIRED if name in there)
    unknown = bool(heading.faults)  # a misspelt header has its own fault
    for name, expected in REQUIRED.items():
        if name not in there and not unknown:
            heading.faults.append(
                Fault(
                    f"there is no column {name}; every row needs it",
                    file, line, name, None, expected,
                )
            )  # fmt: skip
    if not there.intersection(QUANTITIES) and not unknown:
        heading.faults.append(
            Fault(
                "there is no column of fitted values",
                file, line, None, None, "at least one of " + ", ".join(QUANTITIES),
            )
        )  # fmt: skip


def read_keys(
    file: str, line: int, stated: Mapping[str, object]
) -> tuple[list[Header | None], list[Any], dict[str, Any], list[Fault]]:
    """Return the columns, cells and fixed values of a JSON object, and the faults in its keys."""
    heading = Heading()
    cells: list[Any] = []
    for key, value in stated.items():
        name = shown(key, 80)
        if isinstance(value, (bool, dict, list)):
            heading.faults.append(
                Fault(
                    f"{name} is a JSON {_JSON[type(value)]}",
                    file, line, name, shown(value, 80), "a number or a text",
                )
            )  # fmt: skip
            continue
        try:
            header = read_header(str(key))
        except HeaderError as error:
            heading.faults.append(
                Fault(str(error), file, line, name, None, "a header of the flat table")
            )
            continue
        heading.headers.append(_once(heading, header, str(key), file, line))
        cells.append(value)
    _references(heading, file, line)
    _units_of_errors(heading, file, line)
    return heading.headers, cells, heading.fixed, heading.faults


_JSON = {bool: "true or false", dict: "object", list: "list"}
