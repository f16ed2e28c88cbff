"""What an import or a log did, or would do."""

from __future__ import annotations

from collections.abc import Mapping

from campaign.ledger.importing import Outcome
from campaign.present.refusals import note
from campaign.present.tables import show_json

SHOWN = 12


def show_outcome(outcome: Outcome, *, as_json: bool) -> None:
    """Print the outcome of an import; warnings go to standard error."""
    for warning in outcome.warnings:
        note(f"Note: {warning}")
    if as_json:
        show_json(outcome.as_dict())
        return
    verb = "Would add" if outcome.dry_run else "Added"
    print(f"{verb} {_counts(outcome)}.")
    for kind, labels in (
        ("electrodes", outcome.electrodes),
        ("electrolytes", outcome.electrolytes),
        ("cells", outcome.cells),
    ):
        if labels:
            rest = f" and {len(labels) - SHOWN} more" if len(labels) > SHOWN else ""
            print(f"  new {kind}: {'; '.join(labels[:SHOWN])}{rest}")
    if outcome.refits:
        print(f"  {_count(outcome.refits, 'refit')} made current")
    if outcome.unchanged:
        print(f"  {_count(outcome.unchanged, 'row')} unchanged")
    if outcome.withdrawn:
        print(
            f"  {outcome.withdrawn} of them withdrawn earlier and left so; --restore enters them "
            "again"
        )
    if outcome.imports and not outcome.dry_run:
        numbers = ", ".join(map(str, outcome.imports))
        print(f"  import {numbers}; 'campaign withdraw import {outcome.imports[0]}' takes it back")


def show_logged(outcome: Outcome, *, as_json: bool) -> None:
    """Print the outcome of one logged measurement."""
    if as_json:
        show_outcome(outcome, as_json=True)
        return
    for warning in outcome.warnings:
        note(f"Note: {warning}")
    for kind, labels in (
        ("electrode", outcome.electrodes),
        ("electrolyte", outcome.electrolytes),
        ("cell", outcome.cells),
    ):
        for label in labels:
            print(f"New {kind}: {label}")
    if outcome.measurements:
        print("Logged 1 measurement.")
    elif outcome.refits:
        print("Logged 1 refit; the earlier fit is kept in the history.")
    else:
        print("Unchanged: this measurement is in the ledger already.")


def _count(number: int, noun: str) -> str:
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def _counts(outcome: Outcome) -> str:
    return ", ".join(
        _count(number, noun)
        for number, noun in (
            (len(outcome.electrodes), "electrode"),
            (len(outcome.electrolytes), "electrolyte"),
            (len(outcome.cells), "cell"),
            (outcome.measurements, "measurement"),
        )
    )


def show_package(counts: Mapping[str, int], *, as_json: bool, dry_run: bool) -> None:
    """Print what was entered from a data package."""
    if as_json:
        kinds = {"electrodes": "electrode", "electrolytes": "electrolyte", "cells": "cell",
                 "measurements": "measurement"}  # fmt: skip
        added = {name: counts[table] for name, table in kinds.items()}
        show_json({"added": added, "unchanged": 0, "rows": counts, "dry_run": dry_run})
        return
    listed = ", ".join(
        f"{count} {name.replace('_', ' ')}" for name, count in counts.items() if count
    )
    verb = "Would enter" if dry_run else "Entered"
    print(f"{verb} from the data package: {listed}.")
