"""A progress bar on standard error, at a terminal only, and only where it takes long."""

from __future__ import annotations

import os
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from campaign.ledger.progress import watching

PATIENCE_s = 1.0
"""What is done sooner shows no bar."""


@contextmanager
def progress_bar() -> Iterator[None]:
    """Show how many are done and the time left while what runs inside counts its work."""
    if not sys.stderr.isatty() or os.environ.get("TERM") == "dumb":
        yield
        return
    bar = _Bar(time.monotonic() + PATIENCE_s)
    try:
        with watching(bar.tell):
            yield
    finally:
        bar.stop()


class _Bar:
    """A bar that comes into being at `from_s` (monotonic clock) and no earlier."""

    def __init__(self, from_s: float) -> None:
        self.from_s = from_s
        self.progress: Any = None
        self.tasks: dict[str, Any] = {}

    def tell(self, what: str, done: int, total: int) -> None:
        if self.progress is None:
            if time.monotonic() < self.from_s or done >= total:
                return
            self.progress = _rich_progress()
            self.progress.start()
        if what not in self.tasks:
            self.tasks[what] = self.progress.add_task(what, total=total)
        self.progress.update(self.tasks[what], completed=done, total=total)

    def stop(self) -> None:
        if self.progress is not None:
            self.progress.stop()


def _rich_progress() -> Any:
    from rich.console import Console
    from rich.progress import (
        BarColumn,
        MofNCompleteColumn,
        Progress,
        TextColumn,
        TimeRemainingColumn,
    )

    plain = bool(os.environ.get("NO_COLOR"))
    return Progress(
        TextColumn("{task.description}"),
        BarColumn(40, style="none" if plain else "bar.back"),
        MofNCompleteColumn(),
        TimeRemainingColumn(compact=True),
        TextColumn("left"),
        console=Console(stderr=True, no_color=plain, highlight=False),
        transient=True,
    )
