"""What a check found, each problem with its remedy."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from campaign.ledger.checking import Problem
from campaign.present.tables import show_json


def show_check(
    problems: Sequence[Problem], head: Mapping[str, Any] | None, *, as_json: bool
) -> None:
    """Print the problems, then the head of the journal to note down."""
    grave = [problem for problem in problems if problem.grave]
    if as_json:
        show_json(
            {
                "passed": not grave,
                "head": head,
                "errors": [_as_error(problem) for problem in grave],
                "remarks": [_as_error(problem) for problem in problems if not problem.grave],
            }
        )
        return
    for problem in problems:
        word = "FAULT" if problem.grave else "remark"
        print(f"{word}  {problem.about}: {problem.message}. Remedy: {problem.remedy}.")
    if head is not None:
        print(f"Journal head: entry {head['entry']}, {head['hash']}")
    print("The check failed." if grave else "The journal and all rows agree.")


def _as_error(problem: Problem) -> dict[str, Any]:
    return {
        "message": f"{problem.about}: {problem.message}",
        "line": None,
        "column": None,
        "value": None,
        "expected": problem.remedy,
    }
