"""campaign summary"""

from __future__ import annotations

from campaign.cli.options import Asked, query


@query
def summary(asked: Asked) -> None:
    """Print the rate-limiting-step table: one row an electrode.

    Example: campaign summary --temperature 20:30
    """
    from campaign.diagnosis.reading import summarise
    from campaign.present.summary import show_summary

    found = summarise(asked.db, asked.filter)
    show_summary(found, as_json=asked.json, as_csv=asked.csv, stated=asked.stated())
