"""Figures of the report, as SVG inside the page."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import count
from typing import Any

from matplotlib.figure import Figure

from campaign.present.figures.budget import budget_figure, over_time
from campaign.present.figures.matrix import summary_matrix
from campaign.present.figures.saving import inline_svg
from campaign.present.figures.trends import trend_figure
from campaign.present.report.gathering import Content, Trend
from campaign.present.report.markup import Html, tag

Row = Mapping[str, Any]


class Figures:
    """Draws figures and numbers them, so that their parts never share a name."""

    def __init__(self, content: Content) -> None:
        self._content = content
        self._numbers = count(1)

    def candidates(self, rows: Sequence[Row]) -> Html:
        """Return the matrix of candidate steps over electrodes."""
        return self._put(summary_matrix(rows, "two"), "Candidate steps of the dominant term")

    def budgets(self) -> Html:
        """Return the budgets of all electrodes over time."""
        working = float(self._content.criteria["working_time_s"])
        drawn = [over_time(name, one, working) for name, one in self._content.over_time.items()]
        return self._put(
            budget_figure(drawn, "two"),
            "Share of each term after a current step; bands are 95 % intervals",
        )

    def trend(self, trend: Trend) -> Html:
        """Return the figure of one trend."""
        result = trend.result
        return self._put(
            trend_figure(result, trend.curves, "two"), f"{result.response} along {result.axis}"
        )

    def _put(self, figure: Figure, caption: str) -> Html:
        svg = inline_svg(figure, f"f{next(self._numbers)}", caption)
        return tag("figure", Html(svg), tag("figcaption", caption))
