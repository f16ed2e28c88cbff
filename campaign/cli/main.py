"""The command line: every command in a module of its own, refusals shown in one place."""

from __future__ import annotations

import os
import sys

import typer

from campaign.cli import (
    add,
    amend,
    check,
    demo,
    explain,
    history,
    imports,
    init,
    listing,
    log,
    show,
    summary,
    template,
    trend,
    withdraw,
)
from campaign.errors import Refused

app = typer.Typer(
    name="campaign",
    help="A ledger of an electrode test campaign that names the rate-limiting step.",
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
    no_args_is_help=True,
    add_completion=True,
    context_settings={"help_option_names": ["-h", "--help"]},
)


@app.callback()
def _campaign(
    db: str = typer.Option(
        "", "--db", metavar="PATH-or-URL", help="The campaign's database; also after a command."
    ),
) -> None:
    if db:
        os.environ["CAMPAIGN_DB"] = db


START, RECORD, CORRECT, ASK, ANSWER = (
    "Start",
    "Record",
    "Correct",
    "Look up",
    "Read the answer",
)

app.command("init", rich_help_panel=START)(init.init)
app.command("demo", rich_help_panel=START)(demo.demo)
app.command("template", rich_help_panel=START)(template.template)
app.add_typer(add.app, name="add", rich_help_panel=RECORD)
app.command("log", rich_help_panel=RECORD)(log.log)
app.command("import", rich_help_panel=RECORD)(imports.import_tables)
app.command("amend", rich_help_panel=CORRECT)(amend.amend)
app.command("withdraw", rich_help_panel=CORRECT)(withdraw.withdraw)
app.command("list", rich_help_panel=ASK)(listing.list_records)
app.command("show", rich_help_panel=ASK)(show.show)
app.command("history", rich_help_panel=ASK)(history.history)
app.command("check", rich_help_panel=ASK)(check.check)
app.command("trend", rich_help_panel=ANSWER)(trend.trend)
app.command("summary", rich_help_panel=ANSWER)(summary.summary)
app.command("explain", rich_help_panel=ANSWER)(explain.explain)


def main() -> None:
    """Run the command line; exit 0 done, 1 refused (nothing written), 2 wrong usage."""
    try:
        app(prog_name="campaign")
    except Refused as error:
        from campaign.present.refusals import show_refusal

        show_refusal(error, as_json="--json" in sys.argv)
        sys.exit(1)
    except BrokenPipeError:
        # The reader (head, less) has left; say nothing and leave no second error behind.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        sys.exit(0)


if __name__ == "__main__":
    main()
