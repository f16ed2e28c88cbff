"""Telling a watcher how far a long entry has come; nothing is told where nobody watches."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from contextvars import ContextVar
from typing import TypeVar

T = TypeVar("T")

Watcher = Callable[[str, int, int], None]
"""Called with what is done, how many are done, and how many there are."""

EVERY = 50

_watcher: ContextVar[Watcher | None] = ContextVar("watcher", default=None)


@contextmanager
def watching(watcher: Watcher) -> Iterator[None]:
    """Let `watcher` be told of everything counted inside."""
    token = _watcher.set(watcher)
    try:
        yield
    finally:
        _watcher.reset(token)


def counted(items: Sequence[T], what: str) -> Iterator[T]:
    """Yield the items, telling the watcher now and then how many are done."""
    watcher = _watcher.get()
    if watcher is None:
        yield from items
        return
    total = len(items)
    for done, item in enumerate(items):
        if done % EVERY == 0:
            watcher(what, done, total)
        yield item
    watcher(what, total, total)
