"""Upgrading an older campaign: a verified backup first, then one transaction."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from campaign.errors import refused
from campaign.ledger.backing import online_copy
from campaign.ledger.checking import check, damage
from campaign.ledger.database import REVISION, Database, find_campaign
from campaign.ledger.journal import writing
from campaign.ledger.starting import made_whole


@dataclass(frozen=True)
class Upgraded:
    """The schema before and after, and the backup made first (None: nothing to do)."""

    before: str
    after: str
    backup: Path | None


def upgrade(given: str | None, who: str | None = None) -> Upgraded:
    """Bring a campaign to this program's schema.

    The schema changes and the journal entry about them are one transaction: when anything
    fails, or the process dies, the campaign stands as it was, and the backup is there besides.
    Raises Refused for a campaign of a newer program, and where the upgraded campaign does not
    pass its check.
    """
    database, found = find_campaign(given)
    if found == REVISION:
        return Upgraded(found, found, None)
    kept = _backup(database, found)
    _migrate(database, found, who)
    return Upgraded(found, REVISION, kept)


def _backup(database: Database, found: str) -> Path | None:
    own = database.where.path
    if own is None:
        return None  # a server's administrator keeps its backups
    for number in range(1, 1000):
        target = own.with_name(f"{own.stem}-before-upgrade-from-{found}-{number}.sqlite")
        if not target.exists():
            with made_whole(target) as draft:
                online_copy(own, draft)
            return target
    raise refused(f"there are too many backups beside {own}; move some away", value=own)


def _migrate(database: Database, found: str, who: str | None) -> None:
    from campaign.ledger.migrating import migrate

    with writing(database, who=who) as pen:
        try:
            migrate(pen.connection)
        except Exception as error:
            raise refused(
                f"the upgrade from schema {found} failed and nothing was changed: {error}",
                value=found,
            ) from error
        grave = damage(check(pen.connection))
        if grave:
            raise refused(
                f"the upgrade from schema {found} was taken back: {grave[0].about}: "
                f"{grave[0].message}",
                value=found,
            )
        entry = pen.entry("upgrade", f"schema {found} to {REVISION}")
        entry.after["schema"] = REVISION
        entry.always = True
