"""Saying which option left nothing over."""

from __future__ import annotations

from collections.abc import Sized

from campaign.cli.options import Asked


def tell_if_empty(rows: Sized, asked: Asked) -> None:
    """Say on standard error which condition emptied a result, where one did."""
    if len(rows) or not asked.stated():
        return
    from campaign.ledger.database import open_database
    from campaign.ledger.emptying import emptied
    from campaign.present.emptiness import show_emptied

    with open_database(asked.db).reading() as connection:
        found = emptied(connection, asked.filter(connection))
    show_emptied(found, asked.stated())
