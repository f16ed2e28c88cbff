"""The rules the database keeps by itself, written for SQLite and for PostgreSQL.

A migration calls these with the columns of its own revision; they hold no table of their
own, so that an old revision keeps making what it made.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

LARGEST = "1.7976931348623157e308"  # the largest finite double: excludes infinity (and NaN)


@dataclass(frozen=True)
class Ledgered:
    """A table of rows that are made by one journal entry and ended by another.

    name: table; columns: all but `ended_by`; identity: True where rows have id and record;
    unique: column sets that only one unended row may carry; links: column -> table whose
    record must be in force when the row is made.
    """

    name: str
    columns: Sequence[str]
    identity: bool
    unique: Sequence[Sequence[str]] = ()
    links: Sequence[tuple[str, str]] = ()
    key: Sequence[str] = ("id",)


def quote(name: str) -> str:
    """Return an identifier as both dialects read it."""
    return f'"{name}"'


def finite_above(column: str, bound: str = "0", *, inclusive: bool = False) -> str:
    """Return a check that a column is empty or finite and above a bound."""
    sign = ">=" if inclusive else ">"
    return f"{quote(column)} {sign} {bound} AND {quote(column)} <= {LARGEST}"


def finite(column: str) -> str:
    """Return a check that a column is empty or finite."""
    return f"{quote(column)} >= -{LARGEST} AND {quote(column)} <= {LARGEST}"


def within(column: str, low: str, high: str) -> str:
    """Return a check that a column is empty or between two bounds, both included."""
    return f"{quote(column)} >= {low} AND {quote(column)} <= {high}"


def said(column: str) -> str:
    """Return a check that a text is empty (null) or says something."""
    return f"length(trim({quote(column)})) > 0"


def instant(column: str) -> str:
    """Return a check of the fixed-width UTC form, whose text order is time order."""
    return f"{quote(column)} LIKE '____-__-__T__:__:__.______Z'"


def _same(new: str, old: str, columns: Iterable[str]) -> str:
    return " AND ".join(f"{new}.{quote(c)} IS {old}.{quote(c)}" for c in columns)


def _refuse(when: str, message: str) -> str:
    return f"SELECT RAISE(ABORT, '{message}') WHERE {when};"


def sqlite_rules(table: Ledgered) -> list[str]:
    """Return the triggers and indices of one table for SQLite."""
    name = table.name
    latest = "(SELECT max(id) FROM journal)"
    checks = [
        _refuse(
            f"NEW.entry IS NOT {latest}",
            f"{name}: a row is made by the latest journal entry only",
        ),
        _refuse("NEW.ended_by IS NOT NULL", f"{name}: a row is not born ended"),
        # INSERT OR REPLACE would delete a row without asking the DELETE trigger.
        _refuse(
            f"EXISTS (SELECT 1 FROM {quote(name)} WHERE "
            + " AND ".join(f"{quote(c)} = NEW.{quote(c)}" for c in table.key)
            + ")",
            f"{name}: that row exists already and rows are never replaced",
        ),
    ]
    if table.identity:
        checks.append(
            _refuse(
                f"NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM {quote(name)} "
                "WHERE id = NEW.record AND record = NEW.record)",
                f"{name}: a record number is the id of the first row of that record",
            )
        )
    uniques = [*table.unique, *([("record",)] if table.identity else [])]
    for columns in uniques:
        same = " AND ".join(f"{quote(c)} = NEW.{quote(c)}" for c in columns)
        checks.append(
            _refuse(
                f"EXISTS (SELECT 1 FROM {quote(name)} WHERE {same} AND ended_by IS NULL)",
                f"{name}: only one row in force may carry the same {' and '.join(columns)}",
            )
        )
    for column, target in table.links:
        checks.append(
            _refuse(
                f"NEW.{quote(column)} IS NOT NULL AND NOT EXISTS (SELECT 1 FROM {quote(target)} "
                f"WHERE record = NEW.{quote(column)} AND ended_by IS NULL)",
                f"{name}: the {target} it belongs to is not in force",
            )
        )
    unchanged = _same("NEW", "OLD", table.columns)
    return [
        f"CREATE TRIGGER {name}_made BEFORE INSERT ON {quote(name)} BEGIN\n"
        + "\n".join(checks)
        + "\nEND",
        f"CREATE TRIGGER {name}_kept BEFORE UPDATE ON {quote(name)} "
        f"WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS {latest} "
        f"AND NEW.ended_by > OLD.entry AND {unchanged}) BEGIN\n"
        + _refuse("1", f"{name}: rows are append-only; a row can be ended once and nothing else")
        + "\nEND",
        f"CREATE TRIGGER {name}_never_deleted BEFORE DELETE ON {quote(name)} BEGIN\n"
        + _refuse("1", f"{name}: rows are never deleted; withdraw instead")
        + "\nEND",
        *_indices(name, uniques),
    ]


def _indices(name: str, uniques: Sequence[Sequence[str]]) -> list[str]:
    return [
        f"CREATE UNIQUE INDEX {name}_one_{'_'.join(columns).lower()} ON {quote(name)} "
        f"({', '.join(quote(c) for c in columns)}) WHERE ended_by IS NULL"
        for columns in uniques
    ]


SQLITE_JOURNAL = [
    "CREATE TRIGGER journal_chained BEFORE INSERT ON journal BEGIN\n"
    + _refuse(
        "NEW.id IS NOT (SELECT coalesce(max(id), 0) + 1 FROM journal)",
        "journal: entries are numbered without a gap",
    )
    + "\n"
    + _refuse(
        "NEW.previous IS NOT coalesce((SELECT hash FROM journal ORDER BY id DESC LIMIT 1), "
        "'0000000000000000000000000000000000000000000000000000000000000000')",
        "journal: an entry carries the hash of the one before it",
    )
    + "\nEND",
    "CREATE TRIGGER journal_kept BEFORE UPDATE ON journal BEGIN\n"
    + _refuse("1", "journal: entries are never changed")
    + "\nEND",
    "CREATE TRIGGER journal_never_deleted BEFORE DELETE ON journal BEGIN\n"
    + _refuse("1", "journal: entries are never deleted")
    + "\nEND",
]


POSTGRES_FUNCTIONS = [
    """
