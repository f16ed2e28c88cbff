"""The part of the report on one electrode: what stands for and against each step."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from campaign.diagnosis.signatures import AXES, CANDIDATES, Step
from campaign.present.figures.matrix import held
from campaign.present.numbers import share, with_interval
from campaign.present.report.figures import Figures
from campaign.present.report.gathering import Trend
from campaign.present.report.markup import Html, join, listed, tag
from campaign.present.report.tables import Column, figure, table, text

Row = Mapping[str, Any]

UNITS = {"concentration": "order", "barrier": "Ea difference / (kJ/mol)"}


def electrode(row: Row, trends: Sequence[Trend], figures: Figures, anchor: str) -> Html:
    """Return the section of one electrode."""
    strength = f" ({row['strength']})" if row["strength"] else ""
    return join([
        tag("h3", row["electrode"], id=anchor),
        tag("p", f"{row['text']}{strength}", class_="verdict"),
        tag("p", f"{row['n_specimens']} specimens, {row['n_measurements']} measurements",
            class_="quiet"),
        listed(row["because"], "Because"),
        listed(row["missing"], "Missing"),
        _diagnostics(row["diagnostics"]),
        _predictions(row["terms"]),
        _candidates(row["terms"]),
        _budget(row["budget_by_time"]),
        *(figures.trend(one) for one in trends),
        _estimates(trends),
        _checks(row["checks"]),
        listed(row["would_change"], "What would change the verdict"),
        listed(row["warnings"], "Notes"),
    ])  # fmt: skip


def _diagnostics(diagnostics: Mapping[str, Row]) -> Html:
    rows = [{"axis": axis, **found} for axis, found in diagnostics.items()]
    return table(
        rows,
        (
            text("axis", "axis"),
            Column("estimate of", _what),
            Column("value (interval)", _value, lambda row: row["estimate"]),
            figure("specimens", "n_specimens"),
            text("decision", "decision"),
        ),
        "Diagnostics of the dominant term",
    )


def _what(row: Row) -> str:
    name = UNITS.get(row["axis"], "factor")
    return f"{name}: {' / '.join(row['between'])}" if row.get("between") else name


def _value(row: Row) -> str:
    if row["estimate"] is None:
        return "–"
    return with_interval(row["estimate"], row["interval"])


MARKS = {"confirmed": "●", "against": "✕", "open": "○"}


def _predictions(terms: Mapping[str, Row]) -> Html:
    """Return a table of each step's predictions and what was found, a mark and a word each."""
    rows = [
        {"term": term, "found": found, "step": step, "status": one["status"]}
        for term, found in terms.items()
        for one in found["candidates"]
        for step in CANDIDATES
        if step.name == one["step"]
    ]

    def column(axis: str) -> Column:
        return Column(axis, lambda row: _mark(row["step"], row["found"], axis))

    columns = (
        Column("step", lambda row: row["step"].name),
        text("term", "term"),
        *map(column, AXES),
        Column("status", lambda row: tag("b", row["status"]) if row["status"] == "stands"
               else row["status"]),
    )  # fmt: skip
    legend = (
        "Predictions: R, r should respond; U, u should not; capital: required. "
        "● as predicted, ✕ against it, ○ open"
    )
    return table(rows, columns, legend)


def _mark(step: Step, found: Row, axis: str) -> str:
    for prediction in step.predictions:
        if axis in prediction.axes:
            letter = prediction.outcome[0]
            outcome = held(prediction.outcome, found["diagnostics"][axis]["decision"])
            return f"{MARKS[outcome]} {letter.upper() if prediction.required else letter}"
    return ""


def _candidates(terms: Mapping[str, Row]) -> Html:
    parts: list[Html] = []
    for term, found in terms.items():
        rows = [
            tag("li", tag("b", one["step"]), f" [{one['control']}]: {one['status']}",
                listed([f"for: {said}" for said in one["for"]]
                       + [f"against: {said}" for said in one["against"]]))
            for one in found["candidates"]
        ]  # fmt: skip
        if rows:
            parts.append(tag("p", f"{term}, judged alone: {found['verdict']}"))
            parts.append(tag("ul", *rows))
    if not parts:
        return Html()
    return tag("details", tag("summary", "What stands for and against each step"), *parts)


def _budget(budgets: Sequence[Row]) -> Html:
    if not budgets:
        return Html()
    terms = [t for t in ("R_sl", "R_ct", "R_lat", "diffusion") if t in budgets[0]]

    def column(term: str) -> Column:
        return Column(term, lambda row: share(row.get(term)), lambda row: row.get(term))

    return table(
        budgets,
        (figure("t / s", "time_s"), *map(column, terms),
         figure("R_el / (ohm cm2)", "R_el_ohm_cm2")),
        "Shares of the resistance after a current step",
    )  # fmt: skip


def _estimates(trends: Sequence[Trend]) -> Html:
    """Return outliers, warnings and what was left out of the trends that are drawn."""
    said: list[str] = []
    for trend in trends:
        axis = trend.result.axis
        for one in trend.result.estimates:
            additives = "" if one.additives in ("", "none") else f" + {one.additives}"
            series = f"{one.solvents}{additives}"
            said += [f"{axis}, {series}: {warning}" for warning in one.warnings]
            said += [
                f"{axis}, {series}: specimen {item.specimen}, "
                + (f"measurement {item.measurement}" if item.measurement else "all readings")
                + f", lies {item.residual:+.1f} studentised residuals off; shown, not dropped"
                for item in one.outliers
            ]
        said += [
            f"{axis}: {item.count} left out ({item.solvents} {item.additives}): {item.reason}"
            for item in trend.result.left_out
        ]
    if not said:
        return Html()
    rows = list(dict.fromkeys(said))
    summary = f"Remarks on these trends, and what they leave out ({len(rows)})"
    return tag("details", tag("summary", summary), listed(rows))


def _checks(checks: Sequence[Row]) -> Html:
    return table(
        checks,
        (text("assignment check", "name"), text("outcome", "outcome"),
         figure("tested", "tested"), text("finding", "sentence")),
        "Were the arcs assigned as they should be",
    )  # fmt: skip
