"""campaign copy"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import Db, Json


def copy(
    to: Annotated[str, typer.Option("--to", metavar="PATH-or-URL", help="An empty place.")],
    db: Db = None,
    json: Json = False,
) -> None:
    """Copy the campaign to another store and prove the two equal.

    Example: campaign copy --to postgresql+psycopg://lab@server/campaign
    """
    from campaign.ledger.copying import copy_campaign
    from campaign.ledger.database import open_database
    from campaign.present.copies import show_copied

    show_copied("Copy", copy_campaign(open_database(db), to), as_json=json)
