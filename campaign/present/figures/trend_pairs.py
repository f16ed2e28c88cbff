"""Solvents and additives: ratios with simultaneous intervals, one row a pair."""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import groupby

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from campaign.present.figures import style
from campaign.present.figures.words import literal
from campaign.present.numbers import with_interval
from campaign.trends.results import AxisResult, RatioEstimate

ROW_mm = 5.4


def draw(result: AxisResult, width: str) -> Figure:
    """Return the figure of all pairs, electrode by electrode, around the range of no effect."""
    pairs = [one for one in result.estimates if isinstance(one, RatioEstimate)]
    finding = pairs[0].finding
    ratio_margin = math.exp(finding.contrast_margin) if finding is not None else 1.0
    groups = [(name, list(group)) for name, group in groupby(pairs, lambda p: p.electrode)]
    rows = len(pairs) + 1.2 * len(groups)
    figure = style.sheet(width, rows * ROW_mm + 18.0)
    panel = figure.add_subplot()
    panel.set_xscale("log")
    panel.axvspan(1 / ratio_margin, ratio_margin, color=style.FAINT, lw=0, zorder=0)
    panel.axvline(1.0, color=style.QUIET, lw=0.6, zorder=1)
    y, ticks, labels = 0.0, [], []
    for index, (electrode, group) in enumerate(groups):
        ticks.append(y)
        labels.append(literal(electrode))
        for one in group:
            y += 1.0
            _pair(panel, one, y, style.colour(index), style.marker(index), width == "two")
            ticks.append(y)
            labels.append(_name(one, result.axis))
        y += 1.2
    panel.set_ylim(y - 0.5, -0.7)
    panel.set_yticks(ticks, labels)
    for label in panel.get_yticklabels():
        if label.get_text() in {literal(name) for name, _ in groups}:
            label.set_fontweight("bold")
    panel.tick_params(axis="y", length=0)
    _range(panel, pairs, ratio_margin, width)
    symbol = style.SYMBOL.get(result.response, result.response)
    panel.set_xlabel(f"{symbol}(a) / {symbol}(b)")
    figure.supxlabel(
        f"Simultaneous 95 % intervals. Grey: inside a factor of {ratio_margin:g}. "
        "Empty mark: open.", fontsize=6.0, color=style.QUIET, x=0.02, ha="left",
    )  # fmt: skip
    for side in ("top", "right", "left"):
        panel.spines[side].set_visible(False)
    return figure


def _name(one: RatioEstimate, axis: str) -> str:
    held = one.additives if axis == "solvent" else one.solvents
    extra = "" if held in ("", "none") or ";" in held else f" ({held})"
    return literal(f"{_short(one.a)} / {_short(one.b)}{extra}")


def _short(name: str) -> str:
    return name.replace(" (1:1 v/v)", " 1:1").replace(" v/v)", ")")


def _pair(panel: Axes, one: RatioEstimate, y: float, colour: str, mark: str, words: bool) -> None:
    if one.ratio_ci is not None:
        low, high = one.ratio_ci
        panel.plot([low, high], [y, y], color=colour, lw=1.3, solid_capstyle="butt", zorder=2)
        for end in (low, high):
            panel.plot([end, end], [y - 0.16, y + 0.16], color=colour, lw=0.9, zorder=2)
    decided = (one.decision or "").split(":")[0]
    panel.plot(
        [one.ratio], [y], mark, color=colour, ms=4.6, mew=0.9, zorder=3,
        mfc="white" if decided == "open" else colour,
    )  # fmt: skip
    for text, offset in ((with_interval(one.ratio, one.ratio_ci), 3), (decided, 78))[
        : 2 if words else 1
    ]:
        panel.annotate(
            text, (1.0, y), xycoords=("axes fraction", "data"), xytext=(offset, 0),
            textcoords="offset points", va="center", fontsize=6.0, annotation_clip=False,
        )  # fmt: skip


def _range(panel: Axes, pairs: Sequence[RatioEstimate], margin: float, width: str) -> None:
    ends = [end for one in pairs for end in (one.ratio_ci or (one.ratio, one.ratio))]
    low, high = min(*ends, 1 / margin, *(p.ratio for p in pairs)), max(*ends, margin)
    # an interval from very few cells may run off; the numbers beside it say how far
    low, high = max(low, 0.02), min(high, 50.0)
    panel.set_xlim(low / 1.15, high * 1.15)
    style.plain_log(panel.xaxis, high / low * 1.3, 80.0 if width == "two" else 26.0)
