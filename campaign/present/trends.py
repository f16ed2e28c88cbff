"""Trends as tables: one row an estimate, its interval and its decision."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.numbers import number, share, with_interval
from campaign.present.paragraphs import say
from campaign.present.refusals import note
from campaign.present.tables import Column, show_csv, show_json, show_table
from campaign.trends.results import AxisResult

Row = dict[str, Any]


def _text(key: str, heading: str) -> Column:
    return Column(key, heading)


SERIES = (_text("electrode", "electrode"), _text("salt", "salt"))
COUNTS = (
    Column("n_specimens", "specimens", right=True),
    Column("n_measurements", "readings", right=True),
)
SCATTER = (
    Column("sigma_between", "s(cells)", share, right=True),
    Column("sigma_within", "s(readings)", share, right=True),
)
DECISION = _text("decision", "decision")

# Heading of the estimate, then value and interval keys, for each axis.
FIGURES: Mapping[str, Sequence[tuple[str, str, str]]] = {
    "concentration": (("order (95 %)", "order", "order_ci"),),
    "solvent": (("R(a)/R(b) (95 %)", "ratio", "ratio_ci"),),
    "additive": (("R(a)/R(b) (95 %)", "ratio", "ratio_ci"),),
    "temperature": (
        ("Ea of ln R /(kJ/mol)", "Ea_kJ_mol", "Ea_ci"),
        ("Ea of ln(R/T) /(kJ/mol)", "Ea_lnRT_kJ_mol", "Ea_lnRT_ci"),
    ),
    "potential": (("span max/min (95 %)", "span", "span_ci"),),
    "age": (("drift R(old)/R(new)", "drift", "drift_ci"),),
}
OWN: Mapping[str, tuple[Column, ...]] = {
    "concentration": (_text("blend", "solvents + additives"),),
    "solvent": (_text("a", "a"), _text("b", "b"), _text("additives", "additives")),
    "additive": (_text("solvents", "solvents"), _text("a", "a"), _text("b", "b")),
    "temperature": (_text("blend", "solvents + additives"),),
    "potential": (_text("blend", "solvents + additives"), _text("law", "law")),
    "age": (_text("blend", "solvents + additives"), _text("law", "law")),
}


def show_trend(
    result: AxisResult,
    *,
    as_json: bool,
    as_csv: bool,
    rows: bool,
    stated: Mapping[str, Any],
) -> None:
    """Print the estimates of one axis in the form asked for."""
    content = result.as_dict()
    if as_json:
        show_json(content)
        return
    if as_csv:
        show_csv([_flat(row) for row in content["estimates"]])
        return
    if not content["estimates"]:
        asked = ", ".join(f"--{k.replace('_', '-')} {v}" for k, v in stated.items())
        note(
            f"No estimate along {result.axis} for {result.response}"
            + (f" with {asked}." if asked else ".")
        )
    else:
        title = f"{result.response} along {result.axis}, area-specific, {result.unit}"
        show_table([_shown(result.axis, row) for row in content["estimates"]],
                   _columns(result.axis), title)  # fmt: skip
    _differences(content["differences"])
    _donor(content["donor"])
    _remarks(content, rows)


def _columns(axis: str) -> tuple[Column, ...]:
    figures = tuple(_text(heading, heading) for heading, _, _ in FIGURES[axis])
    scatter = SCATTER if axis == "concentration" else ()
    series = SERIES if axis not in ("additive",) else SERIES[:1]
    return (*series, *OWN[axis], *figures, *COUNTS, *scatter, DECISION)


def _shown(axis: str, row: Row) -> Row:
    shown = {**row, "blend": _blend(row)}
    for heading, value, interval in FIGURES[axis]:
        shown[heading] = with_interval(row[value], row[interval])
    return shown


def _blend(row: Row) -> str:
    additives = row.get("additives") or "none"
    return row["solvents"] if additives == "none" else f"{row['solvents']} + {additives}"


def _series(row: Row) -> str:
    """Return how a remark names the series; an axis over the solvents has none to name."""
    return f"{row['electrode']}, {_blend(row)}" if row["solvents"] else str(row["electrode"])


def _flat(row: Row) -> Row:
    """Return a row for CSV: intervals as two columns, lists joined."""
    flat: Row = {}
    for key, value in row.items():
        if key.endswith("_ci"):
            low, high = value or (None, None)
            flat[f"{key}_low"], flat[f"{key}_high"] = low, high
        elif key in ("rows", "warnings"):
            flat[key] = "; ".join(map(str, value))
        elif not isinstance(value, (dict, list)):
            flat[key] = value
    return flat


def _differences(found: Sequence[Row]) -> None:
    if not found:
        return
    rows = [
        {
            **row,
            "difference": with_interval(row["difference_kJ_mol"], row["difference_ci"]),
        }
        for row in found
    ]
    columns = (
        _text("electrode", "electrode"),
        _text("a", "a"),
        _text("b", "b"),
        _text("difference", "Ea(a) - Ea(b) /(kJ/mol)"),
        Column("n_specimens", "specimens", right=True),
        DECISION,
    )
    print()
    show_table(rows, columns, "Differences of barriers (ln R form), simultaneous 95 % intervals")


def _donor(found: Sequence[Row]) -> None:
    for row in found:
        known = ", ".join(f"{name} {value:g}" for name, value in row["donor_numbers"].items())
        print(
            f"{row['electrode']}: ln R changes by "
            f"{with_interval(row['slope'], row['slope_ci'])} per kcal/mol of Gutmann donor number "
            f"({known}); a blend has no donor number and is left out"
        )


def _remarks(content: Row, rows: bool) -> None:
    said: list[str] = list(content["warnings"])
    for row in content["estimates"]:
        said += [f"{_series(row)}: {text}" for text in row["warnings"]]
        apparent = row.get("apparent")
        if apparent:
            said.append(
                f"{_series(row)}: with {apparent['for_what']}, pores not taken out, it would be "
                f"{with_interval(apparent['value'], apparent['ci'])}"
            )
        adjusted = row.get("adjusted")
        if adjusted:
            said.append(
                f"{_series(row)}: with {adjusted['for_what']} held it is "
                f"{with_interval(adjusted['value'], adjusted['ci'])}"
            )
        for item in row["outliers"]:
            where = f"measurement {item['measurement']}" if item["measurement"] else "all readings"
            said.append(
                f"{_series(row)}: specimen {item['specimen']}, {where}, lies "
                f"{item['residual']:+.1f} studentised residuals off; shown, not dropped"
            )
    for text in dict.fromkeys(said):
        say(text, "Note: ", "    ")
    for item in content["left_out"]:
        series = " ".join(
            str(item[key]) for key in ("electrode", "salt", "solvents", "additives") if item[key]
        )
        named = f"({series}) " if series else ""
        say(f"{item['count']} {named}- {item['reason']}", "Left out: ", "    ")
    if rows:
        for row in content["estimates"]:
            numbers = ", ".join(number(n) for n in row["rows"])
            say(f"{_series(row)}: {numbers}", "Measurements of ", "    ")
