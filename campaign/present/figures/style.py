"""How every figure looks: sizes of journal columns, type, colours, markers, labels.

The colours climb in lightness, so that a grey print keeps their order, and stay apart for
readers with red-green blindness; a test computes both. Colour never stands alone: a series
also has a marker and a line of its own.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from contextvars import ContextVar
from typing import Any

import matplotlib
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, LogLocator, NullFormatter, NullLocator

WIDTHS_mm = {"one": 85.0, "two": 175.0}
"""Widths of one and two columns of a journal page."""

MM = 1 / 25.4

INK = "#22262b"
QUIET = "#6b7278"
FAINT = "#d9dde0"
PALETTE = ("#14213d", "#8f2a20", "#217a94", "#d6762c", "#86b6e2", "#e8cd4a")
MARKERS = ("o", "s", "^", "D", "v", "P", "X", "<", ">", "h")
DASHES: tuple[Any, ...] = ("-", (0, (5, 1.6)), (0, (1.2, 1.4)), (0, (7, 1.6, 1.2, 1.6)),
                           (0, (3, 1.2)), (0, (5, 1.5, 1.2, 1.5, 1.2, 1.5)))  # fmt: skip

SYMBOL = {
    "R_el": r"$R_\mathrm{el}$",
    "R_sl": r"$R_\mathrm{sl}$",
    "R_ct": r"$R_\mathrm{ct}$",
    "R_lat": r"$R_\mathrm{lat}$",
    "R_int": r"$R_\mathrm{int}$",
    "sigma_w": r"$\sigma_\mathrm{w}$",
    "diffusion": "diffusion",
}
UNIT = {"ohm cm2": "Ω cm²", "ohm cm2 s^-1/2": r"Ω cm² s$^{-1/2}$"}

_RC: dict[Any, Any] = {
    "font.family": "sans-serif",
    "font.sans-serif": ["DejaVu Sans", "Arial", "Helvetica", "sans-serif"],
    "mathtext.fontset": "dejavusans",
    "font.size": 7.0,
    "axes.labelsize": 7.5,
    "axes.titlesize": 7.5,
    "axes.titlelocation": "left",
    "axes.linewidth": 0.6,
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "text.color": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "xtick.labelsize": 6.5,
    "ytick.labelsize": 6.5,
    "xtick.direction": "in",
    "ytick.direction": "in",
    "xtick.major.width": 0.6,
    "ytick.major.width": 0.6,
    "xtick.minor.width": 0.4,
    "ytick.minor.width": 0.4,
    "xtick.major.size": 3.0,
    "ytick.major.size": 3.0,
    "xtick.minor.size": 1.6,
    "ytick.minor.size": 1.6,
    "legend.fontsize": 6.2,
    "legend.frameon": False,
    "legend.handlelength": 2.4,
    "legend.labelspacing": 0.35,
    "legend.borderaxespad": 0.3,
    "lines.linewidth": 1.1,
    "lines.markersize": 3.6,
    "patch.linewidth": 0.6,
    "hatch.linewidth": 0.5,
    "svg.fonttype": "none",
    "svg.hashsalt": "campaign",
    "pdf.fonttype": 42,
    "savefig.facecolor": "white",
}


_inside: ContextVar[bool] = ContextVar("inside", default=False)


@contextmanager
def styled() -> Iterator[None]:
    """Draw and save inside this: Matplotlib's own defaults with the settings above."""
    if _inside.get():  # setting them takes long, and they are set
        yield
        return
    token = _inside.set(True)
    try:
        with matplotlib.rc_context():
            matplotlib.rcdefaults()
            matplotlib.rcParams.update(_RC)
            yield
    finally:
        _inside.reset(token)


def sheet(width: str, height_mm: float) -> Figure:
    """Return an empty figure of one or two columns' width, without any window."""
    return Figure(figsize=(WIDTHS_mm[width] * MM, height_mm * MM), layout="constrained")


