"""Amending ends a row and inserts its successor; nothing that was is lost."""

import pytest

from campaign.errors import Refused


@pytest.fixture
def kept(bench, make_row):
    bench.enter(make_row(1), make_row(2, R_ct=43.0), make_row(3, R_sl="absent"))
    return bench


def test_an_amendment_ends_a_row_and_inserts_its_successor(kept):
    changed = kept.amend("cell", "A", area_cm2="1.2")
    assert changed == {"area_cm2": (1.13, 1.2)}
    assert kept.ask("SELECT id, record, area_cm2, entry, ended_by FROM cell ORDER BY id") == [
        (1, 1, 1.13, 2, 3),
        (2, 1, 1.2, 3, None),
    ]
    assert kept.problems() == []


def test_a_record_keeps_its_number_through_amendments_and_nothing_hangs_loose(kept):
    for area in ("1.2", "1.3", "1.4"):
        kept.amend("cell", "A", area_cm2=area)
    (cell,) = kept.cells()
    assert (cell["record"], cell["area_cm2"], cell["measurements"]) == (1, 1.4, 3)
    assert kept.values() == [41.2, 43.0, 41.2]


def test_the_past_can_be_asked_for(kept):
    kept.amend("cell", "A", area_cm2="1.2")
    kept.amend("fit", 2, R_ct="44.0")
    kept.withdraw("measurement", 1)
    assert [c["area_cm2"] for c in kept.cells(as_of=2)] == [1.13]
    assert [c["area_cm2"] for c in kept.cells(as_of=3)] == [1.2]
    assert kept.values(as_of=3) == [41.2, 43.0, 41.2]
    assert kept.values(as_of=4) == [41.2, 44.0, 41.2]
    assert kept.values() == [44.0, 41.2]
    assert kept.values(as_of=1) == []


def test_as_of_reads_only_what_was_in_force_by_the_rule(kept):
    """The rule itself in SQL: entry <= S and (ended_by is null or ended_by > S)."""
    kept.amend("fit", 2, R_ct="44.0")
    kept.withdraw("measurement", 3)
    for entry in range(6):
        rule = f"entry <= {entry} AND (ended_by IS NULL OR ended_by > {entry})"
        (expected,) = kept.ask(f"SELECT count(*) FROM measurement WHERE {rule}")[0]
        assert len(kept.measurements(as_of=entry)) == expected


def test_a_fit_is_amended_with_all_its_values(kept):
    kept.amend("fit", 1, R_ct="44.0(5)", R_el="")
    first = kept.measurements()[0]
    assert (first["R_ct"], first["R_ct_se"], "R_el" in first) == (44.0, 0.5, False)
    rows = kept.ask("SELECT fit, quantity, value, se FROM fitted_value WHERE fit IN (1, 4)")
    assert sorted(rows) == [
        (1, "R_ct", 41.2, 0.8), (1, "R_el", 4.1, None), (4, "R_ct", 44.0, 0.5),
    ]  # fmt: skip


def test_absent_can_be_amended_to_a_value_and_back(kept):
    kept.amend("fit", 3, R_sl="3.5", R_sl_se="0.2")
    assert kept.measurements()[2]["R_sl"] == 3.5
    kept.amend("fit", 3, R_sl="absent")
    assert kept.measurements()[2]["R_sl"] == "absent"
    assert "R_sl_se" not in kept.measurements()[2]


def test_moving_a_measurement_in_time_keeps_its_offset(kept):
    kept.amend("measurement", 1, measured_at="2026-03-01T12:30+05:30")
    assert kept.measurements()[0]["measured_at"] == "2026-03-01T12:30+05:30"
    stored = kept.ask("SELECT measured_at FROM measurement WHERE ended_by IS NULL AND record = 1")
    assert stored == [("2026-03-01T07:00:00.000000Z",)]


@pytest.mark.parametrize(
    ("kind", "name", "changes", "message"),
    [
        ("cell", "A", {"area_cm2": "1.13"}, "nothing would change"),
        ("cell", "A", {"area_cm2": "0"}, "out of range"),
        ("cell", "A", {"area_cm2": "-1"}, "out of range"),
        ("cell", "A", {"area_cm2": "nan"}, "not finite"),
        ("cell", "A", {"area_cm2": "1_0"}, "not a number"),
        ("cell", "A", {"area_cm2": ""}, "cannot be empty"),
        ("cell", "A", {"aera_cm2": "1"}, "near: area_cm2"),
        ("cell", "A", {"electrode": "X"}, "no electrode 'X'"),
        ("cell", "A", {"configuration": "four-electrode"}, "not known"),
        ("cell", "B", {"area_cm2": "1"}, "no cell 'B'"),
        ("measurement", 1, {"temperature_C": "-300"}, "out of range"),
        ("measurement", 1, {"potential_V": ""}, "symmetric"),
        ("measurement", 1, {"measured_at": "03/04/2026"}, "cannot be told apart"),
        ("measurement", 1, {"f_min_Hz": "10", "f_max_Hz": "1"}, "not below"),
        ("measurement", 9, {"note": "x"}, "does not exist"),
        ("fit", 1, {"R_ct": "-4"}, "out of range"),
        ("fit", 1, {"R_ct": "absent"}, "only R_sl and R_lat"),
        ("fit", 1, {"R_ct": "", "R_el": ""}, "needs at least one value"),
        ("fit", 3, {"R_sl_se": "0.1"}, "no value"),
        ("electrode", "E", {"window_low_V": "2"}, "needs its scale"),
        ("electrode", "E", {"ion": "Xy"}, "not a known ion"),
        ("electrolyte", "1 M NaPF6 in PC", {"aqueous": "maybe"}, "neither yes nor no"),
        ("seal", "E", {"label": "x"}, "not a kind of record"),
    ],
)
def test_bad_amendments_are_refused_and_write_nothing(kept, kind, name, changes, message):
    before = kept.digest()
    with pytest.raises(Refused, match=message):
        kept.amend(kind, name, **changes)
    assert kept.digest() == before


def test_a_label_in_use_cannot_be_taken_over(kept, make_row):
    kept.enter(make_row(1, cell="B"))
    before = kept.digest()
    with pytest.raises(Refused):
        kept.amend("cell", "B", label="A")
    assert kept.digest() == before


def test_a_renamed_cell_answers_to_its_new_name_only(kept, make_row):
    kept.amend("cell", "A", label="A-1")
    assert [m["cell"] for m in kept.measurements()] == ["A-1"] * 3
    with pytest.raises(Refused, match="no cell 'A'"):
        kept.amend("cell", "A", note="x")
    assert len(kept.history("cell", 1)) == 2


def test_an_amended_electrolyte_keeps_its_components(kept):
    kept.amend("electrolyte", "1 M NaPF6 in PC", density_g_cm3="1.28")
    counted = "SELECT electrolyte, count(*) FROM electrolyte_component GROUP BY 1 ORDER BY 1"
    counts = kept.ask(counted)
    assert counts == [(1, 2), (2, 2)]
    assert kept.cells()[0]["electrolyte"] == "1 mol/L NaPF6 in PC"
