"""campaign summary and explain in all their forms, on the demo's smallest electrode."""

import csv
import io
import json
import os
import sys

import pytest

from campaign.cli.main import main
from campaign.ledger.demonstration import build

SMALL = ("--electrode", "Prussian white D")


@pytest.fixture(scope="module")
def demo(tmp_path_factory):
    return str(build(tmp_path_factory.mktemp("demo") / "sodium").database)


@pytest.fixture
def typed(demo, monkeypatch, capsys):
    """Run one command line on the demo; return exit code, output and messages."""
    monkeypatch.setenv("CAMPAIGN_DB", demo)

    def run(*words):
        monkeypatch.setattr(sys, "argv", ["campaign", *words])
        code = 0
        try:
            main()
        except SystemExit as stop:
            code = int(stop.code or 0)
        shown = capsys.readouterr()
        return code, shown.out, shown.err

    assert os.environ["CAMPAIGN_DB"] == demo
    return run


@pytest.mark.parametrize(
    ("by", "names"),
    [
        ("salt", ["Na2SO4", "NaClO4"]),
        ("solvents", ["PC", "water"]),
        ("temperature", ["5.0 °C", "25.0 °C", "45.0 °C"]),
    ],
)
def test_a_row_for_each_group(typed, by, names):
    rows = json.loads(typed("summary", "--by", by, *SMALL, "--json")[1])["rows"]
    assert [row[by] for row in rows] == names
    if by != "temperature":
        assert sum(row["n_measurements"] for row in rows) == 18
        # the barrier of a group is that of its own readings
        assert all(len(row["diagnostics"]["barrier"]["series"]) == 1 for row in rows)
    assert names[-1] in typed("summary", "--by", by, *SMALL)[1]


def test_shares_over_time(typed):
    found = json.loads(typed("summary", "--at", "0.1s,1min,1h", *SMALL, "--json")[1])
    budgets = found["rows"][0]["budget_by_time"]
    assert [one["time_s"] for one in budgets] == [0.1, 60, 3600]
    # diffusion only grows, the arcs only saturate
    shares = [one["diffusion"] for one in budgets]
    assert shares == sorted(shares)
    text = typed("summary", "--at", "0.1s,1min,1h", *SMALL)[1]
    assert "t/s" in text and "3600" in text
    (row,) = csv.DictReader(
        io.StringIO(typed("summary", "--at", "10", *SMALL, "--csv")[1])
    )
    assert float(row["share_R_ct_10s"]) == pytest.approx(float(row["share"]))


def test_markdown_and_latex_hold_the_same_cells(typed):
    markdown = typed("summary", *SMALL, "--markdown", "--at", "10s")[1]
    latex = typed("summary", *SMALL, "--latex", "--at", "10s")[1]
    assert markdown.startswith("| Electrode | Specimens |")
    assert "| Prussian white D | 4 |" in markdown
    assert "\N{MINUS SIGN}" in markdown
    for part in ("\\toprule", "\\midrule", "\\bottomrule", "$R_\\mathrm{ct}$ (42 \\%)", "[$-$"):
        assert part in latex
    assert latex.count("\\begin{table}") == latex.count("\\end{table}") == 2
    assert "order margin 0.15" in markdown and "order margin 0.15" in latex


def test_forms_exclude_one_another(typed):
    assert typed("summary", "--csv", "--latex")[0] == 2
    assert typed("summary", "--by", "colour")[0] == 2


def test_a_bad_time_is_one_sentence(typed):
    code, out, err = typed("summary", "--at", "10 parsec", *SMALL)
    assert (code, out) == (1, "")
    assert "--at is '10 parsec'" in err


def test_explain_tells_all_it_should(typed):
    code, text, _ = typed("explain", "Prussian white D", "--at", "1ms,10s")
    assert code == 0
    for part in (
        "What dominates, and when", "Shares at", "0.001", "Diagnostics of R_ct",
        "Candidate steps for R_ct", "Candidate steps for R_lat", "What carries the decisions",
        "Robustness: one thing changed at a time", "each criterion moved by a quarter",
        "What would change the verdict", "assignment check", "Criteria: order margin 0.15",
    ):  # fmt: skip
        assert part in text
    prose = [line for line in text.splitlines() if line.startswith("  - ")]
    assert max(map(len, prose)) <= 100


def test_explain_as_json_and_csv(typed):
    found = json.loads(typed("explain", "Prussian white D", "--json")[1])
    assert found["criteria"]["working_time_s"] == 10
    kinds = {one["kind"] for one in found["robustness"]["tried"]}
    assert kinds == {"specimen", "stratum", "criterion"}
    measured = {n for one in found["robustness"]["influences"] for n in one["measurements"]}
    assert measured and min(measured) >= 1
    rows = list(csv.DictReader(io.StringIO(typed("explain", "Prussian white D", "--csv")[1])))
    assert {(row["term"], row["axis"]) for row in rows} >= {("R_ct", "concentration")}


def test_an_unknown_electrode_is_one_sentence(typed):
    code, out, err = typed("explain", "Prussian white Z")
    assert (code, out) == (1, "")
    assert "Prussian white D" in err or "no measurements of electrode" in err
