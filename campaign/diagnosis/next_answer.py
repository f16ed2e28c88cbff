"""The answer of `next` as plain data, with its run sheet where one was asked for."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

from campaign.diagnosis.next_reading import Answer, Asked, next_steps
from campaign.diagnosis.next_sheet import sheet as run_sheet
from campaign.errors import refused
from campaign.ledger.flat.sheets import write_sheet

if TYPE_CHECKING:
    from campaign.trends.reading import FilterSource


def answer(
    db: str | None,
    wanted: FilterSource | None,
    asked: Asked,
    electrode: str | None = None,
    sheet: str | None = None,
    line: int | None = None,
) -> dict[str, Any]:
    """Return proposals and, with `sheet`, write the run sheet of one line or of the budget's set.

    Raises Refused, with nothing written.
    """
    found = next_steps(db, wanted, asked, None if electrode is None else [electrode])
    content = {**found.as_dict(), "budget": asked.hours}
    if sheet is not None:
        rows = _rows(found, line)
        write_sheet(sheet, rows)
        content["sheet"] = {"file": str(Path(sheet)), "rows": len(rows), "seed": asked.seed}
    return content


def _rows(found: Answer, line: int | None) -> list[dict[str, Any]]:
    buildable = [one for one in found.proposals if one.cells]
    if not buildable:
        raise refused(
            "there is nothing to build, so no run sheet was written",
            expected="a proposal with cells",
        )
    if line is not None:
        if not 1 <= line <= len(found.proposals):
            raise refused(
                f"--line is {line}; write a line number from 1 to {len(found.proposals)}",
                column="line", value=line, expected=f"from 1 to {len(found.proposals)}",
            )  # fmt: skip
        chosen = [found.proposals[line - 1]]
        if not chosen[0].cells:
            raise refused(
                f"line {line} proposes no cells, so no run sheet was written",
                column="line", value=line, expected="a line that proposes cells",
            )  # fmt: skip
    else:
        chosen = buildable if found.asked.hours is not None else buildable[:1]
    cells = [cell for one in chosen for cell in one.cells]
    return run_sheet(found.snapshot, cells, found.asked.seed)
