"""The report: one page that needs nothing else, for a screen, a phone or paper."""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

from campaign.errors import refused
from campaign.present.numbers import share, significant, with_interval
from campaign.present.report.gathering import Content, gather
from campaign.present.report.markup import Html, join, listed, tag
from campaign.present.report.tables import Column, figure, table, text
from campaign.trends.reading import FilterSource

Row = Mapping[str, Any]

ENDINGS = (".html", ".htm")


def report_path(given: str) -> Path:
    """Return the path of a report; Refused for another ending or a missing folder."""
    path = Path(given)
    if path.suffix.lower() not in ENDINGS or path.is_dir():
        raise refused(
            f"a report is written to a file whose name ends in .html; '{given}' does not",
            value=given,
            expected="a name ending in .html",
        )
    if not path.resolve().parent.is_dir():
        raise refused(
            f"the report cannot be written: the folder {path.resolve().parent} does not exist",
            value=given,
            expected="a file in an existing folder",
        )
    return path


def write_report(
    path: Path,
    db: str | None,
    wanted: FilterSource | None = None,
    stated: Mapping[str, str] | None = None,
) -> Content:
    """Write the report on what a filter keeps, whole or not at all; return its content.

    Raises Refused where the campaign or the file cannot be had.
    """
    content = gather(db, wanted, stated)
    whole = page(content)
    draft = path.with_name(f".{path.name}.{os.getpid()}")
    try:
        draft.write_text(whole, encoding="utf-8")
        draft.replace(path)
    except OSError as error:
        draft.unlink(missing_ok=True)
        raise refused(
            f"the report cannot be written to {path}: {error.strerror or error}",
            value=path,
            expected="a file that can be written",
        ) from None
    return content


def page(content: Content) -> str:
    """Return the page as text."""
    from campaign.present.figures.style import styled
    from campaign.present.report.style import SCRIPT, STYLE, policy

    head = tag(
        "head",
        tag("meta", charset="utf-8"),
        Html(f'<meta http-equiv="Content-Security-Policy" content="{policy()}">'),
        tag("meta", name="viewport", content="width=device-width, initial-scale=1"),
        tag("title", "Campaign report"),
        tag("style", Html(STYLE)),
    )
    with styled():
        body = tag("body", *_sections(content), tag("script", Html(SCRIPT)))
    return f"<!doctype html>\n{tag('html', head, body, lang='en')}\n"


def _sections(content: Content) -> Iterable[Html]:
    from campaign.present.report.electrodes import electrode
    from campaign.present.report.figures import Figures

    rows = list(content.explanations.values())
    figures = Figures(content)
    anchors = {row["electrode"]: f"electrode-{i}" for i, row in enumerate(rows, 1)}
    yield _top(content)
    yield _contents(anchors)
    yield _part("summary", "Summary", _summary(rows, anchors),
                *([figures.candidates(rows), figures.budgets()] if rows else []))  # fmt: skip
    yield _part(
        "evidence", "Evidence",
        *(electrode(row, content.trends[name], figures, anchors[name])
          for name, row in content.explanations.items()),
    )  # fmt: skip
    yield _part("coverage", "Coverage", *(_coverage(row) for row in content.coverage))
    yield _part("next", "Next work", _next(content.proposals))
    yield _part("criteria", "Criteria", _criteria(content.criteria))
    yield _part("left-out", "Left out", _left_out(content))
    yield _part("electrolytes", "Electrolytes", _electrolytes(content.electrolytes))
    yield _part("cautions", "Cautions", tag("div", listed(content.cautions), class_="caution"))
    yield _part("journal", "Journal", _journal(content))


def _part(anchor: str, title: str, *parts: Html) -> Html:
    return tag("section", tag("h2", title, id=anchor), *parts)


def _top(content: Content) -> Html:
    n = content.counts
    counts = ", ".join(f"{count} {kind if count != 1 else kind[:-1]}" for kind, count in n.items())
    asked = ", ".join(
        f"--{name.replace('_', '-')} {value}" for name, value in content.stated.items()
    )
    head = content.head
    return tag(
        "header",
        tag("h1", "Campaign report"),
        tag("p", f"{counts}." + (f" Only {asked}." if asked else "")),
        tag(
            "p", f"{content.database}, written {content.written:%Y-%m-%d %H:%M} UTC",
            f", journal head: entry {head['entry']}" if head else "", ".", class_="quiet",
        ),
    )  # fmt: skip


def _contents(anchors: Mapping[str, str]) -> Html:
    names = ("Summary", "Evidence", "Coverage", "Next work", "Criteria", "Left out",
             "Electrolytes", "Cautions", "Journal")  # fmt: skip
    keys = ("summary", "evidence", "coverage", "next", "criteria", "left-out", "electrolytes",
            "cautions", "journal")  # fmt: skip
    links = [tag("a", name, href=f"#{key}") for name, key in zip(names, keys, strict=True)]
    links[2:2] = [tag("a", name, href=f"#{key}") for name, key in anchors.items()]
    return tag("nav", tag("ul", *(tag("li", link) for link in links)))


