"""Making and upgrading the database through the migrations (Alembic, built in code)."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from campaign.errors import refused

if TYPE_CHECKING:
    from sqlalchemy import Connection


def migrations_folder() -> Path:
    """Return the folder of the migrations: packaged in a wheel, beside it in a checkout."""
    package = Path(__file__).resolve().parent.parent
    for folder in (package / "migrations", package.parent / "migrations"):
        if (folder / "env.py").is_file():
            return folder
    raise refused("this installation of the program lacks its migrations; install it again")


def migrate(connection: Connection, target: str = "head") -> None:
    """Bring the schema to `target` inside the transaction that `connection` holds."""
    from alembic import command
    from alembic.config import Config

    folder = migrations_folder()
    config = Config()
    config.set_main_option("script_location", str(folder).replace("%", "%%"))
    config.set_main_option("prepend_sys_path", str(folder).replace("%", "%%"))
    config.set_main_option("path_separator", "newline")
    config.attributes["connection"] = connection
    command.upgrade(config, target)
