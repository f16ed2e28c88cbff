"""campaign report"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import Asked, query


@query
def report(
    file: Annotated[str, typer.Argument(metavar="FILE.html", help="Where to write the page.")],
    asked: Asked,
) -> None:
    """Write everything on one page: verdicts, evidence, figures, coverage, next work.

    Example: campaign report campaign.html
    """
    from campaign.present.report.page import report_path, write_report

    path = report_path(file)
    content = write_report(path, asked.db, asked.filter, asked.stated())
    if asked.json:
        from campaign.present.tables import show_json

        show_json({"file": str(path), "head": content.head, **content.counts})
        return
    print(f"Report: {path}, {content.counts['measurements']} measurements", end="")
    print(f", journal head entry {content.head['entry']}." if content.head else ".")
