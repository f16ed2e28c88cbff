"""Candidate matrices: which step stands in which electrode, and on what evidence.

Every state has a mark of its own, so that a matrix reads in grey and without colour.
"""

from __future__ import annotations

import textwrap
from collections.abc import Mapping, Sequence
from typing import Any

from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Rectangle

from campaign.diagnosis.signatures import AXES, CANDIDATES, Step
from campaign.present.figures import style
from campaign.present.figures.words import literal

Row = Mapping[str, Any]

ROW_mm = 6.0
STATUS = {
    "stands": ("o", "stands", style.PALETTE[2], True),
    "eliminated": ("x", "eliminated", style.PALETTE[1], True),
    "untested": ("o", "untested", style.QUIET, False),
}
OUTCOME = {
    "confirmed": ("o", "as predicted", style.PALETTE[2], True),
    "against": ("x", "against the prediction", style.PALETTE[1], True),
    "open": ("o", "open", style.QUIET, False),
}


def summary_matrix(rows: Sequence[Row], width: str) -> Figure:
    """Return the candidate steps against the electrodes of a summary."""
    with style.styled():
        if not rows:
            return style.empty(width, "there are no measurements to judge")
        steps = [
            step for step in CANDIDATES
            if any(one["step"] == step.name for row in rows for one in row["candidates"])
        ]  # fmt: skip
        figure = style.sheet(width, (len(steps) + 1) * ROW_mm + (44.0 if width == "one" else 26.0))
        panel = figure.add_subplot()
        _grid(panel, [_step(step) for step in steps], [_head(row) for row in rows],
              upright=width == "one" and len(rows) > 2)  # fmt: skip
        for column, row in enumerate(rows):
            status = {one["step"]: one["status"] for one in row["candidates"]}
            for line, step in enumerate(steps):
                if step.name in status:
                    _mark(panel, column, line, STATUS[status[step.name]])
        _legend(figure, list(STATUS.values()))
        return figure


def _head(row: Row) -> str:
    verdict = row["verdict"] if row["strength"] is None else f"{row['verdict']}, {row['strength']}"
    term = style.SYMBOL.get(row["dominant"], "no term")
    name = " ".join(
        str(row[key]) for key in ("electrode", "salt", "solvents", "temperature") if key in row
    )
    lines = [literal(line) for line in textwrap.wrap(name, 18)]
    return "\n".join([*lines, term, *textwrap.wrap(verdict, 18)])


def _step(step: Step) -> str:
    return "\n".join(textwrap.wrap(step.name, 28))


def evidence_matrix(row: Row, width: str) -> Figure:
    """Return the candidate steps of one electrode against the axes they predict for.

    row: as `explain` gives it. Capital letters are required predictions, small ones typical.
    """
    with style.styled():
        lines = [
            (term, found, step)
            for term, found in row["terms"].items()
            for step in CANDIDATES
            if any(one["step"] == step.name for one in found["candidates"])
        ]
        if not lines:
            return style.empty(width, "no resistance of this electrode was fitted")
        figure = style.sheet(width, (len(lines) + 1) * ROW_mm + (30.0 if width == "one" else 18.0))
        panel = figure.add_subplot()
        _grid(panel, [f"{_step(step)} ({style.SYMBOL[term]})" for term, _, step in lines],
              [*AXES, ""], upright=width == "one")  # fmt: skip
        for y, (_, found, step) in enumerate(lines):
            _predictions(panel, y, step, found)
        key = "R, r: should respond; U, u: should not; capital: required"
        _legend(figure, list(OUTCOME.values()), f"{literal(row['electrode'])}. {key}")
        return figure


def _predictions(panel: Axes, y: int, step: Step, found: Row) -> None:
    for prediction in step.predictions:
        for axis in prediction.axes:
            x = AXES.index(axis)
            outcome = held(prediction.outcome, found["diagnostics"][axis]["decision"])
            letter = prediction.outcome[0]
            _mark(panel, x - 0.14, y, OUTCOME[outcome])
            panel.text(
                x + 0.2, y, letter.upper() if prediction.required else letter, ha="center",
                va="center", fontsize=6.6, color=style.INK,
            )  # fmt: skip
    status = next(one["status"] for one in found["candidates"] if one["step"] == step.name)
    panel.text(len(AXES) - 0.4, y, status, ha="left", va="center", fontsize=6.2,
               fontweight="bold" if status == "stands" else "normal")  # fmt: skip


def held(predicted: str, decision: str) -> str:
    """Return whether a decision confirms a predicted outcome, is against it, or is open."""
    if decision == predicted:
        return "confirmed"
    return "against" if decision.split(":")[0] != "open" else "open"


def _grid(
    panel: Axes, lines: Sequence[str], columns: Sequence[str], *, upright: bool
) -> None:
    panel.set_xlim(-0.5, len(columns) - 0.5)
    panel.set_ylim(len(lines) - 0.5, -0.5)
    for y in range(0, len(lines), 2):
        panel.add_patch(
            Rectangle((-0.5, y - 0.5), len(columns), 1, color=style.FAINT, alpha=0.45, lw=0)
        )
    panel.set_yticks(range(len(lines)), lines, fontsize=6.6)
    panel.set_xticks(range(len(columns)), columns, fontsize=6.2,
                     rotation=90 if upright else 0)  # fmt: skip
    panel.xaxis.tick_top()
    panel.tick_params(length=0)
    for spine in panel.spines.values():
        spine.set_visible(False)


def _mark(panel: Axes, x: float, y: float, how: tuple[str, str, str, bool]) -> None:
    mark, _, colour, filled = how
    panel.plot(
        [x], [y], mark, ms=5.0, color=colour, mfc=colour if filled else "none", mew=1.2
    )


def _legend(
    figure: Figure, kinds: Sequence[tuple[str, str, str, bool]], title: str = ""
) -> None:
    handles = [
        Line2D([], [], marker=mark, ls="", ms=5.0, color=colour, mew=1.2, label=word,
               mfc=colour if filled else "none")
        for mark, word, colour, filled in kinds
    ]  # fmt: skip
    figure.legend(handles=handles, loc="outside lower left", ncols=3, handlelength=1.2,
                  title=title or None, title_fontsize=6.2, alignment="left")  # fmt: skip
