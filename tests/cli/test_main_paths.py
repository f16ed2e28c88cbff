"""The way through the program, from an empty folder to a corrected ledger."""

import csv
import io
import json

import pytest


def test_from_an_empty_folder_to_the_first_measurement(empty):
    said = empty.done("init", "--zone", "Europe/Paris").out
    assert "Europe/Paris" in said and (empty.folder / "campaign.sqlite").is_file()

    header = empty.done("template").out
    example = empty.done("template", "--example").out
    assert example.startswith(header) and example.count("\n") == 2

    empty.write("table.csv", example)
    preview = empty.done("import", "table.csv", "--dry-run").out
    assert preview.startswith("Would add 1 electrode")
    assert empty.done("list", "cells", "--json").json == {"rows": []}

    added = empty.done("import", "table.csv", "--json").json
    assert added["added"] == {"electrodes": 1, "electrolytes": 1, "cells": 1, "measurements": 1}
    again = empty.done("import", "table.csv", "--json").json
    assert again["unchanged"] == 1 and not any(again["added"].values())

    given = {"cell": "A01", "measured_at": "2026-04-02T09:30", "potential_V": 3.42,
             "temperature_C": 25, "R_el": 4.1, "R_ct": "41.2(8)"}  # fmt: skip
    logged = empty.done("log", "-", "--json", given=json.dumps(given)).json
    assert logged["added"]["measurements"] == 1
    rows = empty.done("list", "measurements", "--json").json["rows"]
    assert [row["R_ct"] for row in rows] == [41.2, 41.2]
    assert rows[1]["measured_at"] == "2026-04-02T09:30+02:00"  # summer time in the zone
    assert empty.done("check").out.endswith("The journal and all rows agree.\n")


def test_log_by_options(bench):
    run = bench.done(
        "log", "--cell", "A", "--measured_at", "2026-03-05T10:00Z", "--potential_V", "3.4",
        "--temperature_C", "25", "--R_ct", "44.0(5)", "--R_sl", "absent", "--by", "somebody",
    )  # fmt: skip
    assert run.out == "Logged 1 measurement.\n"
    row = bench.done("list", "measurements", "--json").json["rows"][-1]
    assert (row["R_ct"], row["R_ct_se"], row["R_sl"]) == (44.0, 0.5, "absent")
    assert bench.done("history", "--json").json["rows"][-1]["who"] == "somebody"


def test_add_what_a_table_does_not_hold(bench):
    for arguments in (
        ("electrode", "film F", "--ion", "Na", "--plateau", "3.3:3.4:Na/Na+",
         "--diffusion-length-um", "0.4", "--maximum-temperature-C", "60"),
        ("electrolyte", "2 M NaTFSI in DME", "--density-g-cm3", "1.1",
         "--conductivity-mS-cm", "25:8.1"),
        ("cell", "C", "--electrode", "film F", "--electrolyte", "2 M NaTFSI in DME",
         "--area-cm2", "0.5", "--assembled-at", "2026-03-01"),
        ("species", "HFE-7", "--class", "solvent", "--source", "data sheet"),
    ):  # fmt: skip
        assert "added" in bench.done("add", *arguments, "--json").json
    shown = bench.done("show", "electrode", "film F", "--json").json["record"]
    assert shown["diffusion_length_um"] == 0.4 and shown["cells"] == ["C"]
    assert bench.run("add", "electrode", "film F", "--ion", "Na").code == 1


def test_correcting_and_taking_back(bench):
    said = bench.done("amend", "cell", "A", "area_cm2=1.2", "--reason", "punch measured again")
    assert said.out == "cell A: area_cm2 was 1.13, is 1.2\n"
    bench.done("withdraw", "measurement", "1", "--reason", "reference had dried out")
    told = bench.done("history").out
    assert "punch measured again" in told and "area_cm2 was 1.13, is 1.2" in told
    bench.done("withdraw", "import", "1", "--reason", "wrong folder")
    assert bench.done("list", "measurements", "--json").json == {"rows": []}
    told = bench.done("history", "cell", "A", "--json").json["rows"]
    assert [row["action"] for row in told] == ["import", "amend", "withdraw"]
    bench.done("check")


