"""The command line: every command in a module of its own, refusals shown in one place."""

from __future__ import annotations

import os
import sys

import typer

from campaign.cli import (
    add,
    amend,
    backup,
    check,
    copy,
    coverage,
    criteria,
    demo,
    explain,
    export,
    history,
    imports,
    init,
    listing,
    log,
    next,
    report,
    show,
    summary,
    template,
    timeline,
    trend,
    upgrade,
    watch,
    withdraw,
)
from campaign.cli.grouping import Grouped
from campaign.errors import Fault, Refused, refused
from campaign.present.terminal import guard_streams

WRONG_USAGE = 2
AS_JSON = "--json"

app = typer.Typer(
    name="campaign",
    cls=Grouped,
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


START, RECORD, CORRECT, ASK, ANSWER, HAND, KEEP = (
    "Start",
    "Record",
    "Correct",
    "Look up",
    "Read the answer",
    "Hand over",
    "Keep safe",
)

app.command("init", rich_help_panel=START)(init.init)
app.command("demo", rich_help_panel=START)(demo.demo)
app.command("template", rich_help_panel=START)(template.template)
app.add_typer(add.app, name="add", rich_help_panel=RECORD)
app.command("log", rich_help_panel=RECORD)(log.log)
app.command("import", rich_help_panel=RECORD)(imports.import_tables)
app.command("watch", rich_help_panel=RECORD)(watch.watch)
app.command("amend", rich_help_panel=CORRECT)(amend.amend)
app.command("withdraw", rich_help_panel=CORRECT)(withdraw.withdraw)
app.command("criteria", rich_help_panel=CORRECT)(criteria.criteria)
app.command("list", rich_help_panel=ASK)(listing.list_records)
app.command("show", rich_help_panel=ASK)(show.show)
app.command("history", rich_help_panel=ASK)(history.history)
app.command("check", rich_help_panel=ASK)(check.check)
app.command("backup", rich_help_panel=KEEP)(backup.backup)
app.command("copy", rich_help_panel=KEEP)(copy.copy)
app.command("upgrade", rich_help_panel=KEEP)(upgrade.upgrade)
app.command("trend", rich_help_panel=ANSWER)(trend.trend)
app.command("summary", rich_help_panel=ANSWER)(summary.summary)
app.command("explain", rich_help_panel=ANSWER)(explain.explain)
app.command("timeline", rich_help_panel=ANSWER)(timeline.timeline)
app.command("coverage", rich_help_panel=ANSWER)(coverage.coverage)
app.command("next", rich_help_panel=ANSWER)(next.next_steps)
app.command("report", rich_help_panel=HAND)(report.report)
app.command("export", rich_help_panel=HAND)(export.export)


def main() -> None:
    """Run the command line; exit 0 done, 1 refused (nothing written), 2 wrong usage."""
    guard_streams()
    try:
        _run()
    except BrokenPipeError:
        # The reader (head, less) has left; say nothing and leave no second error behind.
        _silence_output()
        sys.exit(0)
    except OSError as error:
        _silence_output()
        where = f"{error.filename}: " if error.filename else ""
        _refuse(refused(f"{where}{error.strerror or error}", value=error.filename))


def _run() -> None:
    try:
        app(prog_name="campaign")
    except Refused as error:
        _refuse(error)
    except SystemExit as stop:
        sys.stdout.flush()
        if stop.code == WRONG_USAGE and AS_JSON in sys.argv:
            _show_usage_as_json(stop.__context__)
        raise


def _refuse(error: Refused) -> None:
    from campaign.present.refusals import show_refusal

    show_refusal(error, as_json=AS_JSON in sys.argv)
    sys.exit(1)


def _show_usage_as_json(cause: BaseException | None) -> None:
    """Print as JSON, too, what Typer has said about the command line on standard error."""
    from campaign.present.tables import show_json

    say = getattr(cause, "format_message", None)
    message = say() if say else "the command line is not understood"
    fault = Fault(message, expected="what 'campaign COMMAND --help' shows")
    show_json({"errors": [fault.as_dict()]})


def _silence_output() -> None:
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


if __name__ == "__main__":
    main()
