"""campaign upgrade"""

from __future__ import annotations

from campaign.cli.options import By, Db, Json


def upgrade(db: Db = None, by: By = None, json: Json = False) -> None:
    """Bring a campaign made by an older version to this one; a backup is made first.

    Example: campaign upgrade
    """
    from campaign.ledger.upgrading import upgrade as bring_up
    from campaign.present.copies import show_upgraded

    show_upgraded(bring_up(db, by), as_json=json)
