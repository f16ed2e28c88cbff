"""What a forger does who drops a rule, writes, forges the journal and puts the rule back."""

import hashlib
import json

import pytest
from sqlalchemy import select

from campaign.errors import Refused
from campaign.ledger import schema
from campaign.ledger.backing import backup
from campaign.ledger.checking import check
from campaign.ledger.copying import copy_campaign
from campaign.ledger.database import open_database
from campaign.ledger.journal import digest, entry_hash, made_line
from campaign.ledger.starting import start


@pytest.fixture
def kept(empty_store, filled, tmp_path):
    start(empty_store.where, "UTC", "tester")
    filled(empty_store.where, tmp_path)
    return empty_store


def problems(store, grave=True):
    with open_database(store.where).reading() as connection:
        return [p for p in check(connection) if p.grave == grave]


def forge(store, *statements):
    """Write without rules, then make every digest and hash of the journal fit."""
    with store.connected(rules=False) as connection:
        if store.kind == "sqlite":
            connection.exec_driver_sql("PRAGMA ignore_check_constraints = ON")
        for statement in statements:
            assert connection.exec_driver_sql(statement).rowcount != 0
        previous = "0" * 64
        for row in connection.execute(select(schema.journal).order_by(schema.journal.c.id)):
            entry = {**row._mapping, "previous": previous}
            lines = [
                made_line(table.name, dict(made))
                for table in schema.JOURNALLED
                for made in connection.execute(
                    select(table)
                    .where(table.c.entry == row.id)
                    .order_by(*table.primary_key)
                ).mappings()
            ]
            after = {**json.loads(entry["after"]), "made_digest": digest(lines)}
            entry["after"] = json.dumps(
                after, ensure_ascii=False, sort_keys=True, separators=(",", ":")
            )
            entry["hash"] = previous = entry_hash(entry)
            assert len(previous) == len(hashlib.sha256().hexdigest())
            connection.execute(
                schema.journal.update().where(schema.journal.c.id == row.id), [entry]
            )


BOTH = {
    "a second current fit": (
        ["DROP INDEX fit_one_measurement", "INSERT INTO fit (id, record, measurement, entry) "
         "VALUES (9, 9, 1, 2)", "INSERT INTO fitted_value (fit, quantity, value, entry) "
         "VALUES (9, 'R_ct', 40.0, 2)"],
        "shares its measurement",
    ),
    "two cells of one label": (
        ["DROP INDEX cell_one_label", "UPDATE cell SET label = 'C1' WHERE label = 'C2'"],
        "shares its label",
    ),
    "a blend that is not whole": (
        ["UPDATE electrolyte_component SET amount = 0.4 WHERE amount = 0.5 AND position = "
         "(SELECT max(position) FROM electrolyte_component WHERE amount = 0.5)"],
        "do not sum to 1",
    ),
    "a recipe without salt": (
        ["UPDATE electrolyte_component SET role = 'additive' WHERE role = 'salt'"],
        "names no salt",
    ),
    "no potential": (
        ['UPDATE measurement SET "potential_V" = NULL WHERE id = 1'],
        "has no potential",
    ),
    "a fit without values": (
        ["DELETE FROM fitted_value WHERE fit = 2"],
        "has no fitted value",
    ),
    "a record of no first row": (
        ["DROP INDEX measurement_one_record", "UPDATE measurement SET record = 1 WHERE id = 3"],
        "shares its record",
    ),
    "a specimen of two electrodes": (
        ["INSERT INTO electrode (id, record, label, ion, charge, entry) "
         "VALUES (7, 7, 'other', 'Na', 1, 2)",
         "UPDATE cell SET specimen = 'C1', electrode = 7 WHERE label = 'C2'"],
        "also one of another electrode",
    ),
}  # fmt: skip


@pytest.mark.parametrize("what", BOTH)
def test_a_broken_rule_is_found_under_a_fitting_journal(kept, what):
    statements, message = BOTH[what]
    forge(kept, *statements)
    found = problems(kept)
    import re

    assert any(re.search(message, p.message) and p.kind == "rules" for p in found), found
    assert all(p.remedy for p in found)
    # The journal itself was forged to fit: nothing but the rules gives it away.
    assert {p.kind for p in found} == {"rules"}


