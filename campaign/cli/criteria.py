"""campaign criteria"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import AsOf, By, Csv, Db, Json, Reason


def criteria(
    assigned: Annotated[
        list[str] | None,
        typer.Option("--set", metavar="NAME=VALUE", help="Put in force; repeatable."),
    ] = None,
    reset: Annotated[
        list[str] | None,
        typer.Option("--reset", metavar="NAME", help="Back to the default; repeatable, or all."),
    ] = None,
    reason: Reason = None,
    by: By = None,
    as_of: AsOf = None,
    db: Db = None,
    json: Json = False,
    csv: Csv = False,
) -> None:
    """Show the criteria that decisions use, with their history, or set them with a reason.

    Example: campaign criteria --set order_margin=0.2 --reason "as agreed in the group"
    """
    from campaign.ledger import criteria_writing as writing
    from campaign.ledger.database import open_database
    from campaign.ledger.filters import read_filter
    from campaign.present.criteria import show_criteria

    names = writing.read_names(reset or ())
    values = writing.read_assignments(assigned or ())
    database = open_database(db)
    changed = {}
    if names or values:
        if as_of is not None:
            raise typer.BadParameter("the past cannot be set; leave --as-of out")
        changed = writing.set_criteria(database, values, names, reason=reason, who=by)
    elif reason is not None or by is not None:
        raise typer.BadParameter("--reason and --by go with --set or --reset")
    with database.reading() as connection:
        entry = read_filter(connection, as_of=as_of).as_of
        rows = writing.criteria_in_force(connection, entry)
        past = writing.criteria_history(connection, entry)
    show_criteria(rows, past, changed, as_json=json, as_csv=csv)
