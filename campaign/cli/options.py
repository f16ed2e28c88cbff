"""Options that several commands share, so that they read the same everywhere."""

from __future__ import annotations

import inspect
import sys
from collections.abc import Callable
from dataclasses import dataclass, fields
from typing import TYPE_CHECKING, Annotated, Any, get_type_hints

import typer

from campaign.cli import completing

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from campaign.ledger.filters import Filter

Db = Annotated[
    str | None,
    typer.Option(
        "--db",
        metavar="PATH-or-URL",
        help="The campaign's database; else CAMPAIGN_DB, else campaign.sqlite here.",
    ),
]
Json = Annotated[bool, typer.Option("--json", help="JSON on standard output.")]
Csv = Annotated[bool, typer.Option("--csv", help="CSV on standard output.")]
By = Annotated[
    str | None,
    typer.Option("--by", metavar="NAME", help="Who makes the entry; else CAMPAIGN_USER."),
]
Reason = Annotated[
    str | None,
    typer.Option("--reason", metavar="TEXT", help="Why; kept in the journal."),
]
Electrode = Annotated[
    str | None,
    typer.Option(
        "--electrode", metavar="LABEL", help="This electrode only.",
        autocompletion=completing.of("electrode"),
    ),
]
Salt = Annotated[
    str | None,
    typer.Option(
        "--salt", metavar="SALT", help="This salt only, such as NaPF6.",
        autocompletion=completing.of("salt"),
    ),
]
Solvents = Annotated[
    str | None,
    typer.Option(
        "--solvents", metavar="BLEND", help='This blend only, such as "EC:DMC 1:1".',
        autocompletion=completing.of("solvents"),
    ),
]
Additives = Annotated[
    str | None,
    typer.Option(
        "--additives", metavar="TEXT", help='This additive only, such as "2 wt% FEC".',
        autocompletion=completing.of("additives"),
    ),
]
Potential = Annotated[
    str | None,
    typer.Option("--potential", metavar="LO:HI", help="Potentials as measured, in V."),
]
Temperature = Annotated[
    str | None,
    typer.Option("--temperature", metavar="LO:HI", help="Temperatures in degrees Celsius."),
]
Since = Annotated[
    str | None,
    typer.Option("--since", metavar="DATE", help="Measured on or after."),
]
Until = Annotated[
    str | None,
    typer.Option("--until", metavar="DATE", help="Measured up to the end of that day."),
]
AsOf = Annotated[
    str | None,
    typer.Option("--as-of", metavar="DATE", help="As logged by the end of that day."),
]


def stated_reason(given: str | None) -> str | None:
    """Return the reason of a correction; asked for at a terminal where none was given."""
    from campaign.ledger.fields import clean_text

    if given is None and sys.stdin.isatty():
        given = typer.prompt("reason (kept in the journal)", default="", show_default=False)
    return clean_text(given, "reason") if given and given.strip() else None


@dataclass(frozen=True)
class Asked:
    """What every query command takes: where the campaign is, what to look at, in which form."""

    db: Db = None
    electrode: Electrode = None
    salt: Salt = None
    solvents: Solvents = None
    additives: Additives = None
    potential: Potential = None
    temperature: Temperature = None
    since: Since = None
    until: Until = None
    as_of: AsOf = None
    json: Json = False
    csv: Csv = False

    def filter(self, connection: Connection) -> Filter:
        """Return the conditions in the ledger's terms; Refused for what cannot be read."""
        from campaign.ledger.filters import read_filter

        return read_filter(connection, **self.stated())

    def stated(self) -> dict[str, str]:
        """Return the conditions that were given, by option."""
        own = {"db", "json", "csv"}
        given = {f.name: getattr(self, f.name) for f in fields(self) if f.name not in own}
        return {name: text for name, text in given.items() if text is not None}


def query(command: Callable[..., None]) -> Callable[..., None]:
    """Give a command the shared options of a query; it receives them as `asked`."""
    hints = get_type_hints(command, include_extras=True)
    own = [p for p in inspect.signature(command).parameters.values() if p.name != "asked"]
    shared_hints = get_type_hints(Asked, include_extras=True)
    shared = [
        inspect.Parameter(
            f.name, inspect.Parameter.KEYWORD_ONLY, default=f.default, annotation=f.name
        )
        for f in fields(Asked)
    ]

    def run(**given: Any) -> None:
        asked = Asked(**{f.name: given.pop(f.name) for f in fields(Asked)})
        command(asked=asked, **given)

    annotations = {
        **{p.name: hints[p.name] for p in own},
        **{f.name: shared_hints[f.name] for f in fields(Asked)},
    }
    run.__name__, run.__doc__ = command.__name__, command.__doc__
    run.__annotations__ = {**annotations, "return": None}
    run.__signature__ = inspect.Signature(  # type: ignore[attr-defined]
        [
            p.replace(annotation=annotations[p.name], kind=inspect.Parameter.KEYWORD_ONLY)
            for p in (*own, *shared)
        ]
    )
    return run
