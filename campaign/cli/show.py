"""campaign show"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli import completing
from campaign.cli.options import Db, Json


def show(
    kind: Annotated[
        str,
        typer.Argument(
            help="electrode, electrolyte, cell, measurement or fit.",
            autocompletion=completing.kind_of_record,
        ),
    ],
    name: Annotated[
        str,
        typer.Argument(
            help="Its label, recipe or record number.", autocompletion=completing.name_of_record
        ),
    ],
    db: Db = None,
    json: Json = False,
) -> None:
    """Show one record with everything known of it.

    Example: campaign show electrolyte "1 M NaPF6 in PC"
    """
    from campaign.ledger.database import open_database
    from campaign.ledger.showing import show_record
    from campaign.present import records

    with open_database(db).reading() as connection:
        record = show_record(connection, kind, name)
    records.show_record(kind, record, as_json=json)
