"""Drift with age: one panel an electrode, every series relative to its state when new."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from campaign.present.figures import style
from campaign.present.figures.words import names
from campaign.present.numbers import with_interval
from campaign.trends.curves import Curve
from campaign.trends.results import AgeEstimate, AxisResult

FURTHEST = (0.5, 2.0)


def draw(result: AxisResult, curves: Sequence[Curve], width: str) -> Figure:
    """Return the figure of all electrodes; a panel holds one."""
    groups = [list(group) for _, group in groupby(curves, lambda c: c.estimate.electrode)]
    most = 1 if width == "one" else 2
    figure, rooms = style.keyed_panels(width, [len(g) for g in groups], 48.0, most)
    symbol = style.SYMBOL.get(result.response, result.response)
    for index, ((panel, below), group) in enumerate(zip(rooms, groups, strict=True)):
        _panel(panel, below, group)
        panel.set_xlabel("$t$ / d")
        if index % min(most, len(groups)) == 0:
            panel.set_ylabel(f"{symbol} / {symbol}(new)")
    return figure


def _panel(panel: Axes, below: Axes, group: Sequence[Curve]) -> None:
    panel.set_yscale("log")
    title, series = names([curve.estimate for curve in group])
    longest = max(float(curve.x.max()) for curve in group)
    low = high = 1.0
    for index, (curve, name) in enumerate(zip(group, series, strict=True)):
        _series(panel, index, curve, name, longest * (1.03 + 0.022 * index))
        low, high = min(low, float(curve.y.min())), max(high, float(curve.y.max()))
        for line in curve.lines[:1]:
            if line.low is not None and line.high is not None:
                # an interval from two cells may run off; the key says how far
                low = min(low, max(float(line.low[-1]), FURTHEST[0]))
                high = max(high, min(float(line.high[-1]), FURTHEST[1]))
    panel.axhline(1.0, color=style.QUIET, lw=0.5, zorder=0)
    panel.set_ylim(low / 1.06, high * 1.06)
    style.plain_log(panel.yaxis, high / low * 1.12, 46.0)
    panel.set_xlim(0.0, longest * (1.05 + 0.022 * len(group)))
    style.key(panel, below, f"{title}: factor over the longest age, 95 % bars")


def _series(panel: Axes, index: int, curve: Curve, name: str, bar: float) -> None:
    estimate = curve.estimate
    assert isinstance(estimate, AgeEstimate)
    colour = style.colour(index)
    value = with_interval(estimate.drift, estimate.drift_ci)
    for order, line in enumerate(curve.lines):
        first = order == 0
        panel.plot(
            line.x, line.y, color=colour, ls=style.dashes(index), lw=1.1 if first else 0.6,
            marker=style.marker(index), markevery=[],
            label=f"{name}: {value}" if first else None,
        )  # fmt: skip
        if first and line.low is not None and line.high is not None:
            ends = [[line.y[-1] - line.low[-1]], [line.high[-1] - line.y[-1]]]
            panel.errorbar(
                [bar], line.y[-1:], yerr=ends, fmt=style.marker(index), ms=2.6, color=colour,
                elinewidth=0.9, capsize=1.6,
            )  # fmt: skip
    specimens = np.array(curve.specimen, dtype=object)
    for rank, specimen in enumerate(sorted(set(curve.specimen))):
        mine = specimens == specimen
        rising = np.argsort(curve.x[mine])
        panel.plot(
            curve.x[mine][rising], curve.y[mine][rising], marker=style.marker(index), ms=3.0,
            color=colour, lw=0.3, alpha=0.85, mew=0.6,
            fillstyle=("full", "none", "left", "bottom")[rank % 4],
        )  # fmt: skip
