"""Resistance against potential: one panel an electrode and scale, the chosen law as a line."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from campaign.present.figures import style
from campaign.present.figures.words import literal, names
from campaign.present.numbers import with_interval
from campaign.trends.curves import Curve
from campaign.trends.results import AxisResult, PotentialEstimate


def draw(result: AxisResult, curves: Sequence[Curve], width: str) -> Figure:
    """Return the figure of all electrodes and reference scales; a panel holds one of them."""
    ordered = sorted(curves, key=_panel_of)
    groups = [list(group) for _, group in groupby(ordered, _panel_of)]
    most = 1 if width == "one" else 2
    figure, rooms = style.keyed_panels(width, [len(g) for g in groups], 54.0, most)
    for index, ((panel, below), group) in enumerate(zip(rooms, groups, strict=True)):
        _panel(panel, below, group)
        if index % min(most, len(groups)) == 0:
            panel.set_ylabel(style.quantity(result.response, result.unit))
    return figure


def _panel_of(curve: Curve) -> tuple[str, str]:
    estimate = curve.estimate
    assert isinstance(estimate, PotentialEstimate)
    return estimate.electrode, estimate.reference


def _panel(panel: Axes, below: Axes, group: Sequence[Curve]) -> None:
    panel.set_yscale("log")
    reference = _panel_of(group[0])[1]
    width = max(float(np.ptp(curve.x)) for curve in group)
    title, series = names([curve.estimate for curve in group])
    for index, (curve, name) in enumerate(zip(group, series, strict=True)):
        _series(panel, index, curve, name, (index - (len(group) - 1) / 2) * 0.012 * width)
    y = np.concatenate([curve.y for curve in group])
    spread = max(float(y.max() / y.min()), 1.5)
    panel.set_ylim(y.min() / spread**0.12, y.max() * spread**0.12)
    style.plain_log(panel.yaxis, spread)
    against = f"($E$ vs {literal(reference)}) / V" if reference else "$E$ / V"
    panel.set_xlabel(against)
    panel.margins(x=0.06)
    panel.xaxis.set_major_locator(MaxNLocator(5, steps=[1, 2, 5, 10]))
    style.key(panel, below, f"{title}: law, largest ratio of two means")


def _series(panel: Axes, index: int, curve: Curve, name: str, shift: float) -> None:
    estimate = curve.estimate
    assert isinstance(estimate, PotentialEstimate)
    colour = style.colour(index)
    span = with_interval(estimate.span, estimate.span_ci)
    label = f"{name}: {_law(estimate)}, {span}"
    for line in curve.lines:
        open_law = line.name == "open"
        panel.plot(
            line.x, line.y, color=colour, lw=0.6 if open_law else 1.2, zorder=2,
            ls=style.dashes(index), alpha=0.8,
        )  # fmt: skip
    panel.plot(curve.x + shift, curve.y, ".", ms=2.4, mew=0, color=colour, alpha=0.6, zorder=3)
    if curve.levels is not None:
        at = curve.levels
        ends = np.nan_to_num(np.stack([at.y - at.low, at.high - at.y]))
        panel.errorbar(
            at.x + shift, at.y, yerr=ends, fmt=style.marker(index), color=colour, mec="white",
            mew=0.5, ms=4.4, elinewidth=0.8, capsize=1.8, zorder=4, label=label,
        )  # fmt: skip


def _law(estimate: PotentialEstimate) -> str:
    if estimate.law == "valley" and estimate.E0_V is not None and estimate.g is not None:
        return f"valley, E₀ = {estimate.E0_V:.3f} V, g = {estimate.g:.2g}"
    if estimate.law == "exponential" and estimate.slope_per_V is not None:
        return f"exponential, {estimate.slope_per_V:.2g} V⁻¹"
    return str(estimate.law)
