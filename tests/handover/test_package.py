"""Handing over: the package is valid for others and comes back as the same campaign."""

from __future__ import annotations

import json
import shutil

import pytest

from campaign.errors import Refused
from campaign.ledger import selecting
from campaign.ledger.adding import add_electrode, add_electrolyte, add_species
from campaign.ledger.amending import amend
from campaign.ledger.checking import check
from campaign.ledger.database import open_database
from campaign.ledger.demonstration import build
from campaign.ledger.files import read_files
from campaign.ledger.filters import Filter
from campaign.ledger.history import head
from campaign.ledger.importing import import_tables
from campaign.ledger.package.reading import import_package, is_package
from campaign.ledger.package.workbook import write_workbook
from campaign.ledger.package.writing import write_package
from campaign.ledger.settings import zone
from campaign.ledger.snapshot import electrode_facts, electrolyte_facts, snapshot
from campaign.ledger.starting import start

KINDS = ("electrodes", "electrolytes", "cells", "measurements", "fits")


def lists(database):
    with database.reading() as connection:
        return {
            kind: getattr(selecting, f"list_{kind}")(connection, Filter()) for kind in KINDS
        } | {
            "zone": zone(connection),
            "electrode facts": electrode_facts(connection),
            "electrolyte facts": electrolyte_facts(connection),
        }


@pytest.fixture(scope="module")
def whole(tmp_path_factory):
    """The demo, with everything a campaign may hold besides."""
    folder = tmp_path_factory.mktemp("whole")
    database = open_database(str(build(folder / "demo").database))
    add_species(database, "HFE-7", ["solvent"], {"cations": None, "source": "data sheet",
                                                 "flash_point_C": 60.0})  # fmt: skip
    add_electrolyte(
        database, "1 M NaPF6 in PC:HFE-7 (1:1 v/v)", {"density_g_cm3": "1.2"}, ["25:8.2"]
    )
    add_electrode(
        database, "=SUM(A1)", "Na",
        {"note": "+ \"quoted\", with, commas and 'lines' é", "pore_resistance_ohm_cm2": "3.1"},
        ["3.36:3.40:Na/Na+"],
    )  # fmt: skip
    amend(database, "cell", "C07", {"note": "''=not a formula"}, "a note", "test")
    amend(database, "electrode", "hard carbon C", {"diffusion_length_um": "3.3"}, "known now")
    return database


@pytest.fixture(scope="module")
def package(whole, tmp_path_factory):
    folder = tmp_path_factory.mktemp("handed") / "over"
    write_package(whole, folder)
    return folder


def fresh(tmp_path, name="fresh.sqlite"):
    start(str(tmp_path / name), "UTC", "test")
    return open_database(str(tmp_path / name))


def test_the_library_of_the_standard_finds_it_valid(package):
    # frictionless-py is the reference implementation of Data Package and Table Schema.
    import frictionless

    report = frictionless.validate(str(package / "datapackage.json"))
    assert report.valid, report.flatten(["type", "message"])
    assert report.stats["tasks"] == 13


def test_every_field_is_described_and_numbers_state_their_unit(package):
    descriptor = json.loads((package / "datapackage.json").read_text())
    fields = {
        (table["name"], one["name"]): one
        for table in descriptor["resources"]
        for one in table["schema"]["fields"]
    }
    assert all(one["description"] for one in fields.values())
    assert fields["cell", "area_cm2"]["unit"] == "cm2"
    assert fields["measurement", "temperature_K"]["unit"] == "K"
    assert fields["electrode", "pore_resistance_ohm_cm2"]["unit"] == "ohm cm2"
    assert "ohm" in fields["fitted_value", "quantity"]["description"]


