"""campaign log"""

from __future__ import annotations

import inspect
import sys
from typing import Annotated, Any

import typer

from campaign.cli import completing
from campaign.cli.options import By, Db, Json
from campaign.ledger.flat.canonical import CANONICAL

COMPLETED = ("electrode", "electrolyte", "cell", "specimen", "operator")


def _log(
    source: Annotated[
        str | None,
        typer.Argument(metavar="[-]", help="'-' reads one JSON object from standard input."),
    ] = None,
    refit: Annotated[
        bool, typer.Option("--refit", help="Other values become the current fit.")
    ] = False,
    restore: Annotated[
        bool, typer.Option("--restore", help="Enter a withdrawn measurement again.")
    ] = False,
    by: By = None,
    db: Db = None,
    json: Json = False,
    **stated: Any,
) -> None:
    """Log one measurement after it was fitted.

    At a terminal it asks for what is missing, with the last measurement's values to accept.
    Example: campaign log --cell C07 --potential_V 3.42 --temperature_C 25 --R_ct 41.2(8)
    """
    from campaign.ledger.database import open_database
    from campaign.ledger.importing import Choices, log_row
    from campaign.ledger.logging import read_row
    from campaign.present.importing import show_logged

    database = open_database(db)
    given = {name: text for name, text in stated.items() if text is not None}
    if source is not None:
        row = read_row(database, source, given, sys.stdin.buffer)
    else:
        if sys.stdin.isatty() and not json:
            from campaign.present.asking import ask_missing

            given = ask_missing(database, given)
        row = read_row(database, None, given, None)
    show_logged(log_row(database, row, Choices(refit, restore), by), as_json=json)


def _parameters() -> list[inspect.Parameter]:
    """Return the fixed options and one for each column of the flat table."""
    fixed = [
        p for p in inspect.signature(_log, eval_str=True).parameters.values() if p.name != "stated"
    ]
    columns = [
        inspect.Parameter(
            name,
            inspect.Parameter.KEYWORD_ONLY,
            default=None,
            annotation=Annotated[
                str | None,
                typer.Option(
                    f"--{name}", metavar="VALUE", show_default=False,
                    autocompletion=completing.of(name) if name in COMPLETED else None,
                ),
            ],
        )
        for name in CANONICAL
    ]
    return [p.replace(kind=inspect.Parameter.KEYWORD_ONLY) for p in fixed] + columns


def log(**given: Any) -> None:
    """Replaced below by the help of `_log`."""
    _log(**given)


log.__doc__ = _log.__doc__
log.__signature__ = inspect.Signature(_parameters())  # type: ignore[attr-defined]
log.__annotations__ = {p.name: p.annotation for p in _parameters()}
