"""Writing a figure: the same drawing gives the same bytes.

In a PNG single pixels may differ by one step of 255, as the drawing library rounds.
"""

from __future__ import annotations

import io
import re
from pathlib import Path

from matplotlib.figure import Figure

from campaign.errors import refused
from campaign.present.figures.style import styled

PNG_DPI = 300
ON_SCREEN = 1.2
"""A figure on a page is shown this much larger than in a journal."""

_METADATA: dict[str, dict[str, str | None]] = {
    "svg": {"Date": None, "Creator": None},
    "pdf": {"CreationDate": None, "ModDate": None, "Producer": None, "Creator": None},
    "png": {"Software": None},
}


def content(figure: Figure, kind: str) -> bytes:
    """Return a figure as the bytes of an svg, pdf or png file."""
    for axes in figure.axes:
        # what lies inside a panel never moves it, and measuring every mark takes long
        for artist in (*axes.lines, *axes.collections, *axes.patches):
            artist.set_in_layout(False)
    stream = io.BytesIO()
    with styled():
        _settle_layout(figure)
        figure.savefig(stream, format=kind, dpi=PNG_DPI, metadata=_METADATA[kind])
    return _numbered(stream.getvalue()) if kind == "svg" else stream.getvalue()


def _settle_layout(figure: Figure) -> None:
    """Lay the figure out once, so that saving does not draw it a second time to do so."""
    engine = figure.get_layout_engine()
    if engine is not None:
        engine.execute(figure)
        figure.set_layout_engine(None)


def _numbered(svg: bytes) -> bytes:
    """Return an SVG whose drawn-up ids are numbers in order: some hold a memory address."""
    text = svg.decode("utf-8")
    drawn = dict.fromkeys(re.findall(r'\bid="([a-z][0-9a-f]{10})"', text))
    for number, name in enumerate(drawn):
        text = text.replace(name, f"{name[0]}-{number}")
    return text.encode("utf-8")


def save(figure: Figure, path: Path) -> None:
    """Write a figure in the form its ending names; Refused where that fails."""
    try:
        path.write_bytes(content(figure, path.suffix.lower().lstrip(".")))
    except OSError as error:
        raise refused(
            f"the figure cannot be written to {path}: {error.strerror or error}",
            column="figure",
            value=path,
            expected="a file that can be written",
        ) from None


def inline_svg(figure: Figure, name: str, title: str) -> str:
    """Return a figure as an SVG element for a page; `name` keeps its ids from other figures'.

    title: said by screen readers. Its text stays text.
    """
    from html import escape

    text = content(figure, "svg").decode("utf-8")
    text = text[text.index("<svg") :]
    text = re.sub(r'\bid="', f'id="{name}-', text)
    text = re.sub(r'(xlink:href|href)="#', rf'\1="#{name}-', text)
    text = re.sub(r"url\(#", f"url(#{name}-", text)
    text = re.sub(r"<metadata>.*?</metadata>", "", text, flags=re.DOTALL)
    width, height = re.search(r'width="([\d.]+)pt" height="([\d.]+)pt"', text).groups()  # type: ignore[union-attr]
    text = re.sub(r'width="[\d.]+pt" height="[\d.]+pt" ', "", text, count=1)
    opening = (
        f'<svg role="img" aria-label="{escape(title)}" '
        f'style="width:{float(width) / 72 * ON_SCREEN:.3f}in;aspect-ratio:{width}/{height}"'
    )
    return text.replace("<svg", opening, 1).strip()
