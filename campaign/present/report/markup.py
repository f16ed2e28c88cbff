"""Building HTML so that no text of a user's can ever become markup."""

from __future__ import annotations

from collections.abc import Iterable
from html import escape

from campaign.present.tables import printable

VOID = frozenset({"meta", "br", "hr", "link"})


class Html(str):
    """Text that is markup already; everything else is escaped where it is put in."""

    __slots__ = ()


def text(value: object) -> Html:
    """Return a value as HTML: escaped, unless it is markup already."""
    if isinstance(value, Html):
        return value
    return Html("" if value is None else escape(printable(str(value))))


def join(parts: Iterable[object], between: str = "") -> Html:
    """Return parts one after another; `between` is markup."""
    return Html(between.join(text(part) for part in parts))


def tag(name: str, /, *children: object, **attributes: object) -> Html:
    """Return an element; an attribute of None is left out, `class_` and `for_` lose their _."""
    stated = "".join(
        f' {key.rstrip("_").replace("_", "-")}="{escape(str(value))}"'
        for key, value in attributes.items()
        if value is not None
    )
    if name in VOID:
        return Html(f"<{name}{stated}>")
    return Html(f"<{name}{stated}>{join(children)}</{name}>")


def listed(items: Iterable[object], title: str | None = None) -> Html:
    """Return a bulleted list with a small heading; nothing for no items."""
    rows = [tag("li", item) for item in items]
    if not rows:
        return Html()
    return join([tag("h4", title) if title else Html(), tag("ul", *rows)])
