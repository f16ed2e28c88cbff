"""campaign summary"""

from __future__ import annotations

from enum import StrEnum
from typing import Annotated

import typer

from campaign.cli.emptied import tell_if_empty
from campaign.cli.figures import Drawn, FigureFile, FigureOf, FigureWidth, Width
from campaign.cli.options import Asked, query

At = Annotated[
    str | None,
    typer.Option(
        "--at", metavar="TIMES", help="Shares of the terms at these times, such as 0.1s,10s,5min."
    ),
]


class Grouping(StrEnum):
    """What an electrode's readings can be split by."""

    salt = "salt"
    solvents = "solvents"
    temperature = "temperature"


@query
def summary(
    asked: Asked,
    by: Annotated[
        Grouping | None, typer.Option("--by", help="A row for each, not one an electrode.")
    ] = None,
    at: At = None,
    markdown: Annotated[bool, typer.Option("--markdown", help="A Markdown table.")] = False,
    latex: Annotated[
        bool, typer.Option("--latex", help="A LaTeX table (booktabs), for a paper.")
    ] = False,
    figure: FigureFile = None,
    width: FigureWidth = Width.two,
    draw: FigureOf = Drawn.candidates,
) -> None:
    """Print the rate-limiting-step table: one row an electrode.

    Example: campaign summary --by temperature --at 0.1s,1s,10s,100s
    """
    from campaign.diagnosis.reading import summarise
    from campaign.ledger.durations import read_durations
    from campaign.present.summary import show_summary

    if sum((asked.json, asked.csv, markdown, latex)) > 1:
        raise typer.BadParameter("--json, --csv, --markdown and --latex exclude one another")
    path = None
    if figure is not None:
        from campaign.present.figures.endings import figure_path

        path = figure_path(figure)
    found = summarise(
        asked.db,
        asked.filter,
        by=by.value if by is not None else None,
        times_s=read_durations(at, "--at") if at is not None else (),
    )
    show_summary(
        found,
        as_json=asked.json,
        as_csv=asked.csv,
        as_markdown=markdown,
        as_latex=latex,
        stated=asked.stated(),
    )
    if not asked.json:
        tell_if_empty(found["rows"], asked)
    if path is not None:
        from campaign.present.drawing import draw_verdict, summary_matrix

        rows = found["rows"]
        labels = [row["electrode"] for row in rows]
        draw_verdict(
            path, width.value, draw.value, asked.db, asked.filter, labels, summary_matrix(rows)
        )
