"""campaign check"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import Db, Json


def check(
    head: Annotated[
        str | None,
        typer.Option(
            "--head", metavar="HASH", help="A journal head noted earlier: finds a cut journal."
        ),
    ] = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Check that nothing was changed behind the journal, and that values are plausible.

    Example: campaign check --head 5f2a90c1
    """
    from campaign.ledger.checking import check as find_problems
    from campaign.ledger.database import open_database
    from campaign.ledger.history import head as read_head

    database = open_database(db)
    folder = database.where.path.resolve().parent if database.where.path else None
    with database.reading() as connection:
        problems = find_problems(connection, head, folder)
        latest = read_head(connection)
    from campaign.present.checking import show_check

    show_check(problems, latest, as_json=json)
    if any(problem.grave for problem in problems):
        raise typer.Exit(1)
