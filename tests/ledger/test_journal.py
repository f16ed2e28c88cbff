"""The chain and the digests: whatever a hand with a SQL shell changes, the check finds."""

import hashlib
import json

import pytest


@pytest.fixture
def kept(bench, make_row):
    """Two imports, an amendment, a refit and a withdrawal."""
    bench.enter(make_row(1), make_row(2), make_row(3))
    bench.enter(make_row(4, cell="B", electrolyte="0.5 M NaPF6 in PC", R_sl="absent"))
    bench.amend("cell", "A", area_cm2="1.2")
    bench.enter(make_row(2, R_ct=50.0, area_cm2=1.2), refit=True)
    bench.withdraw("measurement", 3)
    assert bench.problems() == []
    return bench


def found(bench, head=None):
    return " | ".join(f"{p.about}: {p.message}" for p in bench.problems(head))


def test_every_entry_is_numbered_chained_and_told(kept):
    entries = kept.history()
    assert [e["entry"] for e in entries] == [1, 2, 3, 4, 5, 6]
    assert [e["action"] for e in entries] == [
        "start", "import", "import", "amend", "import", "withdraw",
    ]  # fmt: skip
    assert {e["who"] for e in entries} == {"tester"}
    stored = kept.ask("SELECT previous, hash FROM journal ORDER BY id")
    assert stored[0][0] == "0" * 64
    assert [p for p, _ in stored[1:]] == [h for _, h in stored[:-1]]


def test_the_hash_is_sha_256_over_the_stored_text(kept):
    """Recomputed here from the stored columns alone, with the standard library."""
    names = "previous, id, at, who, action, subject, before, after, reason"
    for stated, *texts in kept.ask(f"SELECT hash, {names} FROM journal"):
        text = json.dumps(texts, ensure_ascii=False, separators=(",", ":"))
        assert hashlib.sha256(text.encode()).hexdigest() == stated


def test_before_and_after_hold_what_was_and_what_is(kept):
    amended = kept.history()[3]
    assert amended["before"]["was"] == {"area_cm2": 1.13}
    assert amended["after"]["is"] == {"area_cm2": 1.2}
    assert amended["reason"] == "a slip"


TAMPERINGS = {
    "a value edited": ["UPDATE fitted_value SET value = value * 1.01 WHERE fit = 1"],
    "a standard error edited": ["UPDATE fitted_value SET se = 0.1 WHERE fit = 1 AND se > 0"],
    "a value emptied": ["UPDATE fitted_value SET se = NULL WHERE fit = 1 AND se > 0"],
    "an area edited": ["UPDATE cell SET area_cm2 = 2 WHERE ended_by IS NULL AND label = 'A'"],
    "a superseded row edited": ["UPDATE cell SET area_cm2 = 2 WHERE ended_by IS NOT NULL"],
    "a label edited": ["UPDATE cell SET label = 'X' WHERE label = 'B'"],
    "a withdrawn measurement brought back": [
        "UPDATE measurement SET ended_by = NULL WHERE id = 3",
        "UPDATE fit SET ended_by = NULL WHERE measurement = 3",
    ],
    "a measurement ended behind the journal": [
        "UPDATE measurement SET ended_by = 6 WHERE id = 1"
    ],
    "a row moved to another entry": ["UPDATE measurement SET entry = 3 WHERE id = 1"],
    "a row deleted": ["DELETE FROM fitted_value WHERE fit = 1 AND quantity = 'R_el'"],
    "a measurement deleted with its fit": [
        "DELETE FROM fitted_value WHERE fit = 1",
        "DELETE FROM fit WHERE id = 1",
        "DELETE FROM measurement WHERE id = 1",
    ],
    "a row added": ["INSERT INTO fitted_value VALUES (1, 'R_lat', 5.0, NULL, 2, NULL)"],
    "a setting edited": ["UPDATE setting SET value = 'Asia/Tokyo'"],
    "a component edited": ["UPDATE electrolyte_component SET amount = 2 WHERE role = 'salt'"],
    "an import's name edited": ["UPDATE imported_file SET name = 'other.csv' WHERE id = 1"],
    "an entry's reason edited": ["UPDATE journal SET reason = 'better' WHERE id = 4"],
    "an entry's author edited": ["UPDATE journal SET who = 'somebody' WHERE id = 2"],
    "an entry's instant edited": ["UPDATE journal SET at = '2020' || substr(at, 5) WHERE id = 2"],
    "an entry's digest edited": [
        "UPDATE journal SET after = replace(after, 'made_digest', 'made_digesT') WHERE id = 2"
    ],
    "a hash edited": [f"UPDATE journal SET hash = '{'a' * 64}' WHERE id = 3"],
    "an entry deleted": ["DELETE FROM journal WHERE id = 4"],
    "the first entry deleted": ["DELETE FROM journal WHERE id = 1"],
    "the last entry deleted, its rows left": ["DELETE FROM journal WHERE id = 6"],
    "two entries exchanged": [
        "UPDATE journal SET id = 100 WHERE id = 4",
        "UPDATE journal SET id = 4 WHERE id = 5",
        "UPDATE journal SET id = 5 WHERE id = 100",
    ],
    "an entry forged at the end": [
        "INSERT INTO journal SELECT 7, at, who, action, subject, before, after, reason, hash, "
        f"'{'b' * 64}' FROM journal WHERE id = 6"
    ],
    "everything emptied": ["DELETE FROM journal"],
}  # fmt: skip


