"""Importing flat tables: all rows or none, the same rows once, contradictions refused."""

import hashlib
import shutil

import pytest

from campaign.errors import Refused


def columns(faults):
    return sorted((f.line, f.column) for f in faults)


# What one file makes --------------------------------------------------------------------------


def test_one_file_fills_an_empty_campaign(bench, make_row):
    outcome = bench.enter(
        make_row(1, material="NVP", form="thin film"),
        make_row(2, cell="B", electrolyte="1.0 mol/L NaPF6 / PC"),
        make_row(3, cell="C", electrode="F", ion="Na+", electrolyte="0.5 M NaClO4 in EC:DMC 1:1"),
    )
    added = outcome.as_dict()["added"]
    assert added == {"electrodes": 2, "electrolytes": 2, "cells": 3, "measurements": 3}
    assert outcome.cells == ["A", "B", "C"]
    first = bench.measurements()[0]
    assert (first["R_el"], first["R_ct"], first["R_ct_se"]) == (4.1, 41.2, 0.8)
    assert first["measured_at"] == "2026-03-01T10:00+01:00"
    assert first["temperature_C"] == 25
    assert bench.problems() == []


def test_a_preview_writes_nothing_and_says_the_same(bench, make_row):
    before = bench.digest()
    preview = bench.enter(make_row(1), dry_run=True).as_dict()
    assert bench.digest() == before
    done = bench.enter(make_row(1)).as_dict()
    assert preview["added"] == done["added"] and preview["new"] == done["new"]
    assert preview["dry_run"] and not done["dry_run"]


def test_the_second_import_of_a_file_adds_nothing(bench, make_row):
    rows = [make_row(day, R_sl="absent" if day == 2 else None) for day in (1, 2, 3)]
    bench.enter(*rows)
    before = bench.digest()
    outcome = bench.enter(*rows)
    assert outcome.unchanged == 3 and not any(outcome.as_dict()["added"].values())
    assert bench.digest() == before


def test_a_grown_file_adds_what_is_new(bench, make_row):
    bench.enter(make_row(1), make_row(2))
    outcome = bench.enter(make_row(1), make_row(2), make_row(3))
    assert (outcome.measurements, outcome.unchanged) == (1, 2)


def test_one_instant_is_one_measurement_whatever_its_offset(bench, make_row):
    bench.enter(make_row(1))
    outcome = bench.enter(make_row(1, measured_at="2026-03-01T09:00Z"))
    assert (outcome.measurements, outcome.unchanged) == (0, 1)


def test_values_agree_to_one_part_in_a_thousand_million(bench, make_row):
    bench.enter(make_row(1, R_ct=41.2))
    assert bench.enter(make_row(1, R_ct=41.2 * (1 + 5e-10))).unchanged == 1
    faults = bench.faults(make_row(1, R_ct=41.2 * (1 + 5e-9)))
    assert columns(faults) == [(2, "R_ct")]


# Rows that differ -----------------------------------------------------------------------------


def test_other_values_are_refused_unless_they_are_a_refit(bench, make_row):
    bench.enter(make_row(1))
    faults = bench.faults(make_row(1, R_ct=50.0))
    assert "41.2" in faults[0].message and faults[0].value == "50.0"
    outcome = bench.enter(make_row(1, R_ct=50.0), refit=True)
    assert (outcome.refits, outcome.measurements) == (1, 0)
    assert bench.values() == [50.0]
    assert bench.ask("SELECT count(*) FROM fit WHERE ended_by IS NULL") == [(1,)]


@pytest.mark.parametrize(
    "change", [{"R_ct_se": 0.9}, {"R_ct_se": None}, {"R_el": None}, {"R_lat": "absent"}]
)
def test_a_fit_differs_in_its_errors_and_its_quantities_too(bench, make_row, change):
    bench.enter(make_row(1))
    assert len(bench.faults(make_row(1, **change))) == 1


