"""campaign coverage"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import Asked, query


@query
def coverage(
    asked: Asked,
    every: Annotated[
        bool, typer.Option("--every", help="Matrices of every pair of axes.")
    ] = False,
) -> None:
    """Show what has been covered of each electrode, and what is missing.

    Example: campaign coverage --electrode "NVP film A"
    """
    from campaign.diagnosis.coverage import covered
    from campaign.present.coverage import show_coverage

    found = covered(asked.db, asked.filter, asked.electrode, every)
    show_coverage(found, as_json=asked.json, as_csv=asked.csv, stated=asked.stated())
