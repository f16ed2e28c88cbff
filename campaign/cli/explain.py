"""campaign explain"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli import completing
from campaign.cli.figures import Drawn, FigureFile, FigureOf, FigureWidth, Width
from campaign.cli.options import Asked, query
from campaign.cli.summary import At


@query
def explain(
    label: Annotated[
        str,
        typer.Argument(
            metavar="ELECTRODE", help="Its label.", autocompletion=completing.of("electrode")
        ),
    ],
    asked: Asked,
    at: At = None,
    figure: FigureFile = None,
    width: FigureWidth = Width.two,
    draw: FigureOf = Drawn.candidates,
) -> None:
    """Show what stands for and against each candidate step of one electrode.

    Example: campaign explain "NVP film A" --at 1ms,1s,1h
    """
    from campaign.diagnosis.reading import explained
    from campaign.ledger.durations import read_durations
    from campaign.present.explaining import show_explanation

    path = None
    if figure is not None:
        from campaign.present.figures.endings import figure_path

        path = figure_path(figure)
    times_s = read_durations(at, "--at") if at is not None else ()
    found = explained(label, asked.db, asked.filter, times_s=times_s)
    show_explanation(found, as_json=asked.json, as_csv=asked.csv)
    if path is not None:
        from campaign.present.drawing import draw_verdict, evidence_matrix

        draw_verdict(
            path, width.value, draw.value, asked.db, asked.filter, [label], evidence_matrix(found)
        )
