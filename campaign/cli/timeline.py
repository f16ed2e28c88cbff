"""campaign timeline"""

from __future__ import annotations

from enum import StrEnum
from typing import Annotated

import typer

from campaign.cli.emptied import tell_if_empty
from campaign.cli.figures import FigureFile, FigureWidth, Width
from campaign.cli.options import Asked, query


class Clock(StrEnum):
    """By when a reading was entered, or by when it was measured."""

    logged = "logged"
    measured = "measured"


@query
def timeline(
    asked: Asked,
    every: Annotated[
        str, typer.Option("--every", metavar="PERIOD", help="week, month, quarter or Nd.")
    ] = "month",
    clock: Annotated[
        Clock | None, typer.Option("--clock", help="By entry or by measurement.")
    ] = None,
    figure: FigureFile = None,
    width: FigureWidth = Width.two,
) -> None:
    """Show verdicts as they stood at the end of each period: when settled, whether flipped.

    Example: campaign timeline --every quarter --clock measured
    """
    from campaign.diagnosis.reading import followed
    from campaign.present.timeline import show_timeline

    path = None
    if figure is not None:
        from campaign.present.figures.endings import figure_path

        path = figure_path(figure)
    found = followed(
        asked.db, asked.filter, every=every, clock=clock.value if clock is not None else None
    )
    show_timeline(found, as_json=asked.json, as_csv=asked.csv, stated=asked.stated())
    if not asked.json:
        tell_if_empty(found["rows"], asked)
    if path is not None:
        from campaign.present.drawing import draw_timeline

        draw_timeline(found["rows"], path, width.value)
