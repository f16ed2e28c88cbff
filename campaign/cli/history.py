"""campaign history"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli import completing
from campaign.cli.options import Csv, Db, Json


def history(
    kind: Annotated[
        str | None,
        typer.Argument(
            help="electrode, electrolyte, cell, measurement or fit.",
            metavar="[KIND",
            autocompletion=completing.kind_of_record,
        ),
    ] = None,
    name: Annotated[
        str | None,
        typer.Argument(
            help="Its label, recipe or number.",
            metavar="NAME]",
            autocompletion=completing.name_of_record,
        ),
    ] = None,
    db: Db = None,
    json: Json = False,
    csv: Csv = False,
) -> None:
    """Show the journal: every entry, amendment and withdrawal, oldest first.

    Example: campaign history cell C07
    """
    from campaign.ledger import history as reading
    from campaign.ledger.database import open_database
    from campaign.ledger.finding import find_ever
    from campaign.present.listing import show_list

    with open_database(db).reading() as connection:
        record = find_ever(connection, kind, name) if kind else None
        rows = reading.history(connection, kind, record)
    show_list("history", rows, as_json=json, as_csv=csv)
    if not (json or csv):
        from campaign.present.listing import show_changes

        show_changes(rows)