def test_rows_of_a_superseded_fit_are_unchanged(bench, make_row):
    bench.enter(make_row(1))
    bench.enter(make_row(1, R_ct=50.0), refit=True)
    before = bench.digest()
    assert bench.enter(make_row(1)).unchanged == 1
    assert bench.enter(make_row(1), refit=True).unchanged == 1
    assert bench.digest() == before
    assert bench.values() == [50.0]


@pytest.mark.parametrize(
    ("change", "column"),
    [
        ({"potential_V": 3.5}, "potential_V"),
        ({"temperature_C": 30}, "temperature_C"),
        ({"ion_content": 0.5}, "ion_content"),
    ],
)
@pytest.mark.parametrize("refit", [False, True])
def test_another_condition_at_the_same_instant_is_refused(bench, make_row, change, column, refit):
    bench.enter(make_row(1))
    faults = bench.faults(make_row(1, **change), refit=refit)
    assert columns(faults) == [(2, column)]
    assert "amend measurement 1" in faults[0].message


def test_amending_leaves_the_old_file_importable(bench, make_row):
    bench.enter(make_row(1), make_row(2))
    bench.amend("measurement", 1, potential_V="3.45")
    bench.amend("fit", 2, R_ct="44")
    bench.amend("cell", "A", area_cm2="1.2")
    bench.amend("electrode", "E", material="NVP")
    before = bench.digest()
    assert bench.enter(make_row(1), make_row(2)).unchanged == 2
    assert bench.digest() == before


# Contradictions -------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("change", "column"),
    [
        ({"area_cm2": 2.0}, "area_cm2"),
        ({"electrode": "F"}, "electrode"),
        ({"electrolyte": "0.5 M NaPF6 in PC"}, "electrolyte"),
        ({"reference": "Ag/AgCl"}, "reference"),
        ({"configuration": "two-electrode"}, "configuration"),
        ({"specimen": "S1"}, "specimen"),
        ({"ion": "Li"}, "ion"),
        ({"material": "NFM"}, "material"),
        ({"assembled_at": "2026-02-01T10:00Z"}, "assembled_at"),
    ],
)
def test_a_cell_does_not_change_from_row_to_row(bench, make_row, change, column):
    first = make_row(1, material="NVP", specimen="S0", configuration="three-electrode",
                     assembled_at="2026-02-02T10:00Z")  # fmt: skip
    inside = bench.faults(first, {**first, **make_row(2), **change})
    assert (3, column) in columns(inside)
    assert "line 2" in next(f for f in inside if f.column == column).message
    bench.enter(first)
    against = bench.faults({**first, **make_row(2), **change})
    assert (2, column) in columns(against)


def test_other_spellings_are_no_contradiction(bench, make_row):
    bench.enter(make_row(1, electrolyte="1 M NaPF6 in EC:DMC (1:1 v/v)", ion="Na"))
    other = make_row(2, electrolyte="1.0 mol/L NaPF6 in DMC/EC 1:1 vol", ion="Na+",
                     area_cm2="1.130", reference="Na+/Na",
                     configuration="Three-electrode")  # fmt: skip
    outcome = bench.enter(other)
    assert (outcome.measurements, outcome.electrolytes) == (1, [])


def test_duplicates_inside_a_file_are_refused(bench, make_row):
    faults = bench.faults(make_row(1), make_row(2), make_row(1, measured_at="2026-03-01T09:00Z"))
    assert columns(faults) == [(4, "measured_at")]
    assert "line 2" in faults[0].message


def test_what_a_new_cell_needs(bench, make_row):
    bare = {"cell": "A", "measured_at": "2026-03-01T10:00Z", "potential_V": 3.4,
            "temperature_C": 25, "R_ct": 41.2}  # fmt: skip
    faults = bench.faults(bare)
    assert {f.column for f in faults} == {"electrode", "area_cm2", "electrolyte"}
    assert all(f.line == 2 and f.expected for f in faults)
    bench.enter(make_row(1))
    assert bench.enter({**bare, "measured_at": "2026-03-02T10:00Z"}).measurements == 1