def _summary(rows: Sequence[Row], anchors: Mapping[str, str]) -> Html:
    if not rows:
        return tag("p", "There are no measurements.")
    return table(
        rows,
        (
            Column("electrode", lambda row: tag("a", row["electrode"],
                                                href=f"#{anchors[row['electrode']]}")),
            figure("specimens", "n_specimens"),
            figure("measurements", "n_measurements"),
            Column("dominant", lambda row: f"{row['dominant'] or '–'} {share(row['share'])}"),
            Column("order (interval)", lambda row: with_interval(
                row["diagnostics"]["concentration"].get("order"),
                row["diagnostics"]["concentration"].get("order_ci")),
                lambda row: row["diagnostics"]["concentration"].get("order")),
            Column("solvents", _factor, lambda row: row["diagnostics"]["solvent"].get("ratio")),
            Column("law in E", lambda row: row["diagnostics"]["potential"].get("law") or "–"),
            text("verdict", "text"),
            Column("strength", lambda row: row["strength"] or "–"),
        ),
    )  # fmt: skip


def _factor(row: Row) -> str:
    ratio = row["diagnostics"]["solvent"].get("ratio")
    return "–" if ratio is None else f"× {significant(max(ratio, 1 / ratio), 2)}"


def _coverage(row: Row) -> Html:
    missing = [
        f"{one['axis']} of {one['response']} ({one['decision']}): {one['text']}"
        for one in row["missing"]
        if one["text"]
    ]
    return join([
        tag("h3", row["electrode"]),
        tag("p", "Specimens / measurements; bold where levels are compared, all else equal.",
            class_="quiet"),
        *(_matrix(one) for one in row["matrices"]),
        listed(missing or ["nothing: every diagnostic of the dominant term is decided"], "Missing"),
    ])  # fmt: skip


def _matrix(one: Row) -> Html:
    head = tag("tr", tag("th", f"{one['row_axis']} \\ {one['column_axis']}"),
               *(tag("th", name, class_="number") for name in one["columns"]))  # fmt: skip
    body = []
    for i, name in enumerate(one["rows"]):
        cells = []
        for j in range(len(one["columns"])):
            specimens, readings = one["specimens"][i][j], one["measurements"][i][j]
            shown: object = f"{specimens} / {readings}" if readings else "·"
            if one["row_contrast"][i][j] or one["column_contrast"][i][j]:
                shown = tag("b", shown)
            cells.append(tag("td", shown, class_="number"))
        body.append(tag("tr", tag("th", name, scope="row"), *cells))
    return tag("div", tag("table", tag("thead", head), tag("tbody", *body)), class_="wide")


def _next(proposals: Sequence[Row]) -> Html:
    if not proposals:
        return tag("p", "Nothing is proposed: no open diagnostic could change a verdict.")
    rows = [{**one, "rank": rank} for rank, one in enumerate(proposals, 1)]
    whole = table(
        rows,
        (figure("rank", "rank"), text("electrode", "electrode"), text("diagnostic", "axis"),
         text("of", "response"), figure("cells", "specimens"), figure("bench hours", "hours"),
         Column("chance to decide", lambda row: share(row.get("chance")),
                lambda row: row.get("chance")),
         text("work", "why")),
    )  # fmt: skip
    cautions = list(dict.fromkeys(text for one in proposals for text in one["cautions"]))
    return join([whole, tag("div", tag("b", "Before building any of it"), listed(cautions),
                            class_="caution") if cautions else Html()])  # fmt: skip


def _criteria(criteria: Row) -> Html:
    from campaign.present.criteria import WORDING

    rows = [
        {"name": WORDING.get(key, (key, ""))[0], "unit": WORDING.get(key, ("", ""))[1], "value": v}
        for key, v in criteria.items()
    ]
    return table(
        rows,
        (text("criterion", "name"),
         Column("value", lambda row: f"{row['value']:g}{row['unit']}", lambda row: row["value"])),
    )  # fmt: skip


def _left_out(content: Content) -> Html:
    said = [f"{count} measurements: {reason}" for reason, count in content.left_out.items()]
    said += [f"only {name} {value} was looked at" for name, value in content.stated.items()]
    return join([
        listed(said) or tag("p", "Nothing was left out of what is in force."),
        tag("p", "What single trends leave out stands with each electrode.", class_="quiet"),
    ])  # fmt: skip


def _electrolytes(rows: Sequence[Row]) -> Html:
    return table(
        rows,
        (text("electrolyte", "electrolyte"), text("salt", "salt"), text("solvents", "solvents"),
         text("additives", "additives"), figure("cells", "cells")),
    )  # fmt: skip


def _journal(content: Content) -> Html:
    head = content.head
    if head is None:
        return tag("p", "The journal is empty.")
    return join([
        tag("p", f"Head: entry {head['entry']} of {head['at']}, hash ", tag("code", head["hash"])),
        tag("p", f"'campaign check --head {head['hash'][:16]}' finds whether anything before it "
            f"was changed or cut off. Times without offset were read in {content.zone}.",
            class_="quiet"),
    ])  # fmt: skip
