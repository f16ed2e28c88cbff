"""campaign amend"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli import completing
from campaign.cli.options import By, Db, Json, Reason, stated_reason


def amend(
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
    changes: Annotated[
        list[str], typer.Argument(metavar="FIELD=VALUE...", help="An empty value empties a field.")
    ],
    reason: Reason = None,
    by: By = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Correct a record; the journal keeps what it was, what it is and why.

    Example: campaign amend cell C07 area_cm2=1.13 --reason "punch measured again"
    """
    from campaign.ledger.amending import amend as apply
    from campaign.ledger.amending import read_changes
    from campaign.ledger.database import open_database

    wanted = read_changes(changes)
    changed = apply(open_database(db), kind, name, wanted, stated_reason(reason), by)
    if json:
        from campaign.present.tables import show_json

        show_json({"amended": {f: {"was": was, "is": now} for f, (was, now) in changed.items()}})
        return
    from campaign.present.listing import show_amended

    show_amended(f"{kind} {name}", changed)
