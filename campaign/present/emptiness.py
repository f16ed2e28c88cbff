"""Why a query found nothing, in sentences."""

from __future__ import annotations

from collections.abc import Mapping

from campaign.ledger.emptying import Emptied
from campaign.present.refusals import note


def show_emptied(found: Emptied, stated: Mapping[str, str]) -> None:
    """Print which condition keeps no measurement, or which one to drop, on standard error."""
    nothing = [name for name, count in found.alone.items() if count == 0]
    for name in nothing:
        near = f"; near: {', '.join(found.near[name])}" if name in found.near else ""
        note(f"{_option(name, stated)} alone matches no measurement{near}.")
    if nothing:
        return
    for name, count in found.without.items():
        if count:
            note(f"Without {_option(name, stated)} there are {_measurements(count)}.")


def _option(name: str, stated: Mapping[str, str]) -> str:
    return f"--{name.replace('_', '-')} {stated.get(name, '')}".strip()


def _measurements(count: int) -> str:
    return "1 measurement" if count == 1 else f"{count} measurements"
