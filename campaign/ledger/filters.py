"""What a query is asked to look at."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import TYPE_CHECKING, Any

from campaign.errors import RecipeError, refused

if TYPE_CHECKING:
    from sqlalchemy import Connection


@dataclass(frozen=True)
class Range:
    """A closed range; an open end is infinite."""

    low: float
    high: float


@dataclass(frozen=True)
class Filter:
    """Conditions of a query; None or '' asks for everything.

    salt, solvents, additives: canonical keys. potential [V] as measured, temperature [degC].
    since, until: UTC instants of the measurement in the fixed-width form. as_of: the number of
    a journal entry, the state after which is meant.
    """

    electrode: str | None = None
    salt: str | None = None
    solvents: str | None = None
    additives: str | None = None
    potential: Range | None = None
    temperature: Range | None = None
    since: str | None = None
    until: str | None = None
    as_of: int | None = None

    def stated(self) -> dict[str, Any]:
        """Return the conditions that are set, by name."""
        return {
            item.name: getattr(self, item.name)
            for item in fields(self)
            if getattr(self, item.name) is not None
        }


def read_range(text: str, name: str) -> Range:
    """Return the range a user wrote as LOW:HIGH, either end left out for open.

    Raises Refused for anything else.
    """
    parts = text.split(":")
    try:
        if len(parts) != 2 or not (parts[0].strip() or parts[1].strip()):
            raise ValueError
        low = float(parts[0]) if parts[0].strip() else float("-inf")
        high = float(parts[1]) if parts[1].strip() else float("inf")
    except ValueError:
        raise _bad_range(text, name) from None
    if not low <= high:
        raise _bad_range(text, name)
    return Range(low, high)


def _bad_range(text: str, name: str) -> Exception:
    return refused(
        f"--{name} is '{text}', which is not a range; write LOW:HIGH such as 3.2:3.6, with "
        "either end left out for open",
        column=name,
        value=text,
        expected="LOW:HIGH",
    )


def read_filter(
    connection: Connection,
    *,
    electrode: str | None = None,
    salt: str | None = None,
    solvents: str | None = None,
    additives: str | None = None,
    potential: str | None = None,
    temperature: str | None = None,
    since: str | None = None,
    until: str | None = None,
    as_of: str | None = None,
) -> Filter:
    """Return the filter for the texts of a query's options.

    Raises Refused for an unknown electrode (with near labels), an unreadable recipe part,
    range or date.
    """
    from campaign.ledger.selecting import entry_at, require_electrode

    if electrode is not None and as_of is None:
        require_electrode(connection, electrode)
    day_end = _day_end(connection, as_of, "as-of") if as_of is not None else None
    return Filter(
        electrode=electrode,
        salt=_key(salt, "salt"),
        solvents=_key(solvents, "solvents"),
        additives=_key(additives, "additives"),
        potential=None if potential is None else read_range(potential, "potential"),
        temperature=None if temperature is None else read_range(temperature, "temperature"),
        since=None if since is None else _instant(connection, since, "since"),
        until=None if until is None else _day_end(connection, until, "until"),
        as_of=None if day_end is None else entry_at(connection, day_end),
    )


def _key(text: str | None, name: str) -> str | None:
    if text is None:
        return None
    from campaign.chemistry.recipes import additive_key_of, salt_key_of, solvent_key_of

    canonical = {"salt": salt_key_of, "solvents": solvent_key_of, "additives": additive_key_of}
    try:
        return canonical[name](text)
    except RecipeError as error:
        raise refused(
            f"--{name} is '{text}': {error}", column=name, value=text, expected=error.expected
        ) from None


def _instant(connection: Connection, text: str, name: str, *, day_end: bool = False) -> str:
    """Return the instant an option states; of a day its start, or its last microsecond."""
    from campaign.ledger.instants import InstantError, format_utc, parse_instant
    from campaign.ledger.settings import zone

    try:
        own_zone = zone(connection)
        instant = parse_instant(text, own_zone)
        if day_end and instant.date_only:
            # Asked for again at its end: a day with a clock change has 23 or 25 hours.
            instant = parse_instant(f"{text.strip()}T23:59:59.999999", own_zone)
        return format_utc(instant.utc)
    except InstantError as error:
        raise refused(
            f"--{name} is '{text}': {error}", column=name, value=text, expected=error.expected
        ) from None


def _day_end(connection: Connection, text: str, name: str) -> str:
    """Return the last instant of a day in the campaign's zone, or the instant itself."""
    return _instant(connection, text, name, day_end=True)
