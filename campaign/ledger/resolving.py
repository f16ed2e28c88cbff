"""Finding, comparing and making the electrodes, electrolytes and cells a table names."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from campaign.errors import Fault, RecipeError, Refused
from campaign.ledger import schema
from campaign.ledger.book import Book
from campaign.ledger.instants import format_utc
from campaign.ledger.journal import Entry
from campaign.ledger.stored import same_number, versions_of

if TYPE_CHECKING:
    from campaign.ledger.flat.reading import FlatRow
    from campaign.ledger.importing import Outcome

Row = dict[str, Any]

ELECTRODE = ("material", "ion", "form")
CELL = (
    "electrode", "electrolyte", "specimen", "area_cm2", "configuration", "reference",
    "assembled_at",
)  # fmt: skip
_GATHERED = (*CELL, *ELECTRODE)


@dataclass
class _Gathered:
    """What the rows of a table state of one cell or electrode, and where each was first said.

    faulty: the columns that some row states and that could not be read.
    """

    label: str
    first: FlatRow
    faulty: set[str] = field(default_factory=set)
    stated: dict[str, tuple[Any, FlatRow]] = field(default_factory=dict)

    def value(self, name: str) -> Any:
        return self.stated[name][0] if name in self.stated else None


class Resolver:
    """Resolves the cells of one table against the book, making what is new."""

    def __init__(self, book: Book, entry: Entry, outcome: Outcome) -> None:
        self.book = book
        self.entry = entry
        self.outcome = outcome
        self.faults: list[Fault] = []
        self._versions: dict[tuple[str, int], list[Row]] = {}

    def resolve(self, rows: Sequence[FlatRow]) -> list[Fault]:
        """Compare known cells with the ledger, make new ones; return the faults."""
        self.faults = []
        cells, electrodes = self._gather(rows)
        for electrode in electrodes.values():
            if electrode.label in self.book.electrodes:
                self._compare_electrode(electrode, past=False)
        for cell in cells.values():
            if cell.label in self.book.cells:
                self._compare_cell(cell, past=False)
            else:
                self._make_cell(cell, electrodes)
        return self.faults

    def compare(self, rows: Sequence[FlatRow]) -> list[Fault]:
        """Compare the cells of unchanged rows with any version the ledger ever held."""
        self.faults = []
        cells, electrodes = self._gather(rows)
        for electrode in electrodes.values():
            if electrode.label in self.book.electrodes:
                self._compare_electrode(electrode, past=True)
        for cell in cells.values():
            if cell.label in self.book.cells:
                self._compare_cell(cell, past=True)
        return self.faults

    # Gathering -----------------------------------------------------------------------------

    def _gather(
        self, rows: Sequence[FlatRow]
    ) -> tuple[dict[str, _Gathered], dict[str, _Gathered]]:
        cells: dict[str, _Gathered] = {}
        electrodes: dict[str, _Gathered] = {}
        seen: set[tuple[Any, ...]] = set()
        for row in rows:
            label = row.values.get("cell")
            if label is None:
                continue
            key = (label, row.faulty, *map(row.values.get, _GATHERED))
            if key in seen:
                continue
            seen.add(key)
            self._note(cells, label, row, CELL)
            electrode = row.values.get("electrode") or self._electrode_label(label)
            if electrode is not None:
                self._note(electrodes, electrode, row, ELECTRODE)
        return cells, electrodes

    def _electrode_label(self, cell: str) -> str | None:
        row = self.book.cells.get(cell)
        return None if row is None else str(self.book.electrode_of(row)["label"])

    def _note(
        self, known: dict[str, _Gathered], label: str, row: FlatRow, names: Iterable[str]
    ) -> None:
        item = known.setdefault(label, _Gathered(label, row))
        item.faulty |= row.faulty
        for name in names:
            value = self._value(row, name)
            if value is None:
                continue
            if name not in item.stated:
                item.stated[name] = (value, row)
            elif not _agree(value, item.stated[name][0]):
                earlier = item.stated[name][1]
                self._fault(
                    row,
                    name,
                    f"{name} of {label} is '{row.raw(name)}' here and '{earlier.raw(name)}' in "
                    f"line {earlier.line}; make the two rows agree",
                    f"'{earlier.raw(name)}'",
                )

    def _value(self, row: FlatRow, name: str) -> Any:
        """Return what a row states, in stored form; recipes as their canonical key."""
        value = row.values.get(name)
        if value is None:
            return None
        if name == "electrolyte":
            return self._recipe_key(row, value)
        if name == "assembled_at":
            return format_utc(value.utc)
        return value

    def _recipe_key(self, row: FlatRow, text: str) -> str | None:
        try:
            recipe = self.book.recipe(text)
        except RecipeError as error:
            self._fault(
                row,
                "electrolyte",
                f"the recipe '{text}' cannot be read: {error}",
                error.expected or "a recipe such as 1 M NaPF6 in EC:DMC (1:1 v/v)",
            )
            return None
        for warning in recipe.warnings:
            self._warn(f"{text}: {warning}")
        return recipe.key

    # Comparing -----------------------------------------------------------------------------

    def _compare_cell(self, cell: _Gathered, *, past: bool) -> None:
        row = self.book.cells[cell.label]
        versions = self._all_versions("cell", row) if past else [row]
        for name, (value, where) in cell.stated.items():
            known = [self._known(version, name) for version in versions]
            if not any(_agree(value, item) for item in known):
                self._contradiction(where, "cell", cell.label, name, self._known(row, name))

    def _compare_electrode(self, electrode: _Gathered, *, past: bool) -> None:
        row = self.book.electrodes[electrode.label]
        versions = self._all_versions("electrode", row) if past else [row]
        for name, (value, where) in electrode.stated.items():
            shown = value.symbol if name == "ion" else value
            if not any(_agree(shown, version[name]) for version in versions):
                self._contradiction(where, "electrode", electrode.label, name, row[name])

    def _all_versions(self, kind: str, row: Row) -> list[Row]:
        key = (kind, row["record"])
        if key not in self._versions:
            table = schema.metadata.tables[kind]
            stored = versions_of(self.book.pen.connection, table, row["record"])
            self._versions[key] = stored or [row]
        return self._versions[key]

    def _known(self, row: Mapping[str, Any], name: str) -> Any:
        if name == "electrode":
            return self.book.electrode_of(row)["label"]
        if name == "electrolyte":
            return self.book.electrolyte_of(row)["key"]
        return row[name]

    def _contradiction(
        self, where: FlatRow, kind: str, label: str, name: str, known: Any
    ) -> None:
        stored = "none" if known is None else f"'{known}'"
        self._fault(
            where,
            name,
            f"{name} is '{where.raw(name)}' but {kind} {label} has {stored} in the ledger; "
            f"mend the row, or correct the ledger with 'campaign amend {kind}'",
            stored,
        )

    # Making --------------------------------------------------------------------------------

    def _make_cell(self, cell: _Gathered, electrodes: Mapping[str, _Gathered]) -> None:
        missing = [n for n in ("electrode", "area_cm2", "electrolyte") if n not in cell.stated]
        for name in missing:
            if name in cell.faulty:
                continue  # reported where it was read
            if name == "electrolyte" and cell.first.values.get(name) is not None:
                continue  # stated but unreadable: reported where it was read
            self._fault(
                cell.first,
                name,
                f"cell {cell.label} is new and its {name} is not stated; fill the column {name} "
                "in its first row",
                f"the {name} of the cell",
            )
        if missing:
            return
        electrolyte = self._electrolyte(cell)
        electrode = self._electrode(cell, electrodes)
        if electrode is None or not self._specimen_free(cell, electrode):
            return
        assembled = cell.stated.get("assembled_at")
        instant = assembled[1].values["assembled_at"] if assembled else None
        if cell.value("reference") is None and cell.value("configuration") != "symmetric":
            self._warn(
                "the reference electrode of some cells is not stated: their potentials cannot be "
                "compared between electrolytes"
            )
        self.book.make_cell(
            self.entry,
            {
                "label": cell.label,
                "electrode": electrode["record"],
                "electrolyte": electrolyte["record"],
                "specimen": cell.value("specimen"),
                "area_cm2": cell.value("area_cm2"),
                "configuration": cell.value("configuration"),
                "reference": cell.value("reference"),
                "assembled_at": cell.value("assembled_at"),
                "assembled_offset": instant.offset_minutes if instant else None,
            },
        )
        self.outcome.cells.append(cell.label)

    def _electrolyte(self, cell: _Gathered) -> Row:
        key, where = cell.stated["electrolyte"]
        if key not in self.book.electrolytes:
            text = where.values["electrolyte"]
            self.book.make_electrolyte(self.entry, self.book.recipe(text), text)
            self.outcome.electrolytes.append(key)
        return self.book.electrolytes[key]

    def _electrode(
        self, cell: _Gathered, electrodes: Mapping[str, _Gathered]
    ) -> Row | None:
        label = cell.value("electrode")
        if label not in self.book.electrodes:
            stated = electrodes[label]
            ion = stated.value("ion") or self._ion_of(cell)
            if ion is None:
                return None
            self.book.make_electrode(
                self.entry,
                {
                    "label": label,
                    "material": stated.value("material"),
                    "ion": ion.symbol,
                    "charge": ion.charge,
                    "form": stated.value("form"),
                },
            )
            self.outcome.electrodes.append(label)
        return self.book.electrodes[label]

    def _ion_of(self, cell: _Gathered) -> Any:
        """Return the insertion ion a single-cation recipe implies."""
        from campaign.chemistry.concentrations import recipe_ions
        from campaign.chemistry.ions import parse_ion

        where = cell.stated["electrolyte"][1]
        recipe = self.book.recipe(where.values["electrolyte"])
        ions = sorted(recipe_ions(recipe, self.book.species))
        if len(ions) == 1:
            try:
                ion = parse_ion(ions[0])
            except Refused:
                ion = None
            if ion is not None:
                self._warn(
                    f"the insertion ion of {cell.value('electrode')} is taken to be {ion.symbol}, "
                    "the only cation of its electrolyte"
                )
                return ion
        found = ", ".join(ions) if ions else "no known cation"
        self._fault(
            cell.first,
            "ion",
            f"the insertion ion of electrode {cell.value('electrode')} is not stated and its "
            f"electrolyte holds {found}; fill the column ion",
            "an ion such as Na or Mg2+",
        )
        return None

    def _specimen_free(self, cell: _Gathered, electrode: Row) -> bool:
        specimen = cell.value("specimen") or cell.label
        owner = self.book.specimens.get(specimen)
        if owner is None or owner == electrode["record"]:
            return True
        self._fault(
            cell.stated.get("specimen", (None, cell.first))[1],
            "specimen",
            f"specimen {specimen} belongs to another electrode; a specimen is one physical piece",
            "a specimen of this electrode",
        )
        return False

    def _fault(self, row: FlatRow, column: str, message: str, expected: str) -> None:
        self.faults.append(Fault(message, row.file, row.line, column, row.raw(column), expected))

    def _warn(self, message: str) -> None:
        if message not in self.outcome.warnings:
            self.outcome.warnings.append(message)


def _agree(a: Any, b: Any) -> bool:
    """Return whether two stated values are one: numbers to 1e-9, texts exactly."""
    if isinstance(a, float) and isinstance(b, (int, float)):
        return same_number(a, float(b))
    if a is None or b is None:
        return a is b
    return bool(a == b)