def test_the_row_that_describes_a_cell_need_not_be_its_first(bench, make_row):
    bare = {k: v for k, v in make_row(1).items() if k not in ("electrode", "ion", "electrolyte")}
    assert bench.enter(make_row(2), bare).measurements == 2


def test_every_fault_of_every_kind_at_once(bench, make_row):
    faults = bench.faults(
        make_row(1, R_ct="much"),
        make_row(2, temperature_C=-400),
        make_row(3, cell="B", electrolyte="1 M of salt (in"),
        make_row(4, cell="C", area_cm2=None),
        make_row(5, measured_at="03/04/2026"),
        make_row(6),
        make_row(6),
    )
    assert columns(faults) == [
        (2, "R_ct"), (3, "temperature_C"), (4, "electrolyte"), (5, "area_cm2"),
        (6, "measured_at"), (8, "measured_at"),
    ]  # fmt: skip
    assert all(f.file == "table.csv" and f.message and f.expected for f in faults)


@pytest.mark.parametrize(
    ("drop", "add", "column"),
    [
        ("temperature_C", {}, "temperature_C"),
        ("measured_at", {}, "measured_at"),
        ("cell", {}, "cell"),
        ("potential_V", {"E/furlong": 3.4}, "E/furlong"),
        ("area_cm2", {"A/mm3": 1}, "A/mm3"),
        ("note", {"remark of the day": "x"}, "remark of the day"),
    ],
)
def test_a_fault_in_the_header_is_said_once(bench, make_row, drop, add, column):
    rows = [{k: v for k, v in {**make_row(d), **add}.items() if k != drop} for d in (1, 2, 3)]
    faults = bench.faults(*rows)
    assert columns(faults) == [(1, column)]


def test_an_electrode_without_a_stated_ion(bench, make_row):
    outcome = bench.enter(make_row(1, ion=None))
    assert any("taken to be Na" in warning for warning in outcome.warnings)
    faults = bench.faults(
        make_row(2, cell="B", electrode="F", ion=None, electrolyte="1 M NaPF6 + 1 M LiPF6 in PC")
    )
    assert columns(faults) == [(2, "ion")]


# Specimens and configurations -----------------------------------------------------------------


def test_a_specimen_is_its_own_cell_by_default_and_may_move(bench, make_row):
    bench.enter(make_row(1), make_row(2, cell="B", specimen="A", electrolyte="2 M NaPF6 in PC"))
    assert [(c["cell"], c["specimen"]) for c in bench.cells()] == [("A", "A"), ("B", "A")]


def test_a_specimen_of_another_electrode_is_refused(bench, make_row):
    bench.enter(make_row(1, specimen="S"))
    faults = bench.faults(make_row(2, cell="B", electrode="F", specimen="S"))
    assert columns(faults) == [(2, "specimen")]
    inside = bench.faults(
        make_row(3, cell="X", specimen="T"), make_row(4, cell="Y", electrode="F", specimen="T")
    )
    assert columns(inside) == [(3, "specimen")]


def test_only_a_symmetric_cell_may_leave_its_potential_empty(bench, make_row):
    empty = {"potential_V": None, "reference": None}
    outcome = bench.enter(make_row(1, configuration="symmetric", **empty))
    assert outcome.measurements == 1 and bench.measurements()[0]["potential_V"] is None
    for configuration in (None, "three-electrode", "two-electrode"):
        faults = bench.faults(make_row(2, cell="B", configuration=configuration, **empty))
        assert columns(faults) == [(2, "potential_V")]
    assert bench.enter(make_row(3, **empty)).measurements == 1


def test_a_measurement_without_any_fitted_value_is_refused(bench, make_row):
    faults = bench.faults(make_row(1), make_row(2, R_el=None, R_ct=None, R_ct_se=None))
    assert len(faults) == 1 and "no fitted value" in faults[0].message
    assert bench.enter(make_row(1, R_el=None, R_ct=None, R_ct_se=None, R_sl="absent"))


# Values per area ------------------------------------------------------------------------------


