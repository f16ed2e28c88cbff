"""The program's own progress bar for the benchmarks: at a terminal only, after a second."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import TypeVar

from campaign.ledger import progress
from campaign.present.progress import progress_bar

T = TypeVar("T")


def counted(items: Iterable[T], total: int, what: str) -> Iterator[T]:
    """Yield `total` items, with a bar of how many are done and the time left."""
    with progress_bar():
        for _, item in zip(progress.counted(range(total), what), items, strict=False):
            yield item
