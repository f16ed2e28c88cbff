"""campaign template"""

from __future__ import annotations

from typing import Annotated

import typer


def template(
    example: Annotated[
        bool, typer.Option("--example", help="With a filled row to write over.")
    ] = False,
) -> None:
    """Print the header of the flat measurement table, ready to be filled.

    Example: campaign template > table.csv
    """
    from campaign.ledger.flat.template import template_text

    print(template_text(example=example), end="")
