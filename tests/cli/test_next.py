"""`campaign coverage` and `campaign next` as people run them."""

import csv
import io
import json
import math
import random

import pytest

HEADER = (
    "electrode,material,ion,cell,area_cm2,reference,electrolyte,assembled_at,measured_at,"
    "potential_V,temperature_C,ion_content,R_el,R_ct,R_ct_se"
)


def table(order=0.3, between=0.12, seed=5):
    """Four cells at two concentrations, three temperatures each, in random order."""
    rng = random.Random(seed)
    cells = [c for c in (0.1, 1.0) for _ in range(2)]
    rng.shuffle(cells)
    lines = [HEADER]
    for i, c in enumerate(cells):
        own = rng.gauss(0, between)
        for j, T in enumerate((5, 25, 45)):
            ln = math.log(100) - order * math.log(c) + own + rng.gauss(0, 0.02)
            ln += 50e3 / 8.314 * (1 / (T + 273.15) - 1 / 298.15)
            R = math.exp(ln)
            lines.append(
                f"film F,oxide,Na,F{i + 1:02d},1.13,Na/Na+,{c:g} M NaPF6 in DMC,"
                f"2026-03-{i + 1:02d}T08:00Z,2026-03-{i + 1:02d}T{10 + j}:00Z,3.1,{T},0.5,"
                f"2.0,{R:.4f},{0.01 * R:.4f}"
            )
    return "\n".join(lines) + "\n"


def rows_of(text):
    return list(csv.DictReader(io.StringIO(text)))


def fresh(bench):
    bench.done("init")
    bench.write("film.csv", table())
    bench.done("import", "film.csv")
    return bench


def test_a_proposal_says_what_why_and_with_what_care(empty):
    bench = fresh(empty)
    run = bench.done("next")
    assert "1. film F: concentration of R_ct" in run.out
    assert "decides with chance 0." in run.out
    assert "if responds: ion transport, unresponsive: electron transfer" in run.out
    assert "hydrogen fluoride" in run.out and "alkali metal" in run.out
    assert "25 degC is at or above its flash point of 18 degC" in run.out
    assert "does not authorise" in run.out
    assert max(map(len, run.out.splitlines())) <= 100
    found = bench.done("next", "--json").json
    (first, *_) = found["rows"]
    assert first["axis"] == "concentration" and first["settles"] and first["chance"] >= 0.8
    assert first["specimens"] == sum(one["cells"] for one in first["add"])
    low, high = first["interval_expected"]
    assert high - low < first["interval_now"][1] - first["interval_now"][0]
    table_ = rows_of(bench.done("next", "--csv").out)
    assert float(table_[0]["hours"]) == first["hours"]


def test_a_run_sheet_is_filled_at_the_bench_and_imported(empty):
    bench = fresh(empty)
    run = bench.done("next", "--axis", "concentration", "--sheet", "run.csv", "--seed", "11")
    assert "order from seed 11" in run.out
    planned = rows_of((bench.folder / "run.csv").read_text())
    first = bench.done("next", "--axis", "concentration", "--seed", "11", "--json").json["rows"][0]
    assert len({row["cell"] for row in planned}) == first["specimens"]
    assert all(row["measured_at"] == "" and row["R_ct"] == "" for row in planned)
    assert all("seed 11" in row["note"] for row in planned)
    # as it is, it cannot be imported, and it says why
    refusal = bench.run("import", "run.csv")
    assert refusal.code == 1 and "measured_at is empty" in refusal.err

    rng = random.Random(5)
    own = {row["cell"]: rng.gauss(0, 0.05) for row in planned}
    for day, row in enumerate(planned, start=1):
        c = float(row["electrolyte"].split()[0])
        row["measured_at"] = f"2026-05-{day:02d}T10:00Z"
        row["assembled_at"] = f"2026-05-{day:02d}T08:00Z"
        row["R_ct"] = f"{100 * c**-0.3 * math.exp(own[row['cell']]):.3f}"
        row["R_el"] = "2.0"
    stream = io.StringIO()
    writer = csv.DictWriter(stream, list(planned[0]), lineterminator="\n")
    writer.writeheader()
    writer.writerows(planned)
    bench.write("filled.csv", stream.getvalue())
    before = trend(bench)
    added = bench.done("import", "filled.csv", "--json").json["added"]
    assert added == {"electrodes": 0, "electrolytes": 0, "cells": first["specimens"],
                     "measurements": len(planned)}  # fmt: skip
    after = trend(bench)
    assert after["n_specimens"] == before["n_specimens"] + first["specimens"]
    assert width(after) < width(before)
    assert bench.done("check").code == 0


