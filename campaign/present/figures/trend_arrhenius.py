"""Arrhenius plots: one panel an electrode, 1/T below, the temperature above."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import FixedLocator, FuncFormatter, MaxNLocator, NullLocator

from campaign.kinetics.constants import ZERO_CELSIUS_K
from campaign.present.figures import style
from campaign.present.figures.words import names
from campaign.present.numbers import with_interval
from campaign.trends.curves import Curve
from campaign.trends.results import AxisResult, BarrierEstimate


def draw(result: AxisResult, curves: Sequence[Curve], width: str) -> Figure:
    """Return the figure of all electrodes; a panel holds one."""
    groups = [list(group) for _, group in groupby(curves, lambda c: c.estimate.electrode)]
    most = 1 if width == "one" else 2
    figure, rooms = style.keyed_panels(width, [len(g) for g in groups], 62.0, most)
    for index, ((panel, below), group) in enumerate(zip(rooms, groups, strict=True)):
        _panel(panel, below, group)
        if index % min(most, len(groups)) == 0:
            panel.set_ylabel(style.quantity(result.response, result.unit))
    return figure


def _panel(panel: Axes, below: Axes, group: Sequence[Curve]) -> None:
    panel.set_yscale("log")
    title, series = names([curve.estimate for curve in group])
    for index, (curve, name) in enumerate(zip(group, series, strict=True)):
        _series(panel, index, curve, name)
    y = np.concatenate([curve.y for curve in group])
    inverse = np.concatenate([1000.0 / curve.x for curve in group])
    margin = 0.06 * float(np.ptp(inverse)) or 0.05
    panel.set_xlim(inverse.min() - margin, inverse.max() + margin)
    panel.set_xlabel(r"$T^{-1}$ / (10⁻³ K⁻¹)")
    panel.xaxis.set_major_locator(MaxNLocator(5))
    spread = float(y.max() / y.min())
    panel.set_ylim(y.min() / spread**0.05, y.max() * spread**0.05)
    style.plain_log(panel.yaxis, spread)
    style.key(panel, below, f"{title}: Eₐ / (kJ mol⁻¹), form ln R")
    _temperatures(panel, np.concatenate([curve.x for curve in group]))


def _series(panel: Axes, index: int, curve: Curve, name: str) -> None:
    estimate = curve.estimate
    assert isinstance(estimate, BarrierEstimate)
    colour = style.colour(index)
    for line in curve.lines:
        if line.low is not None and line.high is not None:
            panel.fill_between(
                1000.0 / line.x, line.low, line.high, color=colour, alpha=0.16, lw=0, zorder=1
            )
        value = with_interval(estimate.Ea_kJ_mol, estimate.Ea_ci)
        panel.plot(
            1000.0 / line.x, line.y, color=colour, ls=style.dashes(index), zorder=2,
            marker=style.marker(index), markevery=[], label=f"{name}: {value}",
        )  # fmt: skip
    specimens = np.array(curve.specimen, dtype=object)
    for rank, specimen in enumerate(sorted(set(curve.specimen))):
        mine = specimens == specimen
        # specimens of a series share its marker; open, half and full faces tell them apart
        panel.plot(
            1000.0 / curve.x[mine], curve.y[mine], style.marker(index), ms=3.2, color=colour,
            fillstyle=("full", "none", "left", "bottom")[rank % 4], mew=0.6, zorder=3,
            alpha=0.85,
        )  # fmt: skip


def _temperatures(panel: Axes, kelvin: np.ndarray) -> None:
    """Put the Celsius temperature on top, at the temperatures that were measured."""
    celsius = np.unique(np.round(kelvin - ZERO_CELSIUS_K))
    kept = [celsius[0]]
    least = 0.07 * float(np.ptp(1000.0 / kelvin)) if len(celsius) > 1 else 0.0
    for value in celsius[1:]:
        if _inverse(kept[-1]) - _inverse(value) > least:
            kept.append(value)
    top = panel.secondary_xaxis("top")
    top.xaxis.set_major_locator(FixedLocator([_inverse(value) for value in kept]))
    top.xaxis.set_minor_locator(NullLocator())
    top.xaxis.set_major_formatter(FuncFormatter(lambda x, _: f"{1000.0 / x - ZERO_CELSIUS_K:.0f}"))
    top.set_xlabel(r"$\vartheta$ / °C")


def _inverse(celsius: float) -> float:
    return 1000.0 / (celsius + ZERO_CELSIUS_K)
