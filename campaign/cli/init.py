"""campaign init"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import By, Db, Json


def init(
    zone: Annotated[
        str,
        typer.Option("--zone", metavar="NAME", help="Time zone of times without offset (IANA)."),
    ] = "UTC",
    db: Db = None,
    by: By = None,
    json: Json = False,
) -> None:
    """Start a campaign: make its database.

    Example: campaign init --zone Europe/Paris
    """
    from campaign.ledger.starting import start

    where = start(db, zone, by)
    if json:
        from campaign.present.tables import show_json

        show_json({"database": where.shown, "zone": zone})
    else:
        print(f"A campaign starts at {where.shown}; times without offset are read in {zone}.")
        print("Next: campaign template > table.csv, fill it, campaign import table.csv")
