"""Withdrawing ends rows and deletes none; an import is taken back whole."""

import pytest

from campaign.errors import Refused
from campaign.ledger import schema


@pytest.fixture
def kept(bench, make_row):
    bench.enter(make_row(1), make_row(2, R_ct=43.0))
    return bench


def rows(bench):
    """Every row of every ledgered table, without the mark that ends it."""
    found = {}
    for table in ("cell", "electrode", "electrolyte", "measurement", "fit", "fitted_value"):
        names = [c.name for c in schema.metadata.tables[table].c if c.name != "ended_by"]
        columns = ", ".join(f'"{name}"' for name in names)
        found[table] = set(bench.ask(f"SELECT {columns} FROM {table}"))
    return found


def test_withdrawing_deletes_nothing(kept):
    before = rows(kept)
    assert kept.withdraw("cell", "A") == {"cell": 1, "measurement": 2, "fit": 2}
    after = rows(kept)
    assert all(before[table] <= after[table] for table in before)
    assert kept.measurements() == [] and kept.cells() == []
    assert len(kept.measurements(as_of=2)) == 2
    assert kept.problems() == []


def test_withdrawing_a_fit_leaves_its_measurement_without_one(kept):
    kept.withdraw("fit", 1)
    assert kept.values() == [None, 43.0]
    assert len(kept.fits()) == 1


@pytest.mark.parametrize("kind", ["electrode", "electrolyte"])
def test_what_cells_stand_on_stays(kept, kind):
    before = kept.digest()
    with pytest.raises(Refused, match="1 cell stands on this"):
        kept.withdraw(kind, "E" if kind == "electrode" else "1 M NaPF6 in PC")
    assert kept.digest() == before


def test_what_nothing_stands_on_can_go(kept):
    kept.withdraw("cell", "A")
    assert kept.withdraw("electrode", "E") == {"electrode": 1}
    assert kept.withdraw("electrolyte", "1 M NaPF6 in PC") == {"electrolyte": 1}
    assert kept.problems() == []


def test_nothing_is_withdrawn_twice(kept):
    kept.withdraw("measurement", 1)
    with pytest.raises(Refused, match="withdrawn or superseded"):
        kept.withdraw("measurement", 1)


def test_nothing_withdrawn_comes_back_by_itself(kept, make_row):
    kept.withdraw("measurement", 1)
    outcome = kept.enter(make_row(1), make_row(2, R_ct=43.0))
    assert (outcome.unchanged, outcome.withdrawn, outcome.measurements) == (2, 1, 0)
    assert kept.values() == [43.0]
    faults = kept.faults(make_row(1, R_ct=50.0))
    assert "withdrawn" in faults[0].message and "--restore" in faults[0].expected


def test_restoring_enters_it_again_under_a_new_number(kept, make_row):
    kept.withdraw("measurement", 1)
    outcome = kept.enter(make_row(1), make_row(2, R_ct=43.0), restore=True)
    assert (outcome.measurements, outcome.unchanged) == (1, 1)
    assert [m["record"] for m in kept.measurements()] == [3, 2]
    assert kept.enter(make_row(1), restore=True).unchanged == 1
    assert kept.problems() == []


def test_restoring_a_withdrawn_fit(kept, make_row):
    kept.withdraw("fit", 1)
    assert kept.enter(make_row(1)).unchanged == 1
    outcome = kept.enter(make_row(1), restore=True)
    assert (outcome.measurements, outcome.refits) == (0, 1)
    assert kept.values() == [41.2, 43.0]


def test_restoring_rows_of_a_withdrawn_cell_makes_a_new_cell(kept, make_row):
    kept.withdraw("cell", "A")
    assert kept.enter(make_row(1)).withdrawn == 1
    outcome = kept.enter(make_row(1), restore=True)
    assert outcome.cells == ["A"]
    assert kept.cells()[0]["record"] == 2
    assert kept.values() == [41.2]
    assert kept.problems() == []


