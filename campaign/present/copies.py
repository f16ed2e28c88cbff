"""What a backup, a copy or an upgrade did."""

from __future__ import annotations

from campaign.ledger.copying import Copied
from campaign.ledger.upgrading import Upgraded
from campaign.present.tables import show_json


def show_copied(word: str, made: Copied, *, as_json: bool) -> None:
    """Print where a copy is and the hash its journal ends in."""
    if as_json:
        show_json(
            {
                "database": made.where.shown,
                "entries": made.entries,
                "rows": made.rows,
                "head": made.head,
            }
        )
        return
    held = f"{made.entries} journal entries, {made.rows} rows"
    print(f"{word} at {made.where.shown}: {held}, checked.")
    print(f"Journal head: {made.head}")


def show_upgraded(made: Upgraded, *, as_json: bool) -> None:
    """Print the schema before and after, and where the backup is."""
    if as_json:
        backup = str(made.backup) if made.backup else None
        show_json({"before": made.before, "after": made.after, "backup": backup})
    elif made.before == made.after:
        print(f"The campaign is of this version already (schema {made.after}).")
    else:
        kept = f"; the campaign as it was is in {made.backup}" if made.backup else ""
        print(f"Upgraded from schema {made.before} to {made.after}{kept}.")
