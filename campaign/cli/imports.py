"""campaign import"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import By, Db, Json, Reason


def import_tables(
    files: Annotated[
        list[str],
        typer.Argument(metavar="FILE...", help="Flat tables, CSV or XLSX; or one data package."),
    ],
    dry_run: Annotated[
        bool, typer.Option("--dry-run", help="Show what it would add; write nothing.")
    ] = False,
    refit: Annotated[
        bool, typer.Option("--refit", help="Rows with other values become the current fit.")
    ] = False,
    restore: Annotated[
        bool, typer.Option("--restore", help="Enter rows again that were withdrawn.")
    ] = False,
    mapping: Annotated[
        str | None,
        typer.Option("--mapping", metavar="FILE.toml", help="Renames columns, gives constants."),
    ] = None,
    decimal: Annotated[
        str | None, typer.Option("--decimal", metavar="MARK", help="The decimal mark: . or ,")
    ] = None,
    sheet: Annotated[
        str | None, typer.Option("--sheet", metavar="NAME", help="The sheet of an XLSX file.")
    ] = None,
    by: By = None,
    reason: Reason = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Import flat measurement tables: all rows or none.

    Example: campaign import april.csv --dry-run
    """
    from campaign.ledger.database import open_database
    from campaign.ledger.files import read_files
    from campaign.ledger.importing import Choices
    from campaign.ledger.importing import import_tables as enter
    from campaign.ledger.package.reading import is_package
    from campaign.present.importing import show_outcome
    from campaign.present.progress import progress_bar

    database = open_database(db)
    if len(files) == 1 and is_package(files[0]):
        from campaign.ledger.package.reading import import_package
        from campaign.present.importing import show_package

        counts = import_package(database, files[0], by, dry_run=dry_run)
        show_package(counts, as_json=json, dry_run=dry_run)
        return
    tables = read_files(database, files, mapping=mapping, decimal=decimal, sheet=sheet)
    with progress_bar():
        outcome = enter(database, tables, Choices(refit, restore, dry_run), by, reason)
    show_outcome(outcome, as_json=json)
