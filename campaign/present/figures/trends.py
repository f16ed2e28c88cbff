"""The figure of a trend, by axis."""

from __future__ import annotations

from collections.abc import Sequence
from importlib import import_module

from matplotlib.figure import Figure

from campaign.present.figures import style
from campaign.trends.curves import Curve
from campaign.trends.results import AxisResult

_MODULES = {
    "concentration": "trend_order",
    "temperature": "trend_arrhenius",
    "potential": "trend_potential",
    "age": "trend_age",
}


def trend_figure(result: AxisResult, curves: Sequence[Curve], width: str) -> Figure:
    """Return the figure of one axis; `curves` are not needed for solvents and additives."""
    with style.styled():
        if not result.estimates:
            return style.empty(
                width, f"no estimate of {result.response} along {result.axis}"
            )
        if result.axis in ("solvent", "additive"):
            from campaign.present.figures.trend_pairs import draw

            return draw(result, width)
        module = import_module(f"campaign.present.figures.{_MODULES[result.axis]}")
        figure: Figure = module.draw(result, curves, width)
        return figure