OUT_OF_RANGE = {
    "a negative resistance": "UPDATE fitted_value SET value = -3.0 WHERE fit = 1 AND value > 1",
    "an infinite resistance": "UPDATE fitted_value SET value = 9e999 WHERE fit = 1 AND value > 1",
    "no area": "UPDATE cell SET area_cm2 = 0.0 WHERE label = 'C1'",
    "below absolute zero": 'UPDATE measurement SET "temperature_K" = -1.0 WHERE id = 1',
    "more than full": "UPDATE measurement SET ion_content = 1.5 WHERE id = 1",
    "absent charge transfer": "UPDATE fitted_value SET value = NULL, se = NULL "
    "WHERE fit = 1 AND quantity = 'R_ct'",
}


@pytest.mark.parametrize("what", OUT_OF_RANGE)
def test_a_value_out_of_range_is_found(tmp_path, store_of, filled, what):
    """In a file, whose checks a hand can switch off for itself."""
    store = store_of(tmp_path / "campaign.sqlite")
    start(store.where, "UTC", "tester")
    filled(store.where, tmp_path)
    if "infinite" in what:
        store.tamper("SELECT 1")
        with store.connected(rules=False) as connection:
            connection.exec_driver_sql("PRAGMA ignore_check_constraints = ON")
            connection.exec_driver_sql(OUT_OF_RANGE[what])
    else:
        forge(store, OUT_OF_RANGE[what])
    found = [p for p in problems(store) if p.kind == "rules"]
    assert found, what


@pytest.mark.parametrize("rule", ["cell_kept", "fitted_value_never_deleted", "journal_kept"])
def test_a_rule_taken_away_is_named_and_a_copy_has_it_again(kept, tmp_path, rule):
    table = rule.rsplit("_never", 1)[0].removesuffix("_kept")
    with kept.connected() as connection:
        on = f" ON {table}" if kept.kind == "postgresql" else ""
        connection.exec_driver_sql(f"DROP TRIGGER {rule}{on}")
    (problem,) = problems(kept)
    assert rule in problem.message and "campaign copy" in problem.remedy
    copy_campaign(open_database(kept.where), str(tmp_path / "copy.sqlite"))
    with open_database(str(tmp_path / "copy.sqlite")).reading() as connection:
        assert check(connection) == []


def test_a_rule_replaced_by_an_idle_one_is_named(stored, store_of):
    with store_of(stored).connected() as connection:
        connection.exec_driver_sql("DROP TRIGGER cell_kept")
        connection.exec_driver_sql(
            "CREATE TRIGGER cell_kept BEFORE UPDATE ON cell BEGIN SELECT 1; END"
        )
    assert any("cell_kept" in p.message for p in problems(store_of(stored)))


def test_a_broken_campaign_is_not_copied(kept, tmp_path):
    forge(kept, *BOTH["a blend that is not whole"][0])
    with pytest.raises(Refused):
        copy_campaign(open_database(kept.where), str(tmp_path / "copy.sqlite"))
    assert not (tmp_path / "copy.sqlite").exists()


def test_missing_spectra_and_missing_rules_do_not_keep_from_a_backup(kept, tmp_path):
    with kept.connected() as connection:
        on = " ON cell" if kept.kind == "postgresql" else ""
        connection.exec_driver_sql(f"DROP TRIGGER cell_kept{on}")
    assert backup(open_database(kept.where), str(tmp_path / "b.sqlite")).entries == 2


HEAD = "cell,measured_at,potential_V,temperature_C,R_ct,R_ct_se\n"


@pytest.mark.parametrize(
    ("row", "said"),
    [
        ("C1,2026-04-01T10:00Z,3.4,25,1e12,", "R_ct is 1e+12"),
        ("C1,2026-04-01T10:00Z,3.4,800,40,", "the temperature is 800"),
        ("C1,2026-04-01T10:00Z,34,25,40,", "the potential is 34 V"),
        ("C1,2199-04-01T10:00Z,3.4,25,40,", "after it was entered"),
        ("C1,2026-04-01T10:00Z,3.4,25,40,90", "2.25 times its value"),
    ],
)
def test_the_implausible_is_remarked_with_a_remedy(kept, filled, tmp_path, row, said):
    filled(kept.where, tmp_path, HEAD + row + "\n", "odd.csv")
    assert problems(kept) == []
    (remark,) = problems(kept, grave=False)
    assert said in remark.message and remark.remedy
