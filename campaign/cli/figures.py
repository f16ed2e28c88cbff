"""Options of commands that draw."""

from __future__ import annotations

from enum import StrEnum
from typing import Annotated

import typer


class Width(StrEnum):
    """Columns of a journal page a figure is drawn for."""

    one = "one"
    two = "two"


class Drawn(StrEnum):
    """What a figure of a verdict shows."""

    candidates = "candidates"
    budget = "budget"


FigureFile = Annotated[
    str | None,
    typer.Option("--figure", metavar="FILE", help="Draw it too: .svg, .pdf or .png."),
]
FigureWidth = Annotated[
    Width, typer.Option("--width", help="Columns of a journal page: one 85 mm, two 175 mm.")
]
FigureOf = Annotated[
    Drawn, typer.Option("--draw", help="What --figure shows: candidate steps or the budget.")
]
