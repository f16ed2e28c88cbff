"""Completion at a shell, with labels from the database; it never fails."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from campaign.ledger.completing import known_words
from campaign.ledger.demonstration import build

ROOT = Path(__file__).parents[2]


@pytest.fixture(scope="module")
def demo_db(tmp_path_factory):
    return str(build(tmp_path_factory.mktemp("completing") / "demo").database)


def complete(line, db, shell="bash"):
    words = line.split(" ")
    environment = {
        **os.environ, "CAMPAIGN_DB": db, "_CAMPAIGN_COMPLETE": f"complete_{shell}",
        "COMP_WORDS": line, "COMP_CWORD": str(len(words) - 1), "_TYPER_COMPLETE_ARGS": line,
    }  # fmt: skip
    done = subprocess.run(
        [sys.executable, "-m", "campaign.cli.main"], capture_output=True, text=True, cwd=ROOT,
        env=environment,
    )  # fmt: skip
    assert done.returncode in (0, 1)
    assert "Traceback" not in done.stderr
    return done.stdout


def test_labels_of_the_campaign_are_offered(demo_db):
    assert complete("campaign summary --electrode N", demo_db).split("\n")[:2] == [
        r"NFM\ film\ A", r"NiHCF\ film\ B",
    ]  # fmt: skip
    assert complete("campaign log --cell A1", demo_db).split() == [f"A1{i}" for i in range(10)]
    assert complete("campaign show cell B0", demo_db).split()[0] == "B01"
    assert "NFM film A" in complete("campaign explain NFM", demo_db, "zsh")
    assert "NaPF6" in complete("campaign trend age --salt Na", demo_db)


def test_a_database_named_before_the_command_is_used(demo_db, tmp_path):
    line = f"campaign --db {demo_db} summary --electrode Pr"
    assert complete(line, str(tmp_path / "none.sqlite")).strip() == r"Prussian\ white\ D"


@pytest.mark.parametrize("kind", ["electrode", "cell", "salt", "nothing"])
def test_whatever_is_wrong_offers_nothing_and_says_nothing(tmp_path, kind):
    (tmp_path / "text.sqlite").write_text("not a database")
    (tmp_path / "empty.sqlite").touch()
    for db in ("text.sqlite", "empty.sqlite", "none.sqlite", "."):
        assert known_words(kind, "", str(tmp_path / db)) == []
    assert known_words(kind, "", "ftp://somewhere/x") == []
    assert known_words(kind, "", "postgresql://nobody@127.0.0.1:1/none") == []
    assert complete("campaign show cell A", str(tmp_path / "text.sqlite")).strip() == ""
