"""campaign criteria, as it is typed: shown, set, reset, refused, and used by what follows."""

import json
import sys

import pytest

from campaign.cli.main import main


@pytest.fixture
def typed(tmp_path, monkeypatch, capsys):
    """Run one command line in this process; return exit code, output and messages."""
    monkeypatch.setenv("CAMPAIGN_DB", str(tmp_path / "campaign.sqlite"))

    def run(*words):
        monkeypatch.setattr(sys, "argv", ["campaign", *words])
        code = 0
        try:
            main()
        except SystemExit as stop:
            code = int(stop.code or 0)
        shown = capsys.readouterr()
        return code, shown.out, shown.err

    assert run("init", "--zone", "UTC")[0] == 0
    return run


def test_set_show_reset(typed):
    code, out, _ = typed(
        "criteria", "--set", "order_margin=0.2", "--set", "working_time_s=1min",
        "--reason", "as agreed", "--by", "Ada",
    )  # fmt: skip
    assert code == 0
    assert "order_margin: was 0.15, is 0.2" in out
    found = json.loads(typed("criteria", "--json")[1])
    assert found["criteria"]["working_time_s"] == 60
    assert [(e["name"], e["who"], e["reason"]) for e in found["history"]] == [
        ("order_margin", "Ada", "as agreed"), ("working_time_s", "Ada", "as agreed"),
    ]  # fmt: skip
    assert typed("criteria", "--reset", "all", "--reason", "back")[0] == 0
    found = json.loads(typed("criteria", "--json")[1])
    assert found["criteria"]["order_margin"] == 0.15
    assert len(found["history"]) == 4
    assert all(row["value"] == row["default"] for row in found["rows"])


def test_the_past_keeps_its_criteria(typed):
    typed("criteria", "--set", "order_margin=0.2", "--reason", "x")
    then = json.loads(typed("criteria", "--as-of", "2000-01-01", "--json")[1])
    assert then["criteria"]["order_margin"] == 0.15
    assert then["history"] == []


def test_a_summary_prints_the_criteria_it_used(typed):
    typed("criteria", "--set", "ratio_margin=2", "--reason", "x")
    assert json.loads(typed("summary", "--json")[1])["criteria"]["ratio_margin"] == 2


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("--set", "ordr_margin=0.2", "--reason", "x"), "near: order_margin"),
        (("--set", "error_probability=0.5", "--reason", "x"), "below 0.5"),
        (("--set", "order_margin=0.2"), "--reason TEXT"),
        (("--set", "order_margin", "--reason", "x"), "NAME=VALUE"),
        (("--reset", "order_margin", "--reason", "x"), "nothing would change"),
        (("--reset", "colour", "--reason", "x"), "no criterion 'colour'"),
    ],
)
def test_refusals_are_one_sentence_and_write_nothing(typed, words, said):
    code, out, err = typed("criteria", *words)
    assert (code, out) == (1, "")
    assert said in err
    assert "Traceback" not in err
    assert json.loads(typed("criteria", "--json")[1])["history"] == []


def test_wrong_usage(typed):
    assert typed("criteria", "--reason", "nothing set")[0] == 2
    assert typed("criteria", "--set", "order_margin=0.2", "--reason", "x",
                 "--as-of", "2026-01-01")[0] == 2  # fmt: skip


def test_csv_has_a_row_a_criterion(typed):
    lines = typed("criteria", "--csv")[1].splitlines()
    assert lines[0].startswith("name,value,unit,default")
    assert len(lines) == 12
