"""campaign template"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import Db


def template(
    example: Annotated[
        bool, typer.Option("--example", help="With a filled row to write over.")
    ] = False,
    db: Db = None,
) -> None:
    """Print the header of the flat measurement table, ready to be filled.

    Example: campaign template > table.csv
    """
    from campaign.ledger.database import open_database
    from campaign.ledger.flat.template import template_text

    open_database(db)  # refuses where there is no campaign to fill
    print(template_text(example=example), end="")
