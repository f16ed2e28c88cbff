"""What a shell may complete from the campaign: quickly, and never with a word of complaint.

Read with the standard library's SQLite alone, so that pressing Tab does not wait for anything
to be imported. A campaign on a server completes nothing: a network may be slow.
"""

from __future__ import annotations

import sqlite3
from contextlib import closing
from urllib.parse import quote

from campaign.errors import Refused
from campaign.ledger.database import place

WAIT_S = 0.2
MOST = 200

# Kind of word -> the query for it. The texts are fixed here; nothing of a user's enters them.
_QUERIES = {
    "electrode": "SELECT label FROM electrode WHERE ended_by IS NULL",
    "electrolyte": "SELECT key FROM electrolyte WHERE ended_by IS NULL",
    "cell": "SELECT label FROM cell WHERE ended_by IS NULL",
    "specimen": "SELECT DISTINCT specimen FROM cell WHERE ended_by IS NULL",
    "salt": "SELECT DISTINCT salt_key FROM electrolyte WHERE ended_by IS NULL",
    "solvents": "SELECT DISTINCT solvent_key FROM electrolyte WHERE ended_by IS NULL",
    "additives": "SELECT DISTINCT additive_key FROM electrolyte WHERE ended_by IS NULL",
    "operator": "SELECT DISTINCT operator FROM measurement WHERE ended_by IS NULL",
    "import": "SELECT id FROM imported_file WHERE ended_by IS NULL",
}


def known_words(kind: str, beginning: str, db: str | None) -> list[str]:
    """Return what is in force of a kind and begins with `beginning`; [] for any difficulty."""
    query = _QUERIES.get(kind)
    if query is None:
        return []
    try:
        path = place(db).path
        if path is None or not path.is_file():
            return []
        uri = f"file:{quote(str(path.resolve()))}?mode=ro"
        with closing(sqlite3.connect(uri, uri=True, timeout=WAIT_S)) as connection:
            words = [str(word) for (word,) in connection.execute(query) if word is not None]
    except (sqlite3.Error, OSError, ValueError, Refused):
        return []
    low = beginning.casefold()
    return sorted(word for word in words if word.casefold().startswith(low))[:MOST]
