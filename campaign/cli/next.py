"""campaign next"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import Asked, By, Reason, query


@query
def next_steps(
    asked: Asked,
    hours: Annotated[
        float | None, typer.Option("--hours", metavar="H", help="Best set inside these hours.")
    ] = None,
    axis: Annotated[
        str | None, typer.Option("--axis", metavar="AXIS", help="This diagnostic only.")
    ] = None,
    chance: Annotated[
        float, typer.Option("--chance", metavar="P", help="Chance of a decision to reach.")
    ] = 0.8,
    sheet: Annotated[
        str | None,
        typer.Option("--sheet", metavar="FILE.csv", help="Write a run sheet to a new file."),
    ] = None,
    line: Annotated[
        int | None,
        typer.Option("--line", metavar="N", help="The line the sheet is of (else 1; all with "
                     "--hours)."),
    ] = None,
    seed: Annotated[
        int, typer.Option("--seed", metavar="N", help="Seed of chances and of the run order.")
    ] = 1,
    cost: Annotated[
        list[str] | None,
        typer.Option("--cost", metavar="NAME=HOURS", help="Set a cost first; needs --reason; "
                     "build_cell, prepare_electrolyte, change_temperature, settle_potential, "
                     "measure."),
    ] = None,
    reason: Reason = None,
    by: By = None,
) -> None:  # fmt: skip
    """Propose the least bench work that settles what is open.

    Example: campaign next --electrode "NVP film A" --hours 40
    """
    from campaign.diagnosis.next_answer import answer
    from campaign.diagnosis.next_reading import Asked as Wanted
    from campaign.present.next import show_next

    if cost:
        from campaign.ledger.costs import change_costs
        from campaign.present.refusals import note

        for text in change_costs(asked.db, cost, reason, by):
            note(text)
    found = answer(
        asked.db, asked.filter, Wanted(hours, axis, chance, seed), asked.electrode, sheet, line
    )
    show_next(found, as_json=asked.json, as_csv=asked.csv, stated=asked.stated())
    if sheet and not (asked.json or asked.csv):
        print(f"\nRun sheet: {found['sheet']['rows']} rows in {sheet}, order from seed {seed}.")