def per_area(make_row, day, **changes):
    row = make_row(day, R_ct=None, R_ct_se=None, **changes)
    return {**row, "R_ct/(Ω cm2)": 50.0, "R_ct_se/%": 2, "Q_ct/(uS s^n cm-2)": 10, "n_ct": 0.9}


def settled(bench):
    return [(m["R_ct"], m["R_ct_se"], m.get("Q_ct")) for m in bench.measurements()]


AS_FITTED = (pytest.approx(25.0), pytest.approx(0.5), pytest.approx(2e-5))  # A = 2 cm2


def test_values_per_area_are_settled_from_the_row(bench, make_row):
    bench.enter(per_area(make_row, 1, area_cm2=2.0))
    assert settled(bench) == [AS_FITTED]


def test_values_per_area_are_settled_from_another_row_of_the_file(bench, make_row):
    bench.enter(per_area(make_row, 1, area_cm2=None), per_area(make_row, 2, area_cm2=2.0))
    assert settled(bench) == [AS_FITTED, AS_FITTED]


def test_values_per_area_are_settled_from_the_ledger(bench, make_row):
    bench.enter(make_row(1, area_cm2=2.0))
    bench.enter(per_area(make_row, 2, area_cm2=None))
    assert settled(bench)[1] == AS_FITTED
    bench.log(per_area(make_row, 3, area_cm2=None))
    assert settled(bench)[2] == AS_FITTED


def test_values_per_area_are_settled_from_another_file_of_the_same_import(bench, make_row):
    first = bench.write([per_area(make_row, 1, area_cm2=None, cell="A")], "one.csv")
    second = bench.write([make_row(2, area_cm2=2.0)], "two.csv")
    with pytest.raises(Refused):
        bench.enter_files(first)
    bench.enter_files(second, first)
    assert settled(bench)[0] == AS_FITTED


def test_values_per_area_of_an_unknown_area_are_refused(bench, make_row):
    faults = bench.faults(per_area(make_row, 1, area_cm2=None))
    assert any("area" in f.message and f.line == 2 for f in faults)


# Several files --------------------------------------------------------------------------------


def test_several_files_are_several_imports_of_one_transaction(bench, make_row):
    one = bench.write([make_row(1)], "one.csv")
    two = bench.write([make_row(2), make_row(3, cell="B")], "two.csv")
    outcome = bench.enter_files(one, two)
    assert (outcome.measurements, outcome.imports) == (3, [1, 2])
    assert [e["what"] for e in bench.history()[1:]] == [
        "import 1: one.csv", "import 2: two.csv",
    ]  # fmt: skip
    bench.withdraw_import(2)
    assert len(bench.measurements()) == 1


def test_a_fault_in_one_file_keeps_all_out(bench, make_row):
    good = bench.write([make_row(1)], "good.csv")
    bad = bench.write([make_row(2, R_ct=-1)], "bad.csv")
    before = bench.digest()
    with pytest.raises(Refused) as caught:
        bench.enter_files(good, bad)
    assert bench.digest() == before
    assert [(f.file, f.line) for f in caught.value.faults] == [("bad.csv", 2)]


def test_the_same_row_in_two_files_is_refused(bench, make_row):
    names = [bench.write([make_row(1)], name) for name in ("one.csv", "two.csv")]
    with pytest.raises(Refused, match="already"):
        bench.enter_files(*names)


def test_one_file_given_twice_is_refused(bench, make_row):
    name = bench.write([make_row(1)])
    with pytest.raises(Refused, match="given twice"):
        bench.enter_files(name, name)


@pytest.mark.parametrize("name", ["no.csv", ".", "x" * 300, "no/such/table.csv"])
def test_what_is_no_file_is_refused(bench, name):
    with pytest.raises(Refused, match=r"folder|no file"):
        bench.enter_files(str(bench.folder / name))


# Spectra --------------------------------------------------------------------------------------


