"""campaign backup"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import Db, Json


def backup(
    file: Annotated[
        str | None,
        typer.Argument(metavar="[FILE]", help="A new file; else beside the database, dated."),
    ] = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Write a verified copy of the whole campaign; others may go on working.

    Example: campaign backup /mnt/safe/campaign-2026-03.sqlite
    """
    from campaign.ledger.backing import backup as write
    from campaign.ledger.database import open_database
    from campaign.present.copies import show_copied

    show_copied("Backup", write(open_database(db), file), as_json=json)
