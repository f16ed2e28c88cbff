"""Completion of labels at a shell: what to offer for an option or argument."""

from __future__ import annotations

import os
import re
from collections.abc import Callable
from typing import Any

import typer

KINDS = ("electrode", "electrolyte", "cell", "measurement", "fit", "import")


def of(kind: str) -> Callable[[typer.Context, str], list[str]]:
    """Return a completion that offers the words of a kind."""

    def complete(ctx: typer.Context, incomplete: str) -> list[str]:
        return _words(kind, ctx, incomplete)

    return complete


def kind_of_record(incomplete: str) -> list[str]:
    """Offer the kinds of record."""
    return [kind for kind in KINDS if kind.startswith(incomplete)]


def name_of_record(ctx: typer.Context, incomplete: str) -> list[str]:
    """Offer the labels of the kind that was named before."""
    return _words(str(ctx.params.get("kind") or ""), ctx, incomplete)


def _words(kind: str, ctx: typer.Context, incomplete: str) -> list[str]:
    from campaign.ledger.completing import known_words

    return [_for_shell(word) for word in known_words(kind, incomplete, _db(ctx))]


def _db(ctx: Any) -> str | None:
    """Return the database named so far on the line, by the command or before it."""
    while ctx is not None:
        if ctx.params.get("db"):
            return str(ctx.params["db"])
        ctx = ctx.parent
    return None


def _for_shell(word: str) -> str:
    # bash puts in what it is given as it is; the other shells quote by themselves
    if os.environ.get("_CAMPAIGN_COMPLETE") != "complete_bash":
        return word
    return re.sub(r"([^\w@%+=:,./-])", r"\\\1", word)
