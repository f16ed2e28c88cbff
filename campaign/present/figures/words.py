"""Titles and series names in figures, short enough for a panel."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from campaign.trends.results import SeriesEstimate


def blend(estimate: SeriesEstimate) -> str:
    """Return salt, solvents and additives of a series in one line."""
    text = f"{estimate.salt} in {estimate.solvents}" if estimate.salt else estimate.solvents
    extra = "" if estimate.additives in ("", "none") else f" + {estimate.additives}"
    return literal(text + extra)


def names(group: Sequence[SeriesEstimate]) -> tuple[str, list[str]]:
    """Return a key's title and the names of its series; a salt they share goes to the title."""
    salts = {one.salt for one in group}
    electrode = literal(group[0].electrode)
    if len(salts) > 1 or "" in salts:
        return electrode, [blend(one) for one in group]
    short = [blend(replace(one, salt="")) for one in group]
    return f"{electrode}, {literal(group[0].salt)}", short


def literal(text: str) -> str:
    """Return a user's text so that Matplotlib shows it as it is: no formula starts in it."""
    return text.replace("$", r"\$")


def wrapped(text: str, width_mm: float) -> str:
    """Return a text broken into lines that fit a width at the size of titles."""
    return "\n".join(textwrap.wrap(text, max(16, int(width_mm / 1.45))))


def series_title(electrode: str, series: str, panel: Any) -> str:
    """Return a panel's title: the electrode, and below it the series, wrapped to its width."""
    fits = _room(panel)
    lines = [*textwrap.wrap(literal(electrode), fits), *textwrap.wrap(series, fits)]
    return "\n".join(lines[:3])


def fitted_line(text: str, panel: Any) -> str:
    """Return a line of a panel's title, broken at its last comma where it is too long."""
    if len(text) <= _room(panel) or ", " not in text:
        return text
    return "\n".join(text.rsplit(", ", 1))


def _room(panel: Any) -> int:
    """Return how many characters of a title a panel is wide."""
    inches = panel.figure.get_figwidth() / max(1, panel.get_gridspec().ncols)
    return max(16, int(inches * 72 / 4.6) - 4)
