"""The budget against time: which term makes up most of the resistance after a current step."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, LogLocator, NullFormatter

from campaign.diagnosis.budget import TERMS, Budget
from campaign.diagnosis.reference import Condition
from campaign.kinetics.constants import ZERO_CELSIUS_K
from campaign.ledger.readings import FloatArray
from campaign.present.figures import style
from campaign.present.figures.words import literal, wrapped


@dataclass(frozen=True)
class OverTime:
    """An electrode's shares over time: t (m,) [s], share and interval ends (m,) by term.

    R_el (m,): its share of all five, drawn apart. working_time_s: where the verdict looks.
    condition: what it was measured at, in words.
    """

    electrode: str
    time_s: FloatArray
    shares: Mapping[str, tuple[FloatArray, FloatArray, FloatArray]]
    R_el: FloatArray
    working_time_s: float
    condition: str


def over_time(
    electrode: str, budgets: Sequence[Budget], working_time_s: float
) -> OverTime:
    """Return the curves of one electrode's budgets, in rising time."""
    shares = {}
    for term in TERMS:
        if all(term in one.shares for one in budgets):
            parts = [one.shares[term] for one in budgets]
            ends = [part.interval or (np.nan, np.nan) for part in parts]
            shares[term] = (
                np.array([part.share for part in parts]),
                np.array([low for low, _ in ends]),
                np.array([high for _, high in ends]),
            )
    own = np.array([sum(s.contribution for s in one.shares.values()) for one in budgets])
    R_el = np.array([one.R_el for one in budgets])
    times = np.array([one.time_s for one in budgets])
    with np.errstate(invalid="ignore"):
        part_of_all = R_el / (R_el + own)
    return OverTime(
        electrode, times, shares, part_of_all, working_time_s, _words(budgets[0].condition)
    )


def _words(condition: Condition) -> str:
    words = [condition.electrolyte, f"{condition.temperature_K - ZERO_CELSIUS_K:.0f} °C"]
    if condition.potential_V is not None and np.isfinite(condition.potential_V):
        against = f" vs {condition.reference}" if condition.reference else ""
        words.append(f"{condition.potential_V:.3g} V{against}")
    return literal(", ".join(words))


def budget_figure(electrodes: Sequence[OverTime], width: str) -> Figure:
    """Return a panel an electrode with the shares of its terms over time."""
    with style.styled():
        if not electrodes:
            return style.empty(width, "no resistance of an electrode was fitted")
        most = 1 if width == "one" else 2
        figure, rooms = style.keyed_panels(width, [0] * len(electrodes), 46.0, most)
        wide = style.WIDTHS_mm[width] / min(most, len(electrodes))
        for index, ((panel, below), one) in enumerate(zip(rooms, electrodes, strict=True)):
            draw(panel, one, labelled=index % min(most, len(electrodes)) == 0)
            title = wrapped(one.condition, wide - 12.0)
            panel.set_title(f"{literal(one.electrode)}\n{title}")
            style.key(panel, below, "", ncols=5)
        return figure


def draw(panel: Axes, one: OverTime, *, labelled: bool) -> None:
    """Draw one electrode's shares into a panel."""
    panel.set_xscale("log")
    panel.set_ylim(0, 1)
    panel.set_xlim(one.time_s[0], one.time_s[-1])
    for index, (term, (value, low, high)) in enumerate(one.shares.items()):
        place = TERMS.index(term)
        panel.fill_between(
            one.time_s, low, high, color=style.colour(place), alpha=0.15, lw=0, zorder=1
        )
        panel.plot(
            one.time_s, value, color=style.colour(place), ls=style.dashes(place), zorder=3,
            marker=style.marker(place), ms=3.0, markevery=(4 + 3 * index, 12),
            label=style.SYMBOL[term],
        )  # fmt: skip
    panel.plot(one.time_s, one.R_el, color=style.QUIET, lw=0.7, ls=(0, (1, 2)), zorder=2,
               label=style.SYMBOL["R_el"] + " (of all)")  # fmt: skip
    panel.axvline(one.working_time_s, color=style.INK, lw=0.6, zorder=2)
    panel.annotate(
        f"{one.working_time_s:g} s", (one.working_time_s, 1.0), xycoords=("data", "axes fraction"),
        xytext=(2, -3), textcoords="offset points", va="top", fontsize=6.0,
    )  # fmt: skip
    panel.xaxis.set_major_locator(LogLocator(base=10, numticks=12))
    panel.xaxis.set_major_formatter(FuncFormatter(_power))
    panel.xaxis.set_minor_formatter(NullFormatter())
    panel.set_xlabel("$t$ / s")
    if labelled:
        panel.set_ylabel("share of the resistance")


def _power(value: float, _: object = None) -> str:
    """Return a power of ten in plain letters, which need no formula to be set."""
    exponent = round(np.log10(value))
    return "10" + str(exponent).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