def test_a_refit_and_a_restore(bench):
    bench.write("refit.csv", (bench.folder / "table.csv").read_text().replace("41.2,", "50.5,"))
    refused = bench.run("import", "refit.csv", "--json")
    assert refused.code == 1 and refused.json["errors"][0]["column"] == "R_ct"
    assert bench.done("import", "refit.csv", "--refit", "--json").json["refitted"] == 1
    fits = bench.done("list", "fits", "--json").json["rows"]
    assert [fit["R_ct"] for fit in fits if fit["measurement"] == 1] == [50.5]
    bench.done("withdraw", "cell", "B", "--reason", "leaked")
    kept = bench.done("import", "refit.csv", "--json").json
    assert kept["withdrawn_unchanged"] == 1
    back = bench.done("import", "refit.csv", "--restore", "--json").json
    assert back["added"]["cells"] == 1


def test_lists_in_three_forms(bench):
    kinds = ("electrodes", "electrolytes", "cells", "measurements", "fits", "imports")
    forms = ((), ("--json",), ("--csv",))
    runs = bench.all([("list", kind, *form) for kind in kinds for form in forms])
    for place, kind in enumerate(kinds):
        plain, as_json, as_csv = runs[3 * place : 3 * place + 3]
        assert {plain.code, as_json.code, as_csv.code} == {0}
        rows = as_json.json["rows"]
        assert rows and len(list(csv.DictReader(io.StringIO(as_csv.out)))) == len(rows), kind
        assert len(plain.out.splitlines()) == len(rows) + 1
        assert "\x1b" not in plain.out and "│" not in plain.out


@pytest.mark.parametrize(
    ("arguments", "count"),
    [
        (("--electrode", "film E"), 3),
        (("--salt", "NaPF6"), 3),
        (("--salt", "NaClO4"), 0),
        (("--solvents", "PC"), 3),
        (("--additives", "2 wt% FEC"), 0),
        (("--potential", "3.3:3.5"), 3),
        (("--potential", "3.5:"), 0),
        (("--temperature", "25:25"), 3),
        (("--since", "2026-03-02"), 2),
        (("--until", "2026-03-02"), 2),
        (("--as-of", "2020-01-01"), 0),
    ],
)
def test_filters(bench, arguments, count):
    assert len(bench.done("list", "measurements", *arguments, "--json").json["rows"]) == count


def test_the_head_of_the_journal_finds_a_cut(bench):
    head = bench.done("check", "--json").json["head"]["hash"]
    assert bench.done("check", "--head", head[:12], "--json").json["passed"]
    failed = bench.run("check", "--head", "f" * 64, "--json")
    assert failed.code == 1
    assert set(failed.json["errors"][0]) >= {"message", "line", "column", "value", "expected"}


def test_the_database_is_named_before_and_after_the_command_and_by_the_environment(bench, tmp_path):
    bench.done("init", "--db", "other.sqlite")
    listed = ("list", "cells", "--json")
    there = [
        bench.run("--db", "other.sqlite", *listed),
        bench.run(*listed, "--db", "other.sqlite"),
        bench.run(*listed, "--db", "sqlite:///other.sqlite"),
        bench.run(*listed, CAMPAIGN_DB="other.sqlite"),
        bench.run(*listed, "--db", "other.sqlite", CAMPAIGN_DB="campaign.sqlite"),
        bench.run("--db", "other.sqlite", *listed, CAMPAIGN_DB="campaign.sqlite"),
    ]
    assert [run.json for run in there] == [{"rows": []}] * 6
    assert len(bench.done(*listed).json["rows"]) == 2


def test_a_reader_that_leaves_early_gets_no_error(bench):
    import subprocess

    from_shell = subprocess.run(
        ["sh", "-c", "for i in 1 2 3; do cat table.csv; done | head -c 1 >/dev/null"],
        cwd=bench.folder,
        check=True,
    )
    assert from_shell.returncode == 0
    closed = bench.run("list", "cells")
    assert closed.code == 0


def test_numbers_in_json_are_not_rounded(bench):
    bench.done("log", "--cell", "A", "--measured_at", "2026-03-06T10:00Z", "--potential_V",
               "3.4123456789", "--temperature_C", "25", "--R_ct", "41.23456789012345")  # fmt: skip
    row = bench.done("list", "measurements", "--json").json["rows"][-1]
    assert (row["R_ct"], row["potential_V"]) == (41.23456789012345, 3.4123456789)
