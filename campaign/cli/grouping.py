"""The list of commands in `campaign --help`, grouped by what one wants to do."""

from __future__ import annotations

from typing import Any

from typer.core import TyperGroup

OTHER = "Other"
LONGEST = 200
"""Characters of a short help; what does not fit a line is wrapped, not cut."""


class Grouped(TyperGroup):
    """Commands under the headings they were registered with, in plain text."""

    def format_commands(self, ctx: Any, formatter: Any) -> None:
        """Write one section a heading, in the order of registration."""
        sections: dict[str, list[tuple[str, Any]]] = {}
        for name in self.list_commands(ctx):
            command = self.get_command(ctx, name)
            if command is None or command.hidden:
                continue
            heading = getattr(command, "rich_help_panel", None)
            sections.setdefault(heading if isinstance(heading, str) else OTHER, []).append(
                (name, command)
            )
        longest = max((len(name) for rows in sections.values() for name, _ in rows), default=0)
        for heading, rows in sections.items():
            with formatter.section(heading):
                formatter.write_dl(
                    [
                        (name.ljust(longest), command.get_short_help_str(LONGEST))
                        for name, command in rows
                    ]
                )
