"""campaign watch"""

from __future__ import annotations

import time
from pathlib import Path
from typing import Annotated

import typer

from campaign.cli.options import By, Db, Json


def watch(
    folder: Annotated[str, typer.Argument(metavar="FOLDER", help="Where tables are dropped.")],
    once: Annotated[
        bool, typer.Option("--once", help="Take what is there and end; 1 if any was faulty.")
    ] = False,
    every: Annotated[
        float,
        typer.Option("--every", metavar="S", min=0.2, max=3600, help="Seconds between looks."),
    ] = 5.0,
    refit: Annotated[
        bool, typer.Option("--refit", help="Rows with other values become the current fit.")
    ] = False,
    mapping: Annotated[
        str | None,
        typer.Option("--mapping", metavar="FILE.toml", help="Renames columns, gives constants."),
    ] = None,
    decimal: Annotated[
        str | None, typer.Option("--decimal", metavar="MARK", help="The decimal mark: . or ,")
    ] = None,
    sheet: Annotated[
        str | None, typer.Option("--sheet", metavar="NAME", help="The sheet of XLSX files.")
    ] = None,
    by: By = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Import flat tables that a fitting script drops into a folder.

    Tables go to done/ once entered, and to faulty/ with a message where they cannot be. It may
    be stopped at any time; nothing is entered twice.

    Example: campaign watch fits --every 10
    """
    from campaign.errors import Refused, refused
    from campaign.ledger.database import open_database
    from campaign.ledger.watching import How, SETTLE_s, prepare, sweep, waiting
    from campaign.present.refusals import note, show_refusal
    from campaign.present.watching import show_taken

    place = Path(folder)
    if not place.is_dir():
        raise refused(f"there is no folder {folder}; make it first", value=folder,
                      expected="a folder")  # fmt: skip
    database = open_database(db)
    prepare(place)
    how = How(mapping, decimal, sheet, by, refit)
    faulty = False
    if once:
        if len(waiting(place, 0.0)) > len(waiting(place, SETTLE_s)):
            time.sleep(SETTLE_s)  # until nobody writes to what was just dropped
        for one in sweep(database, place, how, SETTLE_s):
            show_taken(one, as_json=json)
            faulty = faulty or bool(one.faults)
        raise typer.Exit(1 if faulty else 0)
    note(f"Watching {place}; end with Ctrl-C.")
    try:
        while True:
            try:
                for one in sweep(database, place, how, SETTLE_s):
                    show_taken(one, as_json=json)
            except Refused as error:
                # the campaign, not a file: it may be free again at the next look
                show_refusal(error, as_json=False)
            time.sleep(every)
    except KeyboardInterrupt:
        note("Stopped.")