def test_it_comes_back_as_the_same_campaign(whole, package, tmp_path):
    back = fresh(tmp_path)
    import_package(back, str(package))
    assert lists(back) == lists(whole)
    with back.reading() as connection, whole.reading() as before:
        ours, theirs = snapshot(connection), snapshot(before)
        assert ours.readings.measurement.tolist() == theirs.readings.measurement.tolist()
        for name, column in theirs.readings.values.items():
            assert ours.readings.values[name].tobytes() == column.tobytes()
        assert [problem for problem in check(connection) if problem.grave] == []
        assert head(connection)["hash"] != head(before)["hash"]
    again = tmp_path / "again"
    write_package(back, again)
    for file in package.glob("*.csv"):
        assert (again / file.name).read_bytes() == file.read_bytes()


def test_a_dry_run_writes_nothing(package, tmp_path):
    back = fresh(tmp_path)
    assert import_package(back, str(package), dry_run=True)["cell"] == 77
    assert lists(back)["cells"] == []


def test_it_is_entered_into_an_empty_campaign_only(whole, package):
    before = lists(whole)
    with pytest.raises(Refused, match="empty campaign"):
        import_package(whole, str(package))
    assert lists(whole) == before


def _edit(folder, name, old, new):
    path = folder / name
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), encoding="utf-8")


@pytest.mark.parametrize(
    ("name", "old", "new", "said"),
    [
        ("cell.csv", "three-electrode", "two-electrode", "was changed since"),
        ("datapackage.json", '"campaign ledger"', '"something else"', "another kind"),
        ("datapackage.json", '"version": "1"', '"version": "9"', "version 9"),
        ("datapackage.json", "{", "[", "not JSON"),
    ],
)
def test_what_was_changed_is_refused_and_nothing_entered(package, tmp_path, name, old, new, said):
    copy = tmp_path / "copy"
    shutil.copytree(package, copy)
    _edit(copy, name, old, new)
    back = fresh(tmp_path)
    with pytest.raises(Refused, match=said):
        import_package(back, str(copy))
    assert lists(back)["cells"] == []


def test_a_lost_file_is_named(package, tmp_path):
    copy = tmp_path / "copy"
    shutil.copytree(package, copy)
    (copy / "fit.csv").unlink()
    with pytest.raises(Refused, match=r"fit\.csv"):
        import_package(fresh(tmp_path), str(copy))


def test_a_folder_with_something_in_it_is_left_as_it_is(whole, tmp_path):
    (tmp_path / "mine.txt").write_text("mine")
    with pytest.raises(Refused, match="holds something already"):
        write_package(whole, tmp_path)
    assert [file.name for file in tmp_path.iterdir()] == ["mine.txt"]
    assert not is_package(str(tmp_path))


def test_the_workbook_holds_no_formula_and_reads_back_as_a_flat_table(whole, tmp_path):
    import openpyxl

    path = tmp_path / "all.xlsx"
    counts = write_workbook(whole, path)
    book = openpyxl.load_workbook(path)
    cells = [cell for sheet in book for row in sheet.iter_rows() for cell in row]
    assert not [cell for cell in cells if cell.data_type == "f"]
    assert any(cell.value == "'=SUM(A1)" for cell in cells)
    back = fresh(tmp_path)
    add_species(back, "HFE-7", ["solvent"], {"cations": None, "source": "data sheet"})
    outcome = import_tables(back, read_files(back, [str(path)], sheet="measurements"))
    assert outcome.measurements == counts["measurements"] == 604
    drop = ("record", "fit", "note", "spectrum")
    def values(rows):
        return [{k: v for k, v in row.items() if k not in drop} for row in rows
                if "fit" in row]  # fmt: skip
    ours, theirs = lists(back)["measurements"], lists(whole)["measurements"]
    _close(values(ours), values(theirs))


def _close(ours, theirs):
    assert len(ours) == len(theirs)
    for a, b in zip(ours, theirs, strict=True):
        assert a.keys() == b.keys()
        for key in a:
            if isinstance(b[key], float):
                assert a[key] == pytest.approx(b[key], rel=1e-9)
            else:
                assert a[key] == b[key]

