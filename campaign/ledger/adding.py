"""Adding electrodes, electrolytes, cells and species one by one."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from campaign.errors import RecipeError, refused
from campaign.ledger import schema
from campaign.ledger.book import Book
from campaign.ledger.fields import (
    ELECTRODE,
    ELECTROLYTE,
    ZERO_C,
    Field,
    clean_text,
    read_value,
    refuse_disorder,
)
from campaign.ledger.finding import find_record
from campaign.ledger.journal import writing

if TYPE_CHECKING:
    from campaign.ledger.database import Database

Row = dict[str, Any]

HIGHEST_V = 100.0  # no electrode is polarised further


def add_electrode(
    database: Database,
    label: str,
    ion: str,
    stated: Mapping[str, str | None],
    plateaus: Sequence[str] = (),
    who: str | None = None,
) -> str:
    """Add an electrode; return its label. stated: field name -> text, as `fields` lists them."""
    from campaign.chemistry.ions import parse_ion

    charge = parse_ion(ion)
    values: Row = {"label": clean_text(label, "label"), "ion": charge.symbol}
    values["charge"] = charge.charge
    with writing(database, who=who) as pen:
        book = Book.read(pen)
        if values["label"] in book.electrodes:
            raise _taken("electrode", values["label"])
        for field in ELECTRODE:
            text = stated.get(field.name)
            if text is None:
                continue
            if field.kind == "electrolyte":
                values[field.column] = find_record(pen.connection, "electrolyte", text)["record"]
            else:
                values[field.column] = read_value(field, text)
        refuse_disorder("electrode", values)
        entry = pen.entry("add", f"electrode {values['label']}")
        book.make_electrode(entry, values, _plateaus(plateaus, values))
    return str(values["label"])


def _taken(kind: str, label: str) -> Exception:
    return refused(
        f"there is {'an' if kind[0] in 'aeiou' else 'a'} {kind} '{label}' already; "
        f"'campaign amend {kind}' changes it",
        column="label",
        value=label,
        expected="a label not in use",
    )


def _plateaus(texts: Sequence[str], values: Row) -> list[Row]:
    found = [_plateau(text, values) for text in texts]
    for place, (text, item) in enumerate(zip(texts, found, strict=True)):
        if any(item["low_V"] == earlier["low_V"] for earlier in found[:place]):
            raise refused(
                f"the plateau '{text}' begins where another one begins; give each once",
                column="plateau",
                value=text,
                expected="plateaus that begin at different potentials",
            )
    return found


def _plateau(text: str, values: Row) -> Row:
    """Return a plateau written LOW:HIGH, or LOW:HIGH:REFERENCE."""
    from campaign.chemistry.references import canonical_reference

    parts = text.split(":", 2)
    try:
        low, high = float(parts[0]), float(parts[1])
        if not -HIGHEST_V <= low < high <= HIGHEST_V:
            raise ValueError
    except (ValueError, IndexError):
        raise refused(
            f"the plateau '{text}' cannot be read; write LOW:HIGH or LOW:HIGH:REFERENCE in V",
            column="plateau",
            value=text,
            expected="LOW:HIGH:REFERENCE such as 3.30:3.42:Na/Na+",
        ) from None
    reference = parts[2] if len(parts) == 3 else values.get("window_reference")
    if not reference:
        raise refused(
            f"the plateau '{text}' does not name its potential scale; write LOW:HIGH:REFERENCE",
            column="plateau",
            value=text,
            expected="LOW:HIGH:REFERENCE such as 3.30:3.42:Na/Na+",
        )
    return {"low_V": low, "high_V": high, "reference": canonical_reference(reference)}


def add_electrolyte(
    database: Database,
    text: str,
    stated: Mapping[str, str | None],
    conductivity: Sequence[str] = (),
    activity: Sequence[str] = (),
    who: str | None = None,
) -> tuple[str, tuple[str, ...]]:
    """Add an electrolyte; return its canonical recipe and what was assumed in reading it."""
    with writing(database, who=who) as pen:
        book = Book.read(pen)
        try:
            recipe = book.recipe(text)
        except RecipeError as error:
            raise refused(
                f"the recipe '{text}' cannot be read: {error}",
                column="electrolyte",
                value=text,
                expected=error.expected or "a recipe such as 1 M NaPF6 in EC:DMC (1:1 v/v)",
            ) from None
        if recipe.key in book.electrolytes:
            raise _taken("electrolyte", recipe.key)
        values = {
            field.column: read_value(field, stated[field.name])
            for field in ELECTROLYTE
            if stated.get(field.name) is not None
        }
        properties = [
            *(_at_temperature(item, "conductivity_S_cm", 1e-3) for item in conductivity),
            *(_at_temperature(item, "activity_coefficient", 1.0) for item in activity),
        ]
        refuse_disorder("electrolyte", values)
        _refuse_twice(properties)
        entry = pen.entry("add", f"electrolyte {recipe.key}")
        book.make_electrolyte(entry, recipe, text, values, properties)
    return recipe.key, recipe.warnings


def _refuse_twice(properties: Sequence[Row]) -> None:
    seen: set[tuple[str, float]] = set()
    for item in properties:
        key = (item["property"], item["temperature_K"])
        if key in seen:
            raise refused(
                f"the {item['property'].split('_')[0]} at {key[1] - ZERO_C:g} degC is given twice; "
                "give it once",
                column=item["property"],
                value=f"{key[1] - ZERO_C:g}",
                expected="one value a temperature",
            )
        seen.add(key)


_POSITIVE = Field("value", "value", "number", low=0, above=True)
_TEMPERATURE = Field(
    "temperature_C", "temperature_K", "number", low=-ZERO_C, above=True, offset=ZERO_C
)


def _at_temperature(text: str, name: str, factor: float) -> Row:
    """Return a property written TEMPERATURE:VALUE (degC)."""
    temperature, colon, value = text.partition(":")
    if not colon:
        raise refused(
            f"'{text}' does not say at which temperature; write TEMPERATURE:VALUE such as 25:8.2",
            column=name,
            value=text,
            expected="TEMPERATURE:VALUE, the temperature in degrees Celsius",
        )
    return {
        "property": name,
        "temperature_K": read_value(_TEMPERATURE, temperature),
        "value": read_value(_POSITIVE, value) * factor,
    }


def add_cell(database: Database, stated: Mapping[str, str | None], who: str | None = None) -> str:
    """Add a cell before its first measurement; return its label."""
    from campaign.ledger.amending import read_stated
    from campaign.ledger.fields import CELL

    with writing(database, who=who) as pen:
        book = Book.read(pen)
        values: Row = {}
        for field in CELL:
            text = stated.get(field.name)
            if text is not None:
                values.update(read_stated(pen.connection, "cell", field, text))
            elif field.required:
                raise refused(
                    f"the {field.name} of the cell is not stated; give --{field.name}",
                    column=field.name,
                    expected=field.expected,
                )
        if values["label"] in book.cells:
            raise _taken("cell", values["label"])
        entry = pen.entry("add", f"cell {values['label']}")
        book.make_cell(entry, values)
    return str(values["label"])


def _refuse_unread_cation(cation: str | None) -> None:
    from campaign.chemistry.ions import parse_ion

    if cation is not None:
        parse_ion(cation)


def _species_name(name: str) -> str:
    """Return a species' name after checking that a recipe can spell it."""
    from campaign.chemistry.recipes import solvent_key_of

    label = clean_text(name, "name")
    try:
        read = solvent_key_of(label)
    except RecipeError as error:
        read = str(error)
    if label not in read:
        raise refused(
            f"a recipe cannot name a species '{label}'; write letters, digits and hyphens",
            column="name",
            value=label,
            expected="a name such as HFE-7 or NaBOB",
        )
    return label


def add_species(
    database: Database, name: str, classes: Sequence[str], stated: Row, who: str | None = None
) -> str:
    """Add a species the shipped table lacks; its values carry the stated source."""
    known = ("salt", "solvent", "additive")
    wrong = [item for item in classes if item not in known]
    if wrong or not classes:
        raise refused(
            f"the class of a species is one of {', '.join(known)}"
            + (f"; '{wrong[0]}' is not" if wrong else ""),
            column="class",
            value=wrong[0] if wrong else None,
            expected=", ".join(known),
        )
    for key in ("formula", "cation", "caution", "source"):
        if stated.get(key) is not None:
            stated[key] = clean_text(str(stated[key]), key)
    _refuse_unread_cation(stated.get("cation"))
    with writing(database, who=who) as pen:
        label = _species_name(name)
        book = Book.read(pen)
        if any(item.name == label for item in book.species):
            raise _taken("species", label)
        entry = pen.entry("add", f"species {label}")
        pen.make(
            entry,
            schema.species,
            {"name": label, "classes": ";".join(classes), **stated},
        )
    return label