def test_a_spectrum_file_is_kept_by_its_digest(bench, make_row):
    (bench.folder / "spectra").mkdir()
    (bench.folder / "spectra" / "a.txt").write_bytes(b"1e5 2 3\n")
    bench.enter(make_row(1, spectrum="spectra/a.txt"))
    (stored,) = bench.ask("SELECT spectrum, spectrum_sha256 FROM measurement")
    # FIPS 180-4, as the standard library computes it.
    assert stored == ("spectra/a.txt", hashlib.sha256(b"1e5 2 3\n").hexdigest())
    assert bench.problems() == []
    (bench.folder / "spectra" / "a.txt").write_bytes(b"1e5 2 4\n")
    assert "was changed since" in bench.problems()[0].message
    (bench.folder / "spectra" / "a.txt").unlink()
    assert "not there" in bench.problems()[0].message


def test_a_spectrum_beside_the_table_is_found(bench, make_row, tmp_path):
    elsewhere = tmp_path / "elsewhere"
    elsewhere.mkdir()
    (elsewhere / "a.txt").write_text("x")
    table = bench.write([make_row(1, spectrum="a.txt")])
    shutil.move(table, elsewhere / "table.csv")
    bench.enter_files(str(elsewhere / "table.csv"))
    assert bench.ask("SELECT spectrum FROM measurement") == [("elsewhere/a.txt",)]
    assert bench.problems() == []


@pytest.mark.parametrize("name", ["missing.txt", "../../nowhere.txt", "y" * 300])
def test_a_spectrum_that_is_not_there_is_named_and_remarked(bench, make_row, name):
    bench.enter(make_row(1, spectrum=name))
    assert bench.ask("SELECT spectrum, spectrum_sha256 FROM measurement") == [(name, None)]
    assert bench.problems() == []
    said = "outside the campaign's folder" if ".." in name else "not there"
    assert any(said in remark.message for remark in bench.remarks())


# Logging --------------------------------------------------------------------------------------


def test_logging_is_the_import_of_one_row(bench, make_row):
    assert bench.log(make_row(1)).measurements == 1
    assert bench.log(make_row(1)).unchanged == 1
    assert bench.enter(make_row(1)).unchanged == 1
    assert [e["action"] for e in bench.history()] == ["start", "log"]


def test_logging_takes_json_numbers_and_uncertainties(bench, make_row):
    given = {**make_row(1, R_ct="41.2(8)", R_ct_se=None), "R_lat": "absent", "cycle": 3}
    bench.log(given)
    (stored,) = bench.measurements()
    assert (stored["R_ct"], stored["R_ct_se"]) == (41.2, pytest.approx(0.8))
    assert (stored["R_lat"], stored["cycle"]) == ("absent", 3)


def test_a_refused_log_writes_nothing(bench, make_row):
    before = bench.digest()
    with pytest.raises(Refused):
        bench.log(make_row(1, R_ct=-1))
    with pytest.raises(Refused):
        bench.log(make_row(1, electrolyte="what"))
    assert bench.digest() == before


@pytest.mark.parametrize(
    "text",
    [
        b"", b"null", b"[]", b"3", b'"x"', b"{", b'{"cell": NaN}', b'{"R_ct": Infinity}',
        b'{"R_ct": 1e999}', b'{"R_ct": true}', b'{"R_ct": [1]}', b'{"cell": {"a": 1}}',
        b'{"cell": "A", "cell": "B"}', b"\xff\xfe", b'{"R_ct": 1' + b"0" * 400 + b"}",
        b'{"R_ct": 1' + b"0" * 5000 + b"}", b"[" * 200_000, b'{"cell": "\\u0000"}',
        b'{"cell": "\\ud800"}', b'{"\\ud800": 1}', b'{"nonsense": 1}', b" " * 1_000_001,
    ],
)  # fmt: skip
def test_nothing_on_standard_input_does_more_than_be_refused(bench, text):
    import io

    from campaign.ledger.logging import read_row

    with pytest.raises(Refused):
        read_row(bench.database, "-", {}, io.BytesIO(text))
