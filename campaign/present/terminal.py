"""Standard output and error that no stored text can steer.

Labels are refused at entry when they hold control or direction characters, but a database from
elsewhere may hold any. Whatever is printed passes through here and such characters are spelt out;
only the framed tables' own colours, whose cells were spelt out before, go past it.
"""

from __future__ import annotations

import re
import sys
from typing import IO, Any

# Control characters but tab and line feed; marks that turn, hide or separate text; surrogates.
_STEERING = re.compile(
    "[\x00-\x08\x0b-\x1f\x7f-\x9f\u00ad\u061c\u180e\u200b-\u200f\u2028-\u202e\u2060-\u206f\ufeff"
    "\ufff9-\ufffb\U000e0000-\U000e007f\ud800-\udfff]"
)


def _spelt(found: re.Match[str]) -> str:
    number = ord(found[0])
    return f"\\u{number:04x}" if number <= 0xFFFF else f"\\U{number:08x}"


def harmless(text: str) -> str:
    """Return text in which characters that steer a terminal are spelt out."""
    return _STEERING.sub(_spelt, text)


class Harmless:
    """A text stream whose writing is made harmless; all else is the stream's own."""

    def __init__(self, stream: IO[str]) -> None:
        self.plain = stream

    def write(self, text: str) -> int:
        """Write text made harmless; return the length of what was given."""
        self.plain.write(harmless(text))
        return len(text)

    def writelines(self, lines: Any) -> None:
        """Write lines made harmless."""
        for line in lines:
            self.write(line)

    def __getattr__(self, name: str) -> Any:
        return getattr(self.plain, name)


def guard_streams() -> None:
    """Make standard output and error harmless, and able to show any text in some way."""
    for name in ("stdout", "stderr"):
        stream = getattr(sys, name)
        if isinstance(stream, Harmless) or stream is None:
            continue
        if hasattr(stream, "reconfigure"):
            # A terminal of another encoding gets \xb1 for what it cannot show, not a failure.
            stream.reconfigure(errors="backslashreplace")
        setattr(sys, name, Harmless(stream))


def coloured() -> IO[str]:
    """Return standard output for what brings its own colours, made of harmless cells."""
    stream: Any = sys.stdout
    plain: IO[str] = stream.plain if isinstance(stream, Harmless) else stream
    return plain
