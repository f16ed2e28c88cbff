"""campaign demo"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import Json


def demo(
    folder: Annotated[
        str, typer.Argument(help="A new folder for it.", show_default=True)
    ] = "sodium-demo",
    json: Json = False,
) -> None:
    """Build an invented campaign and print its rate-limiting-step table.

    Example: campaign demo sodium-demo
    """
    from pathlib import Path

    from campaign.diagnosis.reading import summarise
    from campaign.ledger.demonstration import build
    from campaign.present.refusals import note
    from campaign.present.summary import show_summary

    built = build(Path(folder))
    word = "built from the tables in" if built.fresh else "found again; its tables are in"
    note(f"Demo campaign {word} {built.tables}. Look further with --db {built.database}")
    show_summary(summarise(str(built.database)), as_json=json)
