"""The timeline: what each verdict was at the end of each period, one row an electrode."""

from __future__ import annotations

import textwrap
from collections.abc import Mapping, Sequence
from typing import Any

from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from campaign.present.figures import style
from campaign.present.figures.words import literal

Row = Mapping[str, Any]

VERDICTS = {
    "ion transport": ("o", style.PALETTE[0]),
    "electron transfer": ("s", style.PALETTE[1]),
    "host": ("^", style.PALETTE[2]),
    "mixed": ("D", style.PALETTE[3]),
    "conflicting": ("X", style.PALETTE[4]),
    "undetermined": (".", style.QUIET),
}
FILL = {"strong": "full", "moderate": "left", "weak": "none"}
ROW_mm = 11.0


def timeline_figure(rows: Sequence[Row], width: str) -> Figure:
    """Return verdicts over periods; rows as `timeline` gives them, in rising time."""
    with style.styled():
        if not rows:
            return style.empty(width, "there are no measurements to judge")
        periods = list(dict.fromkeys(row["period"] for row in rows))
        electrodes = list(dict.fromkeys(row["electrode"] for row in rows))
        figure = style.sheet(width, len(electrodes) * ROW_mm + 30.0)
        panel = figure.add_subplot()
        for y, electrode in enumerate(electrodes):
            own = [row for row in rows if row["electrode"] == electrode]
            _electrode(panel, y, own, periods)
        _axes(panel, electrodes, periods, width)
        _legend(figure, {row["verdict"] for row in rows}, width)
        return figure


def _electrode(panel: Axes, y: int, own: Sequence[Row], periods: Sequence[str]) -> None:
    at = [periods.index(row["period"]) for row in own]
    panel.plot(at, [y] * len(at), color=style.FAINT, lw=3.0, solid_capstyle="round", zorder=1)
    for x, row in zip(at, own, strict=True):
        mark, colour = VERDICTS[row["verdict"]]
        fill = FILL.get(row["strength"] or "", "full")
        panel.plot([x], [y], mark, ms=6.4, color=colour, fillstyle=fill, mew=1.1, zorder=3,
                   markerfacecoloralt="white")  # fmt: skip
        panel.annotate(
            f"{row['n_specimens']}", (x, y), xytext=(0, -6.5), textcoords="offset points",
            ha="center", va="top", fontsize=5.4, color=style.QUIET,
        )  # fmt: skip
        if row["mark"]:
            panel.annotate(
                row["mark"], (x, y), xytext=(0, 6), textcoords="offset points", ha="center",
                va="bottom", fontsize=5.6, fontweight="bold",
            )  # fmt: skip


def _axes(panel: Axes, electrodes: Sequence[str], periods: Sequence[str], width: str) -> None:
    panel.set_xlim(-0.6, len(periods) - 0.4)
    panel.set_ylim(len(electrodes) - 0.4, -0.6)
    names = ["\n".join(textwrap.wrap(literal(name), 18)) for name in electrodes]
    panel.set_yticks(range(len(electrodes)), names, fontsize=6.8)
    room = 11 if width == "two" else 5
    step = -(-len(periods) // room)
    shown = list(range(0, len(periods), step))
    panel.set_xticks(shown, [periods[i] for i in shown], fontsize=6.2)
    panel.set_xlabel("end of period (number of specimens below each mark)")
    panel.tick_params(axis="y", length=0)
    for side in ("top", "right", "left"):
        panel.spines[side].set_visible(False)


def _legend(figure: Figure, verdicts: set[str], width: str) -> None:
    marks: list[tuple[str, str, str, Any]] = [
        (word, mark, colour, "full")
        for word, (mark, colour) in VERDICTS.items()
        if word in verdicts
    ]
    marks += [(word, "o", style.QUIET, fill) for word, fill in FILL.items()]
    handles = [
        Line2D([], [], marker=mark, ls="", ms=5.0, color=colour, fillstyle=fill, mew=1.0,
               markerfacecoloralt="white", label=word)
        for word, mark, colour, fill in marks
    ]  # fmt: skip
    figure.legend(handles=handles, loc="outside lower left", handlelength=1.2,
                  ncols=6 if width == "two" else 3)  # fmt: skip
