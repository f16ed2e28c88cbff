"""From a command's --figure to a written file. Matplotlib is imported only from here on."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

from campaign.present.figures.endings import figure_path
from campaign.present.refusals import note

if TYPE_CHECKING:
    from pathlib import Path

    from matplotlib.figure import Figure

    from campaign.trends.curves import Curve
    from campaign.trends.reading import FilterSource
    from campaign.trends.results import AxisResult

__all__ = [
    "draw_timeline", "draw_verdict", "evidence_matrix", "figure_path", "show_drawings",
    "summary_matrix",
]  # fmt: skip

Row = Mapping[str, Any]


def show_drawings(
    result: AxisResult,
    curves: Sequence[Curve],
    path: Path | None,
    width: str,
    *,
    in_text: bool,
) -> None:
    """Print the text plot of a trend, and write its figure, as asked for."""
    if in_text:
        from campaign.present.plotting import trend_plot

        print(trend_plot(result, curves))
    if path is not None:
        from campaign.present.figures.trends import trend_figure

        _save(trend_figure(result, curves, width), path)


def draw_verdict(
    path: Path,
    width: str,
    of: str,
    db: str | None,
    wanted: FilterSource | None,
    electrodes: Sequence[str],
    matrix: Callable[[str], Figure],
) -> None:
    """Write the candidate matrix, or the budget of the electrodes over time."""
    if of == "candidates":
        _save(matrix(width), path)
        return
    from campaign.diagnosis.overtime import budgets_over_time
    from campaign.present.figures.budget import budget_figure, over_time
    from campaign.trends.reading import read_campaign

    taken, criteria = read_campaign(db, wanted)
    found = budgets_over_time(taken, criteria, electrodes)
    drawn = [over_time(name, one, criteria.working_time_s) for name, one in found.items()]
    _save(budget_figure(drawn, width), path)


def draw_timeline(rows: Sequence[Row], path: Path, width: str) -> None:
    """Write the figure of a timeline."""
    from campaign.present.figures.timeline import timeline_figure

    _save(timeline_figure(rows, width), path)


def summary_matrix(rows: Sequence[Row]) -> Callable[[str], Figure]:
    """Return what draws the candidate steps of a summary at a width."""

    def draw(width: str) -> Figure:
        from campaign.present.figures.matrix import summary_matrix as matrix

        return matrix(rows, width)

    return draw


def evidence_matrix(row: Row) -> Callable[[str], Figure]:
    """Return what draws the candidate steps of one electrode at a width."""

    def draw(width: str) -> Figure:
        from campaign.present.figures.matrix import evidence_matrix as matrix

        return matrix(row, width)

    return draw


def _save(figure: Figure, path: Path) -> None:
    from campaign.present.figures.saving import save

    save(figure, path)
    note(f"Figure: {path}")
