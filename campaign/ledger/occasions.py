"""On which occasions the measurements of a campaign were entered, and when that was."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING, Any
from zoneinfo import ZoneInfo

from sqlalchemy import and_, func, select

from campaign.ledger import schema
from campaign.ledger.settings import in_force, zone

if TYPE_CHECKING:
    from sqlalchemy import Connection


@dataclass(frozen=True)
class Bulk:
    """The imports of one local day that entered most measurements: `count` of `total`."""

    day: str
    count: int
    total: int

    @property
    def over_half(self) -> bool:
        """Return whether they entered more than half of all measurements."""
        return 2 * self.count > self.total


def largest_import(connection: Connection, as_of: int | None = None) -> Bulk:
    """Return the largest import; tables imported on one day of the campaign's zone count as one.

    Counted are the measurements in force, each by the entry that first made it.
    """
    m, journal = schema.measurement, schema.journal
    first = m.alias("first")
    rows = connection.execute(
        select(journal.c.at, journal.c.action, func.count())
        .select_from(
            m.join(first, first.c.id == m.c.record).join(journal, journal.c.id == first.c.entry)
        )
        .where(in_force(m, as_of))
        .group_by(journal.c.at, journal.c.action)
    ).all()
    place = ZoneInfo(zone(connection))
    days: Counter[str] = Counter()
    for at, action, count in rows:
        if action == "import":
            days[datetime.fromisoformat(at).astimezone(place).date().isoformat()] += count
    day, count = days.most_common(1)[0] if days else ("", 0)
    return Bulk(day, count, sum(row[2] for row in rows))


def logged_from(connection: Connection, as_of: int | None = None) -> tuple[str, str] | None:
    """Return when the first measurement was entered and when the journal was last written.

    Both as UTC texts, up to an entry; None where no measurement was entered.
    """
    m, journal = schema.measurement, schema.journal
    upto: Any = journal.c.id <= as_of if as_of is not None else journal.c.id.is_not(None)
    first = connection.execute(
        select(func.min(journal.c.at))
        .select_from(m.join(journal, journal.c.id == m.c.entry))
        .where(upto)
    ).scalar()
    last = connection.execute(select(func.max(journal.c.at)).where(and_(upto))).scalar()
    return None if first is None else (str(first), str(last))
