"""The electrodes, electrolytes and cells in force, and those an entry is about to make.

A `Book` is read once under the write lock; entering a table of measurements then asks it for
every cell by label. What it makes it hands to the pen; nothing is written here.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from sqlalchemy import select

from campaign.ledger import schema
from campaign.ledger.journal import Entry, Pen, Row
from campaign.ledger.settings import in_force, zone

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

    from campaign.chemistry.recipes import Recipe
    from campaign.chemistry.species import Species


def rows_in_force(connection: Connection, table: Table) -> list[Row]:
    """Return every row of a table that is in force, as dictionaries."""
    return [
        dict(row) for row in connection.execute(select(table).where(in_force(table))).mappings()
    ]


def stored_species(connection: Connection) -> tuple[Species, ...]:
    """Return the species this campaign added to the shipped table."""
    from campaign.chemistry.species import Species

    return tuple(
        Species(
            name=row["name"],
            classes=tuple(row["classes"].split(";")),
            formula=row["formula"] or "",
            molar_mass=row["molar_mass"],
            molar_mass_source=row["source"] or "",
            cation=row["cation"] or "",
            cations=row["cations"],
            donor_number=row["donor_number"],
            donor_source=row["source"] or "",
            permittivity=row["permittivity"],
            permittivity_source=row["source"] or "",
            flash_point=row["flash_point_C"],
            flash_source=row["source"] or "",
            cautions=(row["caution"],) if row["caution"] else (),
        )
        for row in rows_in_force(connection, schema.species)
    )


@dataclass
class Book:
    """Records by their label, with what is needed to make new ones.

    electrodes and cells by label, electrolytes by canonical recipe; former: labels that a
    cell no longer carries, or of withdrawn cells, with the records that carried them.
    """

    pen: Pen
    zone: str
    species: Sequence[Species]
    electrodes: dict[str, Row]
    electrolytes: dict[str, Row]
    cells: dict[str, Row]
    former: dict[str, set[int]] = field(default_factory=dict)
    recipes: dict[str, Recipe] = field(default_factory=dict)
    specimens: dict[str, int] = field(default_factory=dict)

    @classmethod
    def read(cls, pen: Pen) -> Book:
        """Read the records in force on the pen's connection."""
        connection = pen.connection
        cells = {row["label"]: row for row in rows_in_force(connection, schema.cell)}
        book = cls(
            pen,
            zone(connection),
            stored_species(connection),
            {row["label"]: row for row in rows_in_force(connection, schema.electrode)},
            {row["key"]: row for row in rows_in_force(connection, schema.electrolyte)},
            cells,
        )
        book.specimens = {row["specimen"]: row["electrode"] for row in cells.values()}
        past = select(schema.cell.c.label, schema.cell.c.record).where(
            schema.cell.c.ended_by.is_not(None)
        )
        for label, record in connection.execute(past):
            book.former.setdefault(label, set()).add(record)
        return book

    def recipe(self, text: str) -> Recipe:
        """Return the recipe a text spells; raises RecipeError."""
        from campaign.chemistry.recipes import parse_recipe

        if text not in self.recipes:
            self.recipes[text] = parse_recipe(text, self.species)
        return self.recipes[text]

    def electrode_of(self, cell: Mapping[str, Any]) -> Row:
        """Return the electrode row a cell belongs to."""
        return self._by_record(self.electrodes, cell["electrode"])

    def electrolyte_of(self, cell: Mapping[str, Any]) -> Row:
        """Return the electrolyte row a cell was filled with."""
        return self._by_record(self.electrolytes, cell["electrolyte"])

    @staticmethod
    def _by_record(rows: Mapping[str, Row], record: int) -> Row:
        return next(row for row in rows.values() if row["record"] == record)

    def make_electrode(
        self, entry: Entry, values: Mapping[str, Any], plateaus: Sequence[Row] = ()
    ) -> Row:
        """Make an electrode from stored values (label, material, ion, charge ...)."""
        row = self.pen.make(entry, schema.electrode, values)
        for plateau in plateaus:
            self.pen.make(entry, schema.plateau, {**plateau, "electrode": row["id"]})
        self.electrodes[row["label"]] = row
        return row

    def make_electrolyte(
        self,
        entry: Entry,
        recipe: Recipe,
        written: str,
        values: Mapping[str, Any] | None = None,
        properties: Sequence[Row] = (),
    ) -> Row:
        """Make an electrolyte, with its components, from a recipe."""
        row = self.pen.make(
            entry,
            schema.electrolyte,
            {
                "key": recipe.key,
                "written": written,
                "salt_key": recipe.salt_key,
                "solvent_key": recipe.solvent_key,
                "additive_key": recipe.additive_key,
                "basis": recipe.basis,
                "aqueous": int(recipe.aqueous),
                **{k: v for k, v in (values or {}).items() if v is not None},
            },
        )
        for position, part in enumerate(recipe.components):
            self.pen.make(
                entry,
                schema.electrolyte_component,
                {
                    "electrolyte": row["id"],
                    "position": position,
                    "role": part.role,
                    "species": part.species,
                    "amount": part.amount,
                    "basis": part.basis,
                },
            )
        for item in properties:
            self.pen.make(
                entry, schema.electrolyte_property, {**item, "electrolyte": row["id"]}
            )
        self.electrolytes[recipe.key] = row
        return row

    def make_cell(self, entry: Entry, values: Mapping[str, Any]) -> Row:
        """Make a cell from stored values; its specimen is its own unless stated."""
        row = dict(values)
        row["specimen"] = row.get("specimen") or row["label"]
        row["configuration"] = row.get("configuration") or "three-electrode"
        made = self.pen.make(entry, schema.cell, row)
        self.cells[made["label"]] = made
        self.specimens.setdefault(made["specimen"], made["electrode"])
        return made
