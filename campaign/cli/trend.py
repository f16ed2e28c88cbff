"""campaign trend"""

from __future__ import annotations

from enum import StrEnum
from typing import Annotated, Any

import typer

from campaign.cli.emptied import tell_if_empty
from campaign.cli.figures import FigureFile, FigureWidth, Width
from campaign.cli.options import Asked, query


class Axis(StrEnum):
    """The axes a resistance is followed along."""

    concentration = "concentration"
    solvent = "solvent"
    additive = "additive"
    potential = "potential"
    temperature = "temperature"
    age = "age"


class Response(StrEnum):
    """The fitted quantities that can be followed."""

    R_el = "R_el"
    R_sl = "R_sl"
    R_ct = "R_ct"
    R_lat = "R_lat"
    R_int = "R_int"
    sigma_w = "sigma_w"


@query
def trend(
    axis: Annotated[Axis, typer.Argument(help="Along what.", show_default=False)],
    asked: Asked,
    response: Annotated[
        Response, typer.Option("--response", help="Which fitted quantity.")
    ] = Response.R_ct,
    rows: Annotated[
        bool, typer.Option("--rows", help="Name the measurements behind each estimate.")
    ] = False,
    apparent: Annotated[
        bool, typer.Option("--apparent", help="Porous electrodes: use R_ct as it appears.")
    ] = False,
    scale: Annotated[
        str | None,
        typer.Option("--scale", metavar="REF", help="Compare potentials on this scale."),
    ] = None,
    without: Annotated[
        list[str] | None,
        typer.Option(
            "--without", metavar="ID", help="Leave a measurement or specimen out; repeatable."
        ),
    ] = None,
    activity: Annotated[
        bool, typer.Option("--activity", help="Concentration: the order in the activity.")
    ] = False,
    age_adjusted: Annotated[
        bool, typer.Option("--age-adjusted", help="Concentration: beside it, with age held.")
    ] = False,
    donor: Annotated[
        bool, typer.Option("--donor", help="Solvent: also against the donor number.")
    ] = False,
    together: Annotated[
        bool, typer.Option("--together", help="Potential: all electrolytes as one series.")
    ] = False,
    plot: Annotated[bool, typer.Option("--plot", help="A small plot in text below.")] = False,
    figure: FigureFile = None,
    width: FigureWidth = Width.two,
) -> None:
    """Rebuild a trend: how a resistance depends on one axis, all else held.

    Example: campaign trend concentration --electrode "NVP film A"
    """
    from campaign.present.trends import show_trend
    from campaign.trends.reading import rebuilt

    path = None
    if figure is not None:
        from campaign.present.figures.endings import figure_path

        path = figure_path(figure)
    how: dict[str, Any] = {
        "response": response.value,
        "porous": not apparent,
        "scale": scale,
        "without": without or (),
        "more": {
            "activity": activity,
            "age_adjusted": age_adjusted,
            "donor": donor,
            "together": together,
        },
    }
    result = rebuilt(axis.value, asked.db, asked.filter, **how)
    show_trend(
        result, as_json=asked.json, as_csv=asked.csv, rows=rows, stated=asked.stated()
    )
    if not asked.json:
        tell_if_empty(result.estimates, asked)
    if path is not None or (plot and not (asked.json or asked.csv)):
        from campaign.present.drawing import show_drawings
        from campaign.trends.curves import read_curves

        curves = read_curves(axis.value, asked.db, asked.filter, **how)
        show_drawings(result, curves, path, width.value, in_text=plot and not asked.json)
