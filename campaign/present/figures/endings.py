"""Which files a figure can be written to; checked before anything is computed."""

from __future__ import annotations

from pathlib import Path

from campaign.errors import refused

ENDINGS = (".svg", ".pdf", ".png")


def figure_path(text: str) -> Path:
    """Return the path of a figure; Refused for another ending or a missing folder."""
    path = Path(text)
    if path.suffix.lower() not in ENDINGS:
        raise refused(
            f"a figure is written as SVG, PDF or PNG by the ending of its name; '{text}' ends in "
            f"{repr(path.suffix) if path.suffix else 'none'}",
            column="figure",
            value=text,
            expected="a name ending in .svg, .pdf or .png",
        )
    if path.is_dir() or not path.resolve().parent.is_dir():
        what = "is a folder" if path.is_dir() else f"needs the folder {path.resolve().parent}"
        raise refused(
            f"the figure cannot be written: {text} {what}",
            column="figure",
            value=text,
            expected="a file in an existing folder",
        )
    return path
