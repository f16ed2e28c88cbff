"""campaign withdraw"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli import completing
from campaign.cli.options import By, Db, Json, Reason, stated_reason


def withdraw(
    kind: Annotated[
        str,
        typer.Argument(
            help="electrode, electrolyte, cell, measurement, fit or import.",
            autocompletion=completing.kind_of_record,
        ),
    ],
    name: Annotated[
        str,
        typer.Argument(
            help="Its label, recipe or number.", autocompletion=completing.name_of_record
        ),
    ],
    reason: Reason = None,
    by: By = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Take a record, or a whole import, back. Nothing is deleted.

    Example: campaign withdraw measurement 118 --reason "reference electrode had dried out"
    """
    from campaign.errors import refused
    from campaign.ledger import withdrawing
    from campaign.ledger.database import open_database
    from campaign.ledger.finding import is_number

    why = stated_reason(reason)
    database = open_database(db)
    if kind == "import":
        if not is_number(name):
            raise refused(
                f"an import is named by its number; '{name}' is not one; 'campaign list imports' "
                "shows them",
                value=name,
                expected="an import's number",
            )
        counts = withdrawing.withdraw_import(database, int(name), why, by)
    else:
        counts = withdrawing.withdraw(database, kind, name, why, by)
    if json:
        from campaign.present.tables import show_json

        show_json({"withdrawn": counts})
        return
    listed = ", ".join(
        f"{count} {noun}{'s' if count != 1 else ''}" for noun, count in counts.items()
    )
    print(f"Withdrawn: {listed}.")
