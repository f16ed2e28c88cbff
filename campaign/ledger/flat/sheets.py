"""Writing a run sheet to a file that does not exist yet."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

from campaign.errors import refused
from campaign.ledger.flat.writing import write_rows


def write_sheet(path: str, rows: Iterable[Mapping[str, Any]]) -> None:
    """Write rows of the flat table to a new CSV file.

    Raises Refused where the file exists or cannot be written.
    """
    if Path(path).suffix.lower() not in (".csv", ".txt"):
        raise refused(
            f"the run sheet is written as CSV; '{path}' ends otherwise",
            value=path,
            expected="a file name that ends in .csv",
        )
    try:
        with Path(path).open("x", encoding="utf-8", newline="") as stream:
            write_rows(rows, stream)
    except FileExistsError:
        raise refused(
            f"there is a file at {path} already and it is left as it is; name another one",
            value=path,
            expected="a file that does not exist yet",
        ) from None
    except OSError as error:
        raise refused(
            f"the run sheet cannot be written to {path}: {error.strerror or error}", value=path,
            expected="a folder that can be written to",
        ) from error  # fmt: skip