def trend(bench):
    (one,) = bench.done("trend", "concentration", "--json").json["estimates"]
    return one


def width(one):
    low, high = one["order_ci"]
    return high - low


def test_an_existing_file_is_left_as_it_is(empty):
    bench = fresh(empty)
    bench.write("run.csv", "mine\n")
    run = bench.run("next", "--sheet", "run.csv", "--json")
    assert run.code == 1 and "already" in run.json["errors"][0]["message"]
    assert (bench.folder / "run.csv").read_text() == "mine\n"
    assert bench.run("next", "--sheet", "no/such/run.csv").code == 1
    assert bench.run("next", "--sheet", "run.xlsx").code == 1


def test_a_budget_and_a_line_choose_what_the_sheet_holds(empty):
    bench = fresh(empty)
    found = bench.done("next", "--hours", "20", "--json", "--sheet", "budget.csv").json
    assert found["hours_together"] <= 20
    cells = {row["cell"] for row in rows_of((bench.folder / "budget.csv").read_text())}
    assert len(cells) == sum(row["specimens"] for row in found["rows"])
    run = bench.run("next", "--line", "99", "--sheet", "other.csv")
    assert run.code == 1 and "--line is 99" in run.err
    assert not (bench.folder / "other.csv").exists()


def test_costs_are_set_with_a_reason_and_change_the_hours(empty):
    bench = fresh(empty)
    before = bench.done("next", "--json").json
    assert bench.run("next", "--cost", "measure=4").code == 1
    bench.done("next", "--cost", "build_cell=6", "--cost", "measure=1", "--reason", "new glove box")
    after = bench.done("next", "--json").json
    assert after["costs"]["build_cell"] == 6 and after["costs"]["measure"] == 1
    per_cell = [found["rows"][0]["hours"] / found["rows"][0]["specimens"]
                for found in (before, after)]  # fmt: skip
    assert per_cell[1] - per_cell[0] == pytest.approx(3.5)
    assert "new glove box" in bench.done("history").out
    assert bench.done("check").code == 0


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("--hours", "0"), "--hours is 0"),
        (("--chance", "1.5"), "--chance is 1.5"),
        (("--axis", "colour"), "no axis 'colour'"),
        (("--seed", "-1"), "--seed is -1"),
        (("--electrode", "film G"), "film F"),
        (("--cost", "tea=1", "--reason", "x"), "names no cost"),
    ],
)
def test_what_means_nothing_is_refused_in_one_sentence(bench_f, arguments, said):
    run = bench_f.run("next", *arguments, "--json")
    assert run.code == 1 and said in run.err and "Traceback" not in run.err
    assert any(said in one["message"] for one in run.json["errors"])


@pytest.fixture(scope="module")
def bench_f(module_bench):
    module_bench.write("film.csv", table())
    module_bench.done("import", "film.csv")
    return module_bench


def test_coverage_is_told_in_every_form(bench_f):
    run = bench_f.done("coverage", "--electrode", "film F")
    assert "film F: 4 specimens, 12 measurements" in run.out
    assert "concentration x solvents" in run.out
    assert "solvent of R_ct (open): not tested" in run.out
    assert max(map(len, run.out.splitlines())) <= 100
    (row,) = bench_f.done("coverage", "--electrode", "film F", "--json").json["rows"]
    first = row["matrices"][0]
    assert first["specimens"] == [[2], [2]] and first["measurements"] == [[6], [6]]
    flat = rows_of(bench_f.done("coverage", "--electrode", "film F", "--csv", "--every").out)
    assert {"row_axis", "column_axis", "specimens", "row_contrast"} <= set(flat[0])


def test_an_empty_campaign_has_nothing_to_tell(empty):
    empty.done("init")
    for command in ("next", "coverage"):
        assert empty.done(command, "--json").json["rows"] == []
        assert "no measurements" in empty.done(command).err.lower()


def test_the_demo_is_answered(demo):
    bench, _ = demo
    found = bench.done("next", "--json").json
    assert {row["electrode"] for row in found["rows"]} == {"Prussian white D"}
    assert {one["electrode"] for one in found["electrodes"]} >= {"NFM film A", "hard carbon C"}
    lines = bench.done("coverage").out.splitlines()
    assert max(map(len, lines)) <= 100
    json.dumps(found, allow_nan=False)
