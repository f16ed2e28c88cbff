"""Finding one record by what a person calls it: a label, a recipe or a number."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from sqlalchemy import select

from campaign.errors import RecipeError, Refused, refused
from campaign.ledger import schema
from campaign.ledger.fields import unknown_label
from campaign.ledger.settings import in_force

if TYPE_CHECKING:
    from sqlalchemy import Connection

Row = dict[str, Any]

LONGEST_NUMBER = 15  # digits
KINDS = ("electrode", "electrolyte", "cell", "measurement", "fit")


def find_record(connection: Connection, kind: str, name: str) -> Row:
    """Return the row in force of a record named by label, recipe or record number.

    Raises Refused where there is none, with near labels.
    """
    if kind not in KINDS:
        raise refused(
            f"'{kind}' is not a kind of record; one of {', '.join(KINDS)} is expected",
            value=kind,
            expected=", ".join(KINDS),
        )
    if kind == "electrolyte":
        return _electrolyte(connection, name)
    if kind in ("electrode", "cell"):
        return _labelled(connection, kind, name)
    return _numbered(connection, kind, name)


def is_number(name: str) -> bool:
    """Return whether a name is a record number: ASCII digits, within what a database counts."""
    return name.isascii() and name.isdigit() and len(name) <= LONGEST_NUMBER


def _labelled(connection: Connection, kind: str, name: str) -> Row:
    from campaign.ledger.selecting import labels

    table = schema.metadata.tables[kind]
    row = (
        connection.execute(select(table).where(table.c.label == name, in_force(table)))
        .mappings()
        .first()
    )
    if row is None:
        raise Refused([unknown_label(kind, name, labels(connection, kind))])
    return dict(row)


def _electrolyte(connection: Connection, name: str) -> Row:
    from campaign.chemistry.recipes import parse_recipe
    from campaign.ledger.book import stored_species
    from campaign.ledger.selecting import labels

    table = schema.electrolyte
    if is_number(name):
        return _numbered(connection, "electrolyte", name)
    try:
        key = parse_recipe(name, stored_species(connection)).key
    except RecipeError as error:
        raise refused(
            f"'{name}' is not a recipe: {error}",
            column="electrolyte",
            value=name,
            expected=error.expected or "a recipe such as 1 M NaPF6 in EC:DMC (1:1 v/v)",
        ) from None
    row = (
        connection.execute(select(table).where(table.c.key == key, in_force(table)))
        .mappings()
        .first()
    )
    if row is None:
        raise Refused([unknown_label("electrolyte", key, labels(connection, "electrolyte"))])
    return dict(row)


def _numbered(connection: Connection, kind: str, name: str) -> Row:
    table = schema.metadata.tables[kind]
    if not is_number(name):
        raise refused(
            f"a {kind} is named by its record number, as 'campaign list {kind}s' shows it; "
            f"'{name}' is not a number",
            value=name,
            expected="a record number",
        )
    row = (
        connection.execute(select(table).where(table.c.record == int(name), in_force(table)))
        .mappings()
        .first()
    )
    if row is None:
        ever = connection.execute(
            select(table.c.id).where(table.c.record == int(name))
        ).first()
        state = "was withdrawn or superseded" if ever else "does not exist"
        raise refused(
            f"{kind} {name} {state}; 'campaign list {kind}s' shows those in force",
            value=name,
            expected="a record number",
        )
    return dict(row)


def describe(connection: Connection, kind: str, row: Row) -> str:
    """Return how the journal names a record."""
    if kind == "electrolyte":
        return f"electrolyte {row['key']}"
    if kind in ("electrode", "cell"):
        return f"{kind} {row['label']}"
    if kind == "measurement":
        cell = schema.cell
        label = connection.execute(
            select(cell.c.label).where(cell.c.record == row["cell"]).order_by(cell.c.id.desc())
        ).scalar()
        at = row["measured_at"][:16].replace("T", " ")
        return f"measurement {row['record']} of cell {label} ({at} UTC)"
    return f"fit {row['record']} of measurement {row['measurement']}"


def find_ever(connection: Connection, kind: str, name: str | None) -> int:
    """Return the record number of a record that is or was in force.

    Raises Refused where no such record was ever entered.
    """
    if name is None:
        raise refused(
            f"say which {kind}: its label, recipe or number", expected=f"the name of a {kind}"
        )
    try:
        return int(find_record(connection, kind, name)["record"])
    except Refused:
        if kind not in KINDS:
            raise
        table = schema.metadata.tables[kind]
        past = select(table.c.record).order_by(table.c.id.desc())
        if is_number(name):
            past = past.where(table.c.record == int(name))
        elif kind in ("electrode", "cell"):
            past = past.where(table.c.label == name)
        elif kind == "electrolyte":
            past = past.where((table.c.key == name) | (table.c.written == name))
        else:
            raise
        found = connection.execute(past).scalar()
        if found is None:
            raise
        return int(found)
