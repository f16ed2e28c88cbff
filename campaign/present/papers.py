"""The rate-limiting-step table for a paper: Markdown, and LaTeX with booktabs."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.budgets import condition_text, terms_of, time_rows
from campaign.present.criteria import criteria_sentence, interval_level
from campaign.present.numbers import decimals_of, share, significant

Row = Mapping[str, Any]

MINUS = "\N{MINUS SIGN}"
GROUPS = ("salt", "solvents", "temperature")

# A value with its interval; kept apart from text so that each form writes its own minus.
HEADINGS = {
    "electrode": "Electrode", "salt": "Salt", "solvents": "Solvents",
    "temperature": "Temperature", "n": "Specimens", "dominant": "Largest term",
    "order": "Reaction order", "factor": "Solvent factor", "Ea": "Ea/(kJ/mol)",
    "law": "Law in E", "verdict": "Rate-limiting step", "strength": "Strength",
}  # fmt: skip


def interval_text(value: float | None, interval: Sequence[float] | None) -> str:
    """Return 'value [low, high]', rounded to the width of the interval; '' without a value."""
    if value is None:
        return ""
    if interval is None:
        return significant(value, 2)
    low, high = interval
    decimals = min(decimals_of((high - low) / 2), 6)
    return f"{value:.{decimals}f} [{low:.{decimals}f}, {high:.{decimals}f}]"


def _cells(row: Row) -> dict[str, str]:
    diagnostics = row["diagnostics"]
    order = diagnostics["concentration"]
    return {
        "electrode": row["electrode"],
        **{key: str(row[key]) for key in GROUPS if key in row},
        "n": str(row["n_specimens"]),
        "dominant": _dominant(row),
        "order": interval_text(order.get("order"), order.get("order_ci")),
        "factor": _factor(diagnostics["solvent"]),
        "Ea": _barriers(diagnostics["barrier"]),
        "law": diagnostics["potential"].get("law") or "",
        "verdict": row["text"],
        "strength": row["strength"] or "",
    }


def _dominant(row: Row) -> str:
    if row["dominant"] is None:
        return ""
    limited = ", cell-limited" if row["cell_limited"] else ""
    return f"{row['dominant']} ({share(row['share'])}{limited})"


def _factor(diagnostic: Row) -> str:
    """Return the ratio of the most different solvents, as a factor of at least 1."""
    ratio, interval = diagnostic.get("ratio"), diagnostic.get("ratio_ci")
    if ratio is not None and ratio < 1:
        ratio = 1 / ratio
        interval = interval and (1 / interval[1], 1 / interval[0])
    return interval_text(ratio, interval)


def _barriers(diagnostic: Row) -> str:
    values = [one["Ea_kJ_mol"] for one in diagnostic.get("series", ()) if one["Ea_kJ_mol"]]
    if not values:
        return ""
    low, high = f"{min(values):.0f}", f"{max(values):.0f}"
    return low if low == high else f"{low} to {high}"


def _table(rows: Sequence[Row]) -> tuple[list[str], list[list[str]]]:
    cells = [_cells(row) for row in rows]
    keys = [key for key in HEADINGS if any(row.get(key) for row in cells)]
    return [HEADINGS[key] for key in keys], [[row.get(key, "") for key in keys] for row in cells]


def _time_tables(rows: Sequence[Row]) -> list[tuple[str, list[str], list[list[str]]]]:
    """Return for every row with budgets over time a caption, headings and cells."""
    found = []
    for row in rows:
        budgets = row.get("budget_by_time") or ()
        if not budgets:
            continue
        terms = terms_of(budgets)
        label = ", ".join(str(row[key]) for key in ("electrode", *GROUPS) if key in row)
        shown = time_rows(budgets)
        found.append(
            (
                f"{label}: shares at {condition_text(budgets[0])}",
                ["t/s", *(f"{term}/%" for term in terms), "R_el/(ohm cm2)"],
                [[one["time"], *(one.get(t, "") for t in terms), one["R_el"]] for one in shown],
            )
        )
    return found


def _caption(found: Mapping[str, Any]) -> str:
    criteria = found["criteria"]
    return (
        f"Rate-limiting steps. Values with {interval_level(criteria)} intervals in brackets; "
        f"specimens are the experimental units. {criteria_sentence(criteria)}"
    )


def markdown(found: Mapping[str, Any]) -> str:
    """Return the table, the shares over time and the criteria in Markdown."""
    rows = found["rows"]
    parts = [_pipes(*_table(rows))]
    for caption, headings, cells in _time_tables(rows):
        parts.append(f"{_mark(caption)}\n\n{_pipes(headings, cells)}")
    parts.append(_mark(_caption(found)))
    return "\n\n".join(parts)


def _pipes(headings: Sequence[str], cells: Sequence[Sequence[str]]) -> str:
    lines = [headings, ["---"] * len(headings), *cells]
    return "\n".join(
        "| " + " | ".join(_mark(text) if i != 1 else text for text in line) + " |"
        for i, line in enumerate(lines)
    )


_MARKS = re.compile(r"([\\`*_{}\[\]<>#|~])")


def _mark(text: str) -> str:
    """Return text that Markdown shows as it is; minus signs before numbers as such."""
    return _MARKS.sub(r"\\\1", _minus(" ".join(text.split()), MINUS))


_NEGATIVE = re.compile(r"(?<![\w)\]-])-(?=\d)", re.ASCII)


def _minus(text: str, sign: str) -> str:
    """Return text with the hyphen before a number replaced; hyphens in names stay."""
    return _NEGATIVE.sub(lambda _: sign, text)


def latex(found: Mapping[str, Any]) -> str:
    """Return the table, the shares over time and the criteria as LaTeX (package booktabs)."""
    rows = found["rows"]
    parts = ["% needs \\usepackage{booktabs}", _booktabs(*_table(rows), _caption(found))]
    parts += [_booktabs(headings, cells, text) for text, headings, cells in _time_tables(rows)]
    return "\n\n".join(parts)


def _booktabs(headings: Sequence[str], cells: Sequence[Sequence[str]], caption: str) -> str:
    lines = [
        "\\begin{table}",
        "\\centering",
        f"\\caption{{{escape(caption)}}}",
        f"\\begin{{tabular}}{{{'l' * len(headings)}}}",
        "\\toprule",
        " & ".join(escape(text) for text in headings) + " \\\\",
        "\\midrule",
        *(" & ".join(_guarded(escape(text), i) for i, text in enumerate(row)) + " \\\\"
          for row in cells),
        "\\bottomrule",
        "\\end{tabular}",
        "\\end{table}",
    ]  # fmt: skip
    return "\n".join(lines)


def _guarded(text: str, column: int) -> str:
    """Return a cell whose leading bracket is not read as an option of the row before it."""
    return f"{{}}{text}" if column == 0 and text.startswith(("[", "*")) else text


_SPECIAL = {
    "\\": "\\textbackslash{}", "{": "\\{", "}": "\\}", "$": "\\$", "&": "\\&", "#": "\\#",
    "%": "\\%", "_": "\\_", "~": "\\textasciitilde{}", "^": "\\textasciicircum{}",
    "°": "\\textdegree{}", "µ": "\\textmu{}", "μ": "\\textmu{}", "×": "$\\times$",
    "±": "$\\pm$", "·": "$\\cdot$", "Ω": "$\\Omega$", "<": "$<$", ">": "$>$", "|": "$|$",
    "\"": "''", MINUS: "$-$",
}  # fmt: skip
_QUANTITY = re.compile(r"\b(R)_(el|sl|ct|lat)\b|\b(Ea)(?=/\(| |:|$)|ohm cm2", re.ASCII)


def escape(text: str) -> str:
    """Return text that LaTeX sets as it is: specials escaped, minus signs and symbols in math."""
    parts, end = [], 0
    shown = _minus(" ".join(text.split()), MINUS)
    for match in _QUANTITY.finditer(shown):
        parts += [_plain(shown[end : match.start()]), _symbol(match)]
        end = match.end()
    return "".join((*parts, _plain(shown[end:])))


def _plain(text: str) -> str:
    return "".join(_SPECIAL.get(character, character) for character in text)


def _symbol(match: re.Match[str]) -> str:
    if match.group(2):
        return f"$R_\\mathrm{{{match.group(2)}}}$"
    if match.group(3):
        return "$E_\\mathrm{a}$"
    return "$\\Omega$\\,cm$^2$"