@pytest.mark.parametrize("what", TAMPERINGS)
def test_tampering_is_found(kept, what):
    kept.tamper(*TAMPERINGS[what])
    assert found(kept), what


def test_a_fault_names_its_entry_and_a_remedy(kept):
    kept.tamper(*TAMPERINGS["a value edited"])
    (problem,) = kept.problems()
    assert "journal entry 2" in problem.about
    assert "backup" in problem.remedy


CUT = [
    "UPDATE measurement SET ended_by = NULL WHERE ended_by = 6",
    "UPDATE fit SET ended_by = NULL WHERE ended_by = 6",
    "UPDATE fitted_value SET ended_by = NULL WHERE ended_by = 6",
    "DELETE FROM journal WHERE id = 6",
]


def test_a_tail_cut_with_all_its_rows_is_found_by_the_head(kept):
    noted = kept.head()["hash"]
    kept.tamper(*CUT)
    assert kept.problems() == []  # the chain alone cannot know
    assert "entries were cut off" in found(kept, noted)


def test_an_earlier_head_is_still_in_the_chain(kept):
    for entry in kept.history():
        assert kept.problems(entry["hash"]) == []
        assert kept.problems(entry["hash"][:12].upper()) == []


@pytest.mark.parametrize("head", ["", "abc", "f" * 64, "not a hash"])
def test_a_head_that_is_not_in_the_chain_is_a_problem(kept, head):
    assert "does not hold the hash" in found(kept, head)


def test_a_journal_rewritten_with_fitting_hashes_is_found_by_the_head(kept):
    noted = kept.head()["hash"]
    kept.tamper("UPDATE journal SET who = 'somebody else' WHERE id = 2")
    names = ["previous", "id", "at", "who", "action", "subject", "before", "after", "reason"]
    with kept.store.connected(rules=False) as connection:
        previous = "0" * 64
        query = f"SELECT {', '.join(names)} FROM journal ORDER BY id"
        for texts in connection.exec_driver_sql(query).fetchall():
            text = json.dumps([previous, *texts[1:]], ensure_ascii=False, separators=(",", ":"))
            new = hashlib.sha256(text.encode()).hexdigest()
            connection.exec_driver_sql(
                f"UPDATE journal SET previous = '{previous}', hash = '{new}' WHERE id = {texts[1]}"
            )
            previous = new
    assert kept.problems() == []
    assert "does not hold the hash" in found(kept, noted)


def test_a_reason_that_steers_a_terminal_is_refused(bench, make_row):
    from campaign.errors import Refused

    bench.enter(make_row(1))
    before = bench.digest()
    with pytest.raises(Refused, match=r"U\+001B"):
        bench.amend("cell", "A", reason="\x1b[2J", area_cm2="2")
    assert bench.digest() == before


def test_implausible_values_are_remarks_and_do_not_fail_the_check(bench, make_row):
    bench.enter(make_row(1, R_ct=4e12, R_ct_se=None, temperature_C=900))
    assert bench.problems() == []
    assert {p.message.split(" is ")[0] for p in bench.remarks()} == {"R_ct", "the temperature"}
