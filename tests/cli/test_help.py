"""Help: commands by purpose, one worked example each; near words; what emptied a result."""

from __future__ import annotations

import re

import pytest
import typer
from typer.testing import CliRunner

from campaign.cli.main import app
from campaign.ledger.demonstration import build

RUN = CliRunner()


@pytest.fixture(scope="module")
def demo_db(tmp_path_factory):
    return str(build(tmp_path_factory.mktemp("help") / "demo").database)


def commands():
    group = typer.main.get_command(app)
    for name, command in group.commands.items():
        parts = getattr(command, "commands", None)
        if parts:
            yield from ([name, part] for part in parts)
        else:
            yield [name]


@pytest.mark.parametrize("command", list(commands()), ids=" ".join)
def test_each_command_has_one_worked_example(command):
    text = RUN.invoke(app, [*command, "--help"]).output
    assert text.count("Example: campaign ") == 1
    assert f"Example: campaign {' '.join(command)}" in text


def test_commands_stand_under_what_one_wants_to_do():
    text = RUN.invoke(app, ["--help"]).output
    found = re.findall(r"^(\S[^\n]*):\n((?:  .*\n?)+)", text, re.MULTILINE)
    headings = {heading: re.findall(r"^  (\S+)", rows, re.MULTILINE) for heading, rows in found}
    assert "summary" in headings["Read the answer"]
    assert "import" in headings["Record"]
    assert "amend" in headings["Correct"]
    listed = [name for heading, names in headings.items() if heading not in ("Options", "Usage")
              for name in names]  # fmt: skip
    for name in typer.main.get_command(app).commands:
        assert listed.count(name) == 1
    assert "..." not in text.split("Start:")[1]


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["summary", "--salt", "NaPF7"], "--salt NaPF7 alone matches no measurement; near: NaPF6"),
        (["list", "measurements", "--temperature", "60:70", "--salt", "NaPF6"],
         "--temperature 60:70 alone matches no measurement"),
        (["trend", "concentration", "--electrode", "NFM film A", "--solvents", "water"],
         "Without --solvents water there are"),
    ],
)  # fmt: skip
def test_an_empty_result_says_what_emptied_it(demo_db, monkeypatch, arguments, said):
    monkeypatch.setenv("CAMPAIGN_DB", demo_db)
    result = RUN.invoke(app, arguments)
    assert result.exit_code == 0
    assert said in result.output


def test_a_figure_that_cannot_be_written_is_one_sentence(demo_db, monkeypatch):
    monkeypatch.setenv("CAMPAIGN_DB", demo_db)
    result = RUN.invoke(app, ["trend", "age", "--figure", "a.jpg"])
    assert result.exit_code != 0
    assert "SVG, PDF or PNG" in str(result.exception)
