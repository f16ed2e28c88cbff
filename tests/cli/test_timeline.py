"""campaign timeline, as it is typed, on a small campaign logged and imported."""

import json
import sys

import pytest

from campaign.cli.main import main

HEADER = (
    "electrode,ion,cell,area_cm2,electrolyte,reference,measured_at,potential_V,temperature_C,"
    "R_el,R_sl,R_ct\n"
)


def rows(first, count):
    return "".join(
        f'E1,Na,C{i},1,"1 M NaPF6 in PC",Na/Na+,2026-0{1 + i // 2}-1{i % 2}T10:00+00:00,'
        f"3.1,25,4,5,{50 + i}\n"
        for i in range(first, first + count)
    )


@pytest.fixture
def typed(tmp_path, monkeypatch, capsys):
    """Run one command line in this process; return exit code, output and messages."""
    monkeypatch.setenv("CAMPAIGN_DB", str(tmp_path / "campaign.sqlite"))

    def run(*words):
        monkeypatch.setattr(sys, "argv", ["campaign", *map(str, words)])
        code = 0
        try:
            main()
        except SystemExit as stop:
            code = int(stop.code or 0)
        shown = capsys.readouterr()
        return code, shown.out, shown.err

    assert run("init", "--zone", "UTC")[0] == 0
    return run


@pytest.fixture
def imported(typed, tmp_path):
    table = tmp_path / "all.csv"
    table.write_text(HEADER + rows(0, 6), encoding="utf-8")
    assert typed("import", table)[0] == 0
    return typed


def test_one_import_over_half_gives_the_measured_clock_and_says_so(imported):
    code, out, _ = imported("timeline", "--json")
    found = json.loads(out)
    assert code == 0
    assert found["clock"] == "measured"
    assert "hold 6 of 6 measurements" in found["clock_because"]
    assert [(row["period"], row["n_measurements"]) for row in found["rows"]] == [
        ("2026-01", 2), ("2026-02", 4), ("2026-03", 6),
    ]  # fmt: skip
    assert {row["verdict"] for row in found["rows"]} == {"undetermined"}
    assert not any(row["settled"] for row in found["rows"])
    text = imported("timeline")[1]
    assert "E1: not settled, now undetermined" in text
    assert "Clock measured (the imports of" in text
    assert "Criteria: order margin 0.15" in text


def test_by_the_time_of_logging_all_of_it_came_at_once(imported):
    found = json.loads(imported("timeline", "--clock", "logged", "--json")[1])
    (row,) = found["rows"]
    assert row["n_measurements"] == 6
    assert found["clock_because"] == "as asked"


def test_the_logged_clock_forgets_what_was_withdrawn_only_from_then_on(imported):
    assert imported("withdraw", "measurement", "1", "--reason", "bad contact")[0] == 0
    found = json.loads(imported("timeline", "--clock", "logged", "--json")[1])
    assert [row["n_measurements"] for row in found["rows"]] == [5]
    found = json.loads(imported("timeline", "--clock", "measured", "--json")[1])
    assert [row["n_measurements"] for row in found["rows"]] == [1, 3, 5]


def test_spacing_filters_and_csv(imported):
    out = imported("timeline", "--every", "quarter", "--csv")[1].splitlines()
    assert len(out) == 2
    assert out[0].startswith("period,last_day,electrode,n_specimens,n_measurements,dominant,share")
    assert "order_low" in out[0] and "concentration_decision" in out[0]
    rows_ = json.loads(imported("timeline", "--every", "28d", "--json")[1])["rows"]
    assert [row["period"] for row in rows_] == ["to 2026-02-06", "to 2026-03-06", "to 2026-04-03"]
    assert json.loads(imported("timeline", "--until", "2026-01-31", "--json")[1])["rows"][-1][
        "n_measurements"
    ] == 2  # fmt: skip


def test_nothing_to_follow(typed):
    assert json.loads(typed("timeline", "--json")[1])["rows"] == []
    code, out, err = typed("timeline")
    assert (code, out) == (0, "")
    assert "There are no measurements yet." in err


def test_bad_spacing_is_one_sentence(imported):
    code, out, err = imported("timeline", "--every", "fortnight")
    assert (code, out) == (1, "")
    assert "'fortnight', which is not a period" in err
    assert imported("timeline", "--clock", "sundial")[0] == 2


@pytest.fixture
def written_on(typed, tmp_path, monkeypatch):
    """Write to the journal as if on a given day."""

    def run(day, *words):
        monkeypatch.setattr("campaign.ledger.journal.now", lambda: f"{day}T12:00:00.000000Z")
        code, _, err = typed(*words)
        assert code == 0, err

    def table(name, first, count):
        path = tmp_path / name
        path.write_text(HEADER + rows(first, count), encoding="utf-8")
        return path

    run.table = table
    return run


def test_the_logged_clock_takes_readings_and_criteria_of_then(typed, written_on):
    written_on("2030-01-10", "import", written_on.table("a.csv", 0, 3))
    written_on("2030-02-10", "criteria", "--set", "error_probability=0.2", "--reason", "looser")
    written_on("2030-03-10", "import", written_on.table("b.csv", 3, 3))
    # two days' imports hold one half each: not over half
    assert json.loads(typed("timeline", "--json")[1])["clock"] == "logged"
    written_on("2030-04-10", "withdraw", "measurement", "6", "--reason", "spilled")
    found = json.loads(typed("timeline", "--clock", "logged", "--json")[1])
    assert [(row["period"], row["n_measurements"]) for row in found["rows"]] == [
        ("2030-01", 3), ("2030-02", 3), ("2030-03", 6), ("2030-04", 5),
    ]  # fmt: skip
    january, february = (row["share_ci"] for row in found["rows"][:2])
    # the same readings, with the criteria of then: a narrower interval from February on
    assert february[1] - february[0] < january[1] - january[0]
    then = ("--clock", "logged", "--as-of", "2030-03-31")
    until_march = json.loads(typed("timeline", *then, "--json")[1])
    assert until_march["rows"] == found["rows"][:3]
