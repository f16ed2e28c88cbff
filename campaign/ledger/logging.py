"""One measurement for the ledger, from options or from a JSON object."""

from __future__ import annotations

import json
from collections.abc import Mapping
from pathlib import Path
from typing import IO, TYPE_CHECKING

from campaign.errors import Refused, refused
from campaign.ledger.settings import zone

if TYPE_CHECKING:
    from campaign.ledger.database import Database
    from campaign.ledger.flat.reading import FlatRow

LARGEST = 1_000_000  # bytes of one JSON object


def read_row(
    database: Database,
    source: str | None,
    given: Mapping[str, str],
    stream: IO[bytes] | None,
) -> FlatRow:
    """Return the row that options, or the JSON object on `stream`, state.

    Raises Refused with every fault of the row.
    """
    from campaign.ledger.flat.reading import row_from_mapping
    from campaign.ledger.spectra import attach_spectra

    stated: dict[str, object] = dict(given)
    name = "options"
    if source is not None:
        stated = {**_json_object(source, stream), **given}
        name = "standard input"
    with database.reading() as connection:
        campaign_zone = zone(connection)
    row, faults = row_from_mapping(stated, campaign_zone, file=name)
    if faults:
        raise Refused(faults)
    path = database.where.path
    home = path.resolve().parent if path is not None else Path.cwd()
    attach_spectra([row], Path.cwd(), home)
    return row


def _json_object(source: str, stream: IO[bytes] | None) -> dict[str, object]:
    if source != "-" or stream is None:
        raise refused(
            f"'{source}' is not understood; write 'campaign log -' to read one JSON object from "
            "standard input, or 'campaign import' for a table",
            value=source,
            expected="-",
        )
    content = stream.read(LARGEST + 1)
    if len(content) > LARGEST:
        raise refused(
            "it holds more than one measurement can need; use 'campaign import' for "
            "tables",
            file="standard input",
            expected=f"at most {LARGEST} bytes",
        )
    try:
        stated = json.loads(
            content.decode("utf-8-sig"),
            parse_constant=_no_constant,
            object_pairs_hook=_each_key_once,
        )
    except UnicodeDecodeError:
        raise refused(
            "it is not UTF-8 text", file="standard input", expected="a JSON object"
        ) from None
    except (ValueError, RecursionError) as error:
        line = getattr(error, "lineno", 1)
        what = getattr(error, "msg", "it is nested too deeply, or a number in it is too long")
        raise refused(
            f"it is not JSON: {what}",
            file="standard input",
            line=line,
            expected='an object such as {"cell": "C07", "R_ct": 41.2}',
        ) from None
    if not isinstance(stated, dict):
        raise refused(
            f"it holds a JSON {type(stated).__name__} where one object is expected",
            file="standard input",
            expected='an object such as {"cell": "C07", "R_ct": 41.2}',
        )
    return stated


def _each_key_once(pairs: list[tuple[str, object]]) -> dict[str, object]:
    stated: dict[str, object] = {}
    for name, value in pairs:
        if name in stated:
            raise refused(
                f"it states {name[:40]} twice",
                file="standard input",
                column=name[:80],
                value=value,
                expected="each key once",
            )
        stated[name] = value
    return stated


def _no_constant(text: str) -> object:
    raise refused(
        f"it holds {text}, which is no number; leave out what was not fitted",
        file="standard input",
        value=text,
        expected="a finite number",
    )
