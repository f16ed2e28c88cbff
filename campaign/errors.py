"""Everything the program refuses, in one place.

A refusal carries one `Fault` per thing found wrong, so that a user sees all of
them at once and a script can read them as JSON (`{"errors": [...]}`).
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import asdict, dataclass


@dataclass(frozen=True)
class Fault:
    """One thing found wrong: what was found, where, what was expected, how to mend it."""

    message: str
    file: str | None = None
    line: int | None = None
    column: str | None = None
    value: str | None = None
    expected: str | None = None

    def sentence(self) -> str:
        """Return the fault as one line for a person."""
        place = ", ".join(
            part
            for part in (
                self.file,
                f"line {self.line}" if self.line is not None else None,
                f"column {self.column}" if self.file and self.column is not None else None,
            )
            if part
        )
        return f"{place}: {self.message}" if place else self.message

    def as_dict(self) -> dict[str, object]:
        """Return the fault with the keys of the fixed interface."""
        return asdict(self)


class Refused(Exception):
    """The request cannot be carried out; nothing was written (exit code 1)."""

    def __init__(self, faults: Iterable[Fault]) -> None:
        self.faults: Sequence[Fault] = tuple(faults)
        super().__init__("; ".join(fault.sentence() for fault in self.faults))


def refused(
    message: str,
    *,
    file: str | None = None,
    line: int | None = None,
    column: str | None = None,
    value: object = None,
    expected: str | None = None,
) -> Refused:
    """Return a refusal with a single fault, ready to be raised."""
    shown = None if value is None else str(value)
    return Refused([Fault(message, file, line, column, shown, expected)])


class RecipeError(ValueError):
    """A recipe cannot be read; `position` is the 0-based character of the fault."""

    def __init__(self, message: str, position: int, expected: str = "") -> None:
        self.message = message
        self.position = position
        self.expected = expected
        super().__init__(f"{message} (at character {position + 1})")