def test_an_import_is_taken_back_whole(kept, make_row):
    kept.enter(make_row(3), make_row(4, cell="B"), name="second.csv")
    counts = kept.withdraw_import(2)
    assert counts == {"measurement": 2, "fit": 2, "cell": 1}
    assert kept.values() == [41.2, 43.0]
    assert [c["cell"] for c in kept.cells()] == ["A"]
    assert kept.problems() == []


def test_an_import_that_later_entries_stand_on_stays(kept, make_row):
    kept.enter(make_row(3))
    before = kept.digest()
    with pytest.raises(Refused, match="entered later"):
        kept.withdraw_import(1)
    assert kept.digest() == before


def test_an_import_is_taken_back_once(kept):
    kept.withdraw_import(1)
    with pytest.raises(Refused, match="taken back already"):
        kept.withdraw_import(1)
    with pytest.raises(Refused, match="no import 9; those made are 1"):
        kept.withdraw_import(9)


def test_a_refit_falls_back_to_the_fit_before(kept, make_row):
    kept.enter(make_row(1, R_ct=50.0), refit=True)
    assert kept.values() == [50.0, 43.0]
    kept.withdraw_import(2)
    assert kept.values() == [41.2, 43.0]
    assert kept.measurements()[0]["R_ct_se"] == 0.8
    assert kept.values(as_of=3) == [50.0, 43.0]
    assert kept.problems() == []


def test_a_refit_superseded_since_leaves_the_later_fit_current(kept, make_row):
    kept.enter(make_row(1, R_ct=50.0), refit=True)
    kept.enter(make_row(1, R_ct=60.0), refit=True)
    kept.withdraw_import(2)
    assert kept.values() == [60.0, 43.0]
    assert kept.problems() == []


def test_a_refit_of_a_measurement_withdrawn_since(kept, make_row):
    kept.enter(make_row(1, R_ct=50.0), make_row(3), refit=True)
    kept.withdraw("measurement", 1)
    kept.withdraw_import(2)
    assert kept.values() == [43.0]
    assert kept.problems() == []


def test_a_refit_withdrawn_since_falls_back_no_further(kept, make_row):
    kept.enter(make_row(1, R_ct=50.0), make_row(3), refit=True)
    current = next(f["record"] for f in kept.fits() if f["measurement"] == 1)
    kept.withdraw("fit", current)
    kept.withdraw_import(2)
    assert kept.values() == [None, 43.0]
    assert kept.problems() == []


def test_what_was_amended_since_goes_with_its_import(kept, make_row):
    kept.enter(make_row(3), name="second.csv")
    kept.amend("measurement", 3, potential_V="3.5")
    kept.amend("fit", 3, R_ct="44")
    kept.withdraw_import(2)
    assert kept.values() == [41.2, 43.0]
    assert kept.problems() == []


def test_an_amended_cell_of_an_import_goes_with_it(kept):
    kept.amend("cell", "A", area_cm2="1.2")
    kept.withdraw_import(1)
    assert kept.cells() == [] and kept.measurements() == []
    assert kept.problems() == []


def test_what_was_taken_back_can_be_imported_again_with_restore(kept, make_row):
    kept.withdraw_import(1)
    assert kept.enter(make_row(1), make_row(2, R_ct=43.0)).withdrawn == 2
    outcome = kept.enter(make_row(1), make_row(2, R_ct=43.0), restore=True)
    assert (outcome.measurements, outcome.electrodes) == (2, ["E"])
    assert kept.values() == [41.2, 43.0]


def test_the_whole_life_of_a_record_is_told(kept, make_row):
    kept.amend("measurement", 1, note="first")
    kept.enter(make_row(1, R_ct=50.0), refit=True)
    kept.withdraw("measurement", 1)
    told = [(e["entry"], e["action"]) for e in kept.history("measurement", 1)]
    assert told == [(2, "import"), (3, "amend"), (4, "import"), (5, "withdraw")]