def panels(
    width: str, count: int, each_mm: float, most: int | None = None
) -> tuple[Figure, Sequence[Axes]]:
    """Return a figure with `count` panels, filled row by row, `each_mm` high."""
    columns = min(count, most or (2 if width == "one" else 4))
    rows = -(-count // columns)
    figure = sheet(width, rows * each_mm + 4.0)
    grid = figure.add_gridspec(rows, columns)
    return figure, [figure.add_subplot(grid[i // columns, i % columns]) for i in range(count)]


KEY_mm = 3.5


def keyed_panels(
    width: str, keys: Sequence[int], each_mm: float, most: int
) -> tuple[Figure, list[tuple[Axes, Axes]]]:
    """Return a figure of panels, each with room below it for a key of so many lines."""
    columns = min(len(keys), most)
    rows = [keys[i : i + columns] for i in range(0, len(keys), columns)]
    heights = [each_mm + KEY_mm * (max(row) + 2.6) for row in rows]
    figure = sheet(width, sum(heights) + 2.0)
    outer = figure.add_gridspec(len(rows), columns, height_ratios=heights)
    found = []
    for index in range(len(keys)):
        row, column = divmod(index, columns)
        key_mm = KEY_mm * (max(rows[row]) + 2.6)
        inner = outer[row, column].subgridspec(2, 1, height_ratios=[each_mm, key_mm], hspace=0.0)
        below = figure.add_subplot(inner[1])
        below.set_axis_off()
        found.append((figure.add_subplot(inner[0]), below))
    return figure, found


def key(panel: Axes, below: Axes, title: str, ncols: int = 1) -> None:
    """Write the key of a panel into the room below it."""
    handles, labels = panel.get_legend_handles_labels()
    legend = below.legend(
        handles, labels, loc="upper left", title=title or None, title_fontsize=6.8,
        alignment="left", borderpad=0.0, borderaxespad=0.0, ncols=ncols, columnspacing=1.2,
    )  # fmt: skip
    legend.set_in_layout(False)


def colour(index: int) -> str:
    """Return the colour of the index-th series."""
    return PALETTE[index % len(PALETTE)]


def marker(index: int) -> str:
    """Return the marker of the index-th series or specimen."""
    return MARKERS[index % len(MARKERS)]


def dashes(index: int) -> Any:
    """Return the dash pattern of the index-th series."""
    return DASHES[index % len(DASHES)]


def quantity(response: str, unit: str) -> str:
    """Return an axis label in quantity/unit notation."""
    written = UNIT.get(unit, unit)
    return f"{SYMBOL.get(response, response)} / ({written})" if " " in written else (
        f"{SYMBOL.get(response, response)} / {written}"
    )


def plain_log(axis: Any, spread: float, room_mm: float = 50.0) -> None:
    """Give a logarithmic axis plain numbers: 1, 2, 5 of each decade where it is short.

    spread: the ratio of its ends; room_mm: its length, which bounds the number of labels.
    """
    choices: tuple[tuple[float, ...], ...] = (
        (1.0, 1.1, 1.2, 1.3, 1.4, 1.6, 1.8, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0, 9.0),
        (1.0, 1.2, 1.5, 2.0, 3.0, 4.0, 5.0, 7.0),
        (1.0, 1.5, 2.0, 3.0, 5.0, 7.0),
        (1.0, 2.0, 5.0),
        (1.0, 3.0),
        (1.0,),
    )
    decades = max(math.log10(spread), 0.01)
    most = max(room_mm / 7.0, 2.0)
    subs = next((c for c in choices if len(c) * decades <= most), (1.0,))
    axis.set_major_locator(LogLocator(base=10, subs=subs, numticks=20))
    axis.set_major_formatter(FuncFormatter(_plain))
    fine = tuple(float(i) for i in range(1, 10)) if len(subs) <= 8 else ()
    axis.set_minor_locator(LogLocator(base=10, subs=fine, numticks=20) if fine else NullLocator())
    axis.set_minor_formatter(NullFormatter())
    axis.set_tick_params(which="minor", label1On=False, label2On=False)


def _plain(value: float, _: object = None) -> str:
    if value >= 1e5 or 0 < value < 1e-3:
        mantissa, exponent = f"{value:.0e}".split("e")
        power = f"10^{{{int(exponent)}}}"
        return f"${power}$" if mantissa == "1" else rf"${mantissa}\cdot{power}$"
    return f"{value:.10g}"


def empty(width: str, message: str) -> Figure:
    """Return a figure that says why there is nothing to draw."""
    figure = sheet(width, 30.0)
    axes = figure.add_subplot()
    axes.set_axis_off()
    axes.text(0.5, 0.5, message, ha="center", va="center", color=QUIET, wrap=True)
    return figure
