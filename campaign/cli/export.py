"""campaign export"""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from campaign.cli.options import Db, Json


def export(
    target: Annotated[
        str, typer.Argument(metavar="FOLDER-or-FILE.xlsx", help="Where to write it.")
    ],
    db: Db = None,
    json: Json = False,
) -> None:
    """Hand the campaign over: a data package of CSV tables, or a workbook.

    A folder becomes a Frictionless Data Package; 'campaign import FOLDER' enters it into an
    empty campaign.

    Example: campaign export handover
    """
    from campaign.errors import refused
    from campaign.ledger.database import open_database

    database = open_database(db)
    path = Path(target)
    if path.suffix.lower() == ".xlsx":
        from campaign.ledger.package.workbook import write_workbook

        counts = write_workbook(database, path)
    elif path.suffix.lower() in (".csv", ".json", ".xls", ".ods", ".zip", ".db", ".sqlite"):
        raise refused(
            f"a campaign is exported into a folder, or a file ending in .xlsx; '{target}' is "
            "neither",
            value=target,
            expected="a new folder, or FILE.xlsx",
        )
    else:
        from campaign.ledger.package.writing import write_package

        counts = write_package(database, path)
    if json:
        from campaign.present.tables import show_json

        show_json({"written": str(path), "rows": counts})
        return
    listed = ", ".join(f"{count} {name.replace('_', ' ')}" for name, count in counts.items())
    print(f"Written to {path}: {listed}.")