CREATE FUNCTION campaign_refuse() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION '%: rows are append-only and never deleted; withdraw instead', TG_TABLE_NAME;
END $$
""",
    """
CREATE FUNCTION campaign_made() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  latest integer;
BEGIN
  SELECT max(id) INTO latest FROM journal;
  IF NEW.entry IS DISTINCT FROM latest THEN
    RAISE EXCEPTION '%: a row is made by the latest journal entry only', TG_TABLE_NAME;
  END IF;
  IF NEW.ended_by IS NOT NULL THEN
    RAISE EXCEPTION '%: a row is not born ended', TG_TABLE_NAME;
  END IF;
  RETURN NEW;
END $$
""",
    """
CREATE FUNCTION campaign_kept() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF OLD.ended_by IS NULL
     AND NEW.ended_by IS NOT DISTINCT FROM (SELECT max(id) FROM journal)
     AND NEW.ended_by > OLD.entry
     AND to_jsonb(NEW) - 'ended_by' = to_jsonb(OLD) - 'ended_by' THEN
    RETURN NEW;
  END IF;
  RAISE EXCEPTION '%: rows are append-only; a row can be ended once and nothing else',
    TG_TABLE_NAME;
END $$
""",
    """
CREATE FUNCTION campaign_linked() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  found boolean;
  target integer;
BEGIN
  EXECUTE format('SELECT ($1).%I', TG_ARGV[0]) INTO target USING NEW;
  IF target IS NULL THEN
    RETURN NEW;
  END IF;
  EXECUTE format('SELECT EXISTS (SELECT 1 FROM %I WHERE record = $1 AND ended_by IS NULL)',
                 TG_ARGV[1]) INTO found USING target;
  IF NOT found THEN
    RAISE EXCEPTION '%: the % it belongs to is not in force', TG_TABLE_NAME, TG_ARGV[1];
  END IF;
  RETURN NEW;
END $$
""",
    """
CREATE FUNCTION campaign_first_row() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  found boolean;
BEGIN
  IF NEW.record = NEW.id THEN
    RETURN NEW;
  END IF;
  EXECUTE format('SELECT EXISTS (SELECT 1 FROM %I WHERE id = $1 AND record = $1)',
                 TG_TABLE_NAME) INTO found USING NEW.record;
  IF NOT found THEN
    RAISE EXCEPTION '%: a record number is the id of the first row of that record',
      TG_TABLE_NAME;
  END IF;
  RETURN NEW;
END $$
""",
    """
CREATE FUNCTION campaign_journal_chained() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF NEW.id IS DISTINCT FROM (SELECT coalesce(max(id), 0) + 1 FROM journal) THEN
    RAISE EXCEPTION 'journal: entries are numbered without a gap';
  END IF;
  IF NEW.previous IS DISTINCT FROM coalesce(
       (SELECT hash FROM journal ORDER BY id DESC LIMIT 1), repeat('0', 64)) THEN
    RAISE EXCEPTION 'journal: an entry carries the hash of the one before it';
  END IF;
  RETURN NEW;
END $$
""",
]

POSTGRES_JOURNAL = [
    "CREATE TRIGGER journal_chained BEFORE INSERT ON journal FOR EACH ROW "
    "EXECUTE FUNCTION campaign_journal_chained()",
    "CREATE TRIGGER journal_kept BEFORE UPDATE OR DELETE ON journal FOR EACH ROW "
    "EXECUTE FUNCTION campaign_refuse()",
    "CREATE TRIGGER journal_never_emptied BEFORE TRUNCATE ON journal "
    "EXECUTE FUNCTION campaign_refuse()",
]


def postgres_rules(table: Ledgered) -> list[str]:
    """Return the triggers and indices of one table for PostgreSQL."""
    name = table.name
    uniques = [*table.unique, *([("record",)] if table.identity else [])]
    statements = [
        f"CREATE TRIGGER {name}_made BEFORE INSERT ON {quote(name)} FOR EACH ROW "
        "EXECUTE FUNCTION campaign_made()",
        f"CREATE TRIGGER {name}_kept BEFORE UPDATE ON {quote(name)} FOR EACH ROW "
        "EXECUTE FUNCTION campaign_kept()",
        f"CREATE TRIGGER {name}_never_deleted BEFORE DELETE ON {quote(name)} FOR EACH ROW "
        "EXECUTE FUNCTION campaign_refuse()",
        f"CREATE TRIGGER {name}_never_emptied BEFORE TRUNCATE ON {quote(name)} "
        "EXECUTE FUNCTION campaign_refuse()",
    ]
    if table.identity:
        statements.append(
            f"CREATE TRIGGER {name}_record BEFORE INSERT ON {quote(name)} FOR EACH ROW "
            "EXECUTE FUNCTION campaign_first_row()"
        )
    statements += [
        f"CREATE TRIGGER {name}_linked_{column.lower()} BEFORE INSERT ON {quote(name)} "
        f"FOR EACH ROW EXECUTE FUNCTION campaign_linked('{column}', '{target}')"
        for column, target in table.links
    ]
    return statements + _indices(name, uniques)
