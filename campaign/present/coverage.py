"""Coverage matrices that fit a terminal 100 columns wide, and what is missing in words."""

from __future__ import annotations

import textwrap
from collections.abc import Mapping, Sequence
from typing import Any

from campaign.present.refusals import note
from campaign.present.tables import WIDEST, show_csv, show_json

Row = Mapping[str, Any]

LEGEND = (
    "Each entry: specimens / measurements. * all else equal, levels of the row axis are compared "
    "here; + those of the column axis; # both; . nothing measured."
)


def show_coverage(
    found: Mapping[str, Any],
    *,
    as_json: bool,
    as_csv: bool = False,
    stated: Mapping[str, Any] | None = None,
) -> None:
    """Print matrices and what is missing in the form asked for."""
    rows: Sequence[Row] = found["rows"]
    if as_json:
        show_json(found)
        return
    if as_csv:
        show_csv([line for row in rows for line in _for_csv(row)])
        return
    if not rows:
        note("No measurements match." if stated else "There are no measurements yet.")
        return
    for row in rows:
        print("\n".join(coverage_lines(row)))
        print()
    print(textwrap.fill(LEGEND, WIDEST))


def coverage_lines(row: Row) -> list[str]:
    """Return the coverage of one electrode as lines at most 100 characters wide."""
    lines = [
        f"{row['electrode']}: {row['n_specimens']} specimens, {row['n_measurements']} measurements"
    ]
    for one in row["matrices"]:
        lines += ["", *matrix_lines(one)]
    lines += ["", "  Missing"]
    lacking = [one for one in row["missing"] if one["text"]]
    for one in lacking:
        lines += textwrap.wrap(
            f"{one['axis']} of {one['response']} ({one['decision']}): {one['text']}", WIDEST,
            initial_indent="    ", subsequent_indent="      ",
        )  # fmt: skip
    decided = [f"{one['axis']} of {one['response']}" for one in row["missing"] if not one["text"]]
    if not lacking:
        lines.append("    nothing: every diagnostic of the dominant term is decided")
    elif decided:
        lines += textwrap.wrap(
            "decided: " + ", ".join(decided), WIDEST, initial_indent="    ",
            subsequent_indent="      ",
        )  # fmt: skip
    return lines


def matrix_lines(matrix: Row) -> list[str]:
    """Return one matrix as lines, in several pieces side by side where it is too wide."""
    rows, columns = matrix["rows"], matrix["columns"]
    left = min(max([len(one) for one in rows] + [len(matrix["row_axis"])]), 34)
    cells = [[_cell(matrix, i, j) for j in range(len(columns))] for i in range(len(rows))]
    widths = [
        max([min(len(columns[j]), 22), *(len(line[j]) for line in cells)])
        for j in range(len(columns))
    ]
    lines = [f"  {matrix['row_axis']} x {matrix['column_axis']}"]
    for piece in _pieces(widths, WIDEST - left - 4):
        head = "  ".join(_cut(columns[j], widths[j]).rjust(widths[j]) for j in piece)
        lines.append(f"    {'':<{left}}  {head}".rstrip())
        for i, name in enumerate(rows):
            body = "  ".join(cells[i][j].rjust(widths[j]) for j in piece)
            lines.append(f"    {_cut(name, left):<{left}}  {body}".rstrip())
    return lines


def _pieces(widths: Sequence[int], room: int) -> list[list[int]]:
    """Return the columns in groups that fit the room."""
    pieces: list[list[int]] = [[]]
    used = 0
    for j, width in enumerate(widths):
        if pieces[-1] and used + width + 2 > room:
            pieces.append([])
            used = 0
        pieces[-1].append(j)
        used += width + 2
    return pieces


def _cut(text: str, width: int) -> str:
    return text if len(text) <= width else text[: width - 1] + "…"


def _cell(matrix: Row, i: int, j: int) -> str:
    count = matrix["measurements"][i][j]
    if not count:
        return ". "
    by_row, by_column = matrix["row_contrast"][i][j], matrix["column_contrast"][i][j]
    mark = "#" if by_row and by_column else "*" if by_row else "+" if by_column else " "
    return f"{matrix['specimens'][i][j]}/{count}{mark}"


def _for_csv(row: Row) -> list[dict[str, Any]]:
    return [
        {
            "electrode": row["electrode"],
            "row_axis": one["row_axis"],
            "row": one["rows"][i],
            "column_axis": one["column_axis"],
            "column": one["columns"][j],
            "specimens": one["specimens"][i][j],
            "measurements": one["measurements"][i][j],
            "row_contrast": one["row_contrast"][i][j],
            "column_contrast": one["column_contrast"][i][j],
        }
        for one in row["matrices"]
        for i in range(len(one["rows"]))
        for j in range(len(one["columns"]))
    ]
