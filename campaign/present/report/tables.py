"""Tables of the report, every column sortable."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from campaign.present.numbers import number
from campaign.present.report.markup import Html, join, tag

Row = Mapping[str, Any]


@dataclass(frozen=True)
class Column:
    """A column: its heading, what it shows of a row, and the number it sorts by (None: text)."""

    heading: object
    show: Callable[[Row], object]
    value: Callable[[Row], float | None] | None = None


def text(heading: str, key: str) -> Column:
    """Return a column of texts."""
    return Column(heading, lambda row: row.get(key))


def figure(heading: str, key: str) -> Column:
    """Return a column of numbers."""
    return Column(heading, lambda row: number(row.get(key)), lambda row: row.get(key))


def table(rows: Sequence[Row], columns: Sequence[Column], caption: str | None = None) -> Html:
    """Return a sortable table in a frame that scrolls by itself on a narrow screen."""
    if not rows:
        return Html()
    head = tag("tr", *(
        tag("th", tag("button", one.heading, type="button"), scope="col", class_=_class(one))
        for one in columns
    ))  # fmt: skip
    body = join(tag("tr", *(_cell(one, row) for one in columns)) for row in rows)
    inner = [tag("caption", caption)] if caption else []
    return tag(
        "div",
        tag("table", *inner, tag("thead", head), tag("tbody", body), class_="sortable"),
        class_="wide",
    )


def _class(column: Column) -> str | None:
    return "number" if column.value is not None else None


def _cell(column: Column, row: Row) -> Html:
    value = column.value(row) if column.value is not None else None
    known = value is not None and math.isfinite(value)
    return tag(
        "td", column.show(row), class_=_class(column),
        data_value=repr(float(value)) if known and value is not None else None,
    )  # fmt: skip
