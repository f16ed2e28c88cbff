"""Sentences that fit the width of a terminal, or 100 columns when piped."""

from __future__ import annotations

import shutil
import sys
import textwrap

from campaign.present.tables import WIDEST

NARROWEST = 40


def width() -> int:
    """Return the columns a line may take: the terminal's, at most 100; 100 when piped."""
    if not sys.stdout.isatty():
        return WIDEST
    return max(NARROWEST, min(WIDEST, shutil.get_terminal_size((WIDEST, 40)).columns))


def say(text: str, first: str = "", following: str | None = None) -> None:
    """Print a text with `first` before it, wrapped, further lines indented.

    Words are never torn: recipes and numbers stay whole.
    """
    indent = " " * len(first) if following is None else following
    lines = textwrap.wrap(
        text, width(), initial_indent=first, subsequent_indent=indent,
        break_long_words=False, break_on_hyphens=False,
    )  # fmt: skip
    print("\n".join(lines))


def heading(text: str) -> None:
    """Print the heading of a part, with an empty line before it."""
    print(f"\n{text}")
