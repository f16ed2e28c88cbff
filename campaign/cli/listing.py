"""campaign list"""

from __future__ import annotations

from enum import StrEnum
from typing import Annotated

import typer

from campaign.cli.emptied import tell_if_empty
from campaign.cli.options import Asked, query


class Kind(StrEnum):
    """What can be listed."""

    electrodes = "electrodes"
    electrolytes = "electrolytes"
    cells = "cells"
    measurements = "measurements"
    fits = "fits"
    imports = "imports"


@query
def list_records(
    what: Annotated[Kind, typer.Argument(help="What to list.", show_default=False)],
    asked: Asked,
) -> None:
    """List what the campaign holds.

    Example: campaign list measurements --electrode "NVP film" --temperature 20:30
    """
    from campaign.ledger import selecting, withdrawing
    from campaign.ledger.database import open_database

    with open_database(asked.db).reading() as connection:
        if what is Kind.imports:
            rows = withdrawing.imports(connection)
        else:
            rows = getattr(selecting, f"list_{what.value}")(connection, asked.filter(connection))
    from campaign.present.listing import show_list

    show_list(what.value, rows, as_json=asked.json, as_csv=asked.csv, stated=asked.stated())
    if not asked.json and what is not Kind.imports:
        tell_if_empty(rows, asked)
