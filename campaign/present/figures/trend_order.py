"""Reaction orders: one log-log panel a series, with its line and band.

Every specimen stands beside its concentration in a column of its own: small dots are its
readings, a large marker their mean.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from campaign.ledger.readings import FloatArray
from campaign.present.figures import style
from campaign.present.figures.words import blend, fitted_line, series_title
from campaign.present.numbers import with_interval
from campaign.trends.curves import Curve
from campaign.trends.results import AxisResult, OrderEstimate

BASIS = {"mol/L": "$c$ / (mol L⁻¹)", "mol/kg": "$b$ / (mol kg⁻¹)"}
MOST_NAMED = 12


def draw(result: AxisResult, curves: Sequence[Curve], width: str) -> Figure:
    """Return the figure of all series; a panel holds one."""
    figure, axes = style.panels(width, len(curves), 54.0, 2 if width == "one" else 3)
    label = style.quantity(result.response, result.unit)
    columns = 2 if width == "one" else 3
    for index, (panel, curve) in enumerate(zip(axes, curves, strict=True)):
        _panel(panel, curve, narrow=width == "one" and len(curves) > 1)
        if index % min(columns, len(curves)) == 0:
            panel.set_ylabel(label)
        panel.set_xlabel(_concentration(curve))
    return figure


def _concentration(curve: Curve) -> str:
    estimate = curve.estimate
    if isinstance(estimate, OrderEstimate) and estimate.in_activity:
        return "activity $a$"
    return BASIS.get(estimate.basis, "$c$")


def _panel(panel: Axes, curve: Curve, *, narrow: bool) -> None:
    estimate = curve.estimate
    assert isinstance(estimate, OrderEstimate)
    panel.set_xscale("log")
    panel.set_yscale("log")
    _fitted(panel, curve)
    top = _specimens(panel, curve)
    low, high = curve.x.min(), curve.x.max()
    panel.set_xlim(low / 1.55, high * 1.55)
    floor = min(curve.y.min(), *(line.y.min() for line in curve.lines))
    panel.set_ylim(floor / (1.8 if len(set(curve.specimen)) <= MOST_NAMED else 1.5), top * 1.25)
    style.plain_log(panel.xaxis, high / low * 2.4, 40.0)
    style.plain_log(panel.yaxis, top / floor * 2.0, 34.0)
    value = with_interval(estimate.order, estimate.order_ci).replace("-", "−")
    word = (estimate.decision or "").split(":")[0]
    title = series_title(estimate.electrode, blend(estimate), panel)
    found = fitted_line(f"m = {value}, {word}", panel)
    panel.set_title(f"{title}\n{found}", fontsize=6.0 if narrow else 7.0)
    panel.text(
        0.03, 0.03, curve.held, transform=panel.transAxes, ha="left", va="bottom",
        fontsize=5.6, color=style.QUIET,
    )  # fmt: skip


def _fitted(panel: Axes, curve: Curve) -> None:
    for line in curve.lines:
        if line.low is not None and line.high is not None:
            panel.fill_between(line.x, line.low, line.high, color=style.FAINT, lw=0, zorder=1)
        panel.plot(line.x, line.y, color=style.INK, zorder=2)


def _specimens(panel: Axes, curve: Curve) -> float:
    """Draw readings and means of every specimen side by side; return the highest mark."""
    names = np.array(curve.specimen, dtype=object)
    named = len(set(curve.specimen)) <= MOST_NAMED
    for c in np.unique(np.round(np.log(curve.x), 3)):
        rows = np.round(np.log(curve.x), 3) == c
        here = sorted(set(names[rows].tolist()))
        step = min(0.13, 0.5 / len(here))
        for rank, name in enumerate(here):
            mine = rows & (names == name)
            shift = float(np.exp((rank - (len(here) - 1) / 2) * step))
            x, colour = curve.x[mine] * shift, style.colour(rank)
            panel.plot(x, curve.y[mine], ".", ms=2.0, mew=0, color=colour, alpha=0.55, zorder=3)
            mean = float(np.exp(np.log(curve.y[mine]).mean()))
            panel.plot(
                x[:1], [mean], style.marker(rank), ms=4.2, mec="white", mew=0.5, color=colour,
                zorder=4,
            )  # fmt: skip
            if named:
                _label(panel, name, float(x[0]), curve.y[mine], mean, curve)
    return float(curve.y.max()) * (1.25 if named else 1.0)


def _label(
    panel: Axes, name: str, x: float, y: FloatArray, mean: float, curve: Curve
) -> None:
    """Name a specimen on the side of its readings that is away from the line."""
    line = curve.lines[0]
    above = mean >= float(np.interp(np.log(x), np.log(line.x), line.y))
    panel.annotate(
        name, (x, float(y.max() if above else y.min())), xytext=(0, 3 if above else -3),
        textcoords="offset points", ha="center", va="bottom" if above else "top",
        fontsize=4.8, rotation=90, color=style.QUIET,
    )  # fmt: skip
