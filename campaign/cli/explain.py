"""campaign explain"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import Asked, query


@query
def explain(
    label: Annotated[str, typer.Argument(metavar="ELECTRODE", help="Its label.")],
    asked: Asked,
) -> None:
    """Show what stands for and against each candidate step of one electrode.

    Example: campaign explain "NVP film A"
    """
    from campaign.diagnosis.reading import explained
    from campaign.present.explaining import show_explanation

    show_explanation(explained(label, asked.db, asked.filter), as_json=asked.json)
