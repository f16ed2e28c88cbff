"""The commands that read the answer, on the demo campaign built by its own command."""

import json

import pytest

VERDICTS = {"ion transport", "electron transfer", "host", "mixed", "conflicting", "undetermined"}
DIAGNOSTICS = {"concentration", "solvent", "additive", "potential", "barrier", "age"}


def test_the_demo_says_where_it_is_and_prints_the_table(demo):
    bench, run = demo
    assert (bench.folder / "campaign.sqlite").is_file()
    assert "campaign.sqlite" in run.err
    assert "ion transport" in run.out and "electron transfer" in run.out
    bench.done("check")


def test_a_summary_in_json(demo):
    found = demo[0].done("summary", "--json").json
    assert found["criteria"] and len(found["rows"]) == 4
    for row in found["rows"]:
        assert row["verdict"] in VERDICTS
        assert row["strength"] in ("strong", "moderate", "weak", None)
        assert set(row["diagnostics"]) == DIAGNOSTICS
        assert {c["status"] for c in row["candidates"]} <= {"stands", "eliminated", "untested"}
    assert "NaN" not in json.dumps(found)


@pytest.mark.parametrize(
    ("axis", "keys"),
    [
        ("concentration", {"order", "order_ci", "df", "n_specimens", "decision", "warnings"}),
        ("solvent", {"a", "b", "ratio", "ratio_ci", "decision"}),
        ("additive", {"a", "b", "ratio", "ratio_ci", "decision"}),
        ("temperature", {"Ea_kJ_mol", "Ea_ci", "Ea_lnRT_kJ_mol", "Ea_lnRT_ci"}),
        ("potential", {"law", "span", "span_ci", "E0_V", "g", "decision"}),
        ("age", {"electrode", "decision"}),
    ],
)
def test_trends_in_json(demo, axis, keys):
    found = demo[0].done("trend", axis, "--json").json
    assert (found["axis"], found["response"]) == (axis, "R_ct")
    assert found["estimates"]
    for estimate in found["estimates"]:
        assert keys | {"electrode"} <= set(estimate)


def test_tables_and_no_match(demo):
    bench = demo[0]
    assert bench.done("trend", "concentration").out
    assert bench.done("summary", "--csv").out.count("\n") >= 5
    empty = bench.done("trend", "concentration", "--since", "2199-01-01", "--json").json
    assert empty["estimates"] == []


def test_an_electrode_is_explained(demo):
    bench = demo[0]
    label = bench.done("list", "electrodes", "--json").json["rows"][0]["electrode"]
    assert label in bench.done("explain", label).out
    unknown = bench.run("explain", label + "x", "--json")
    assert unknown.code == 1 and unknown.json["errors"]
