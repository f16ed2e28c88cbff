"""What a person sees at a terminal of 100 columns, and what a pipe gets."""

from __future__ import annotations

import fcntl
import os
import pty
import re
import struct
import subprocess
import sys
import termios
from pathlib import Path

import pytest

from campaign.ledger.demonstration import build

ROOT = Path(__file__).parents[2]
ESCAPE = re.compile(r"\x1b\[[0-9;?]*[A-Za-z]")
NUMBER = re.compile(r"-?\d+\.\d+")
BOX = re.compile("[\u2500-\u257f]")


@pytest.fixture(scope="module")
def demo_db(tmp_path_factory):
    return str(build(tmp_path_factory.mktemp("terminal") / "demo").database)


def piped(arguments, db):
    return subprocess.run(
        [sys.executable, "-m", "campaign.cli.main", "--db", db, *arguments],
        capture_output=True, text=True, cwd=ROOT, check=True,
    ).stdout  # fmt: skip


def at_terminal(arguments, db, columns=100, **changes):
    """Run a command at a pseudo-terminal and return all that it shows."""
    master, slave = pty.openpty()
    fcntl.ioctl(slave, termios.TIOCSWINSZ, struct.pack("HHHH", 40, columns, 0, 0))
    environment = {k: v for k, v in os.environ.items() if k not in ("COLUMNS", "NO_COLOR")}
    environment |= {"TERM": "xterm-256color", **changes}
    process = subprocess.Popen(
        [sys.executable, "-m", "campaign.cli.main", "--db", db, *arguments],
        stdin=slave, stdout=slave, stderr=slave, cwd=ROOT, env=environment,
    )  # fmt: skip
    os.close(slave)
    shown = b""
    while True:
        try:
            part = os.read(master, 65536)
        except OSError:
            break
        if not part:
            break
        shown += part
    os.close(master)
    assert process.wait() == 0
    return shown.decode().replace("\r\n", "\n")


TABLES = (
    ["summary"],
    ["trend", "concentration"],
    ["trend", "temperature", "--electrode", "NFM film A"],
    ["trend", "solvent"],
    ["list", "electrolytes"],
)


@pytest.mark.parametrize("arguments", TABLES, ids=" ".join)
def test_tables_fit_100_columns_and_cut_no_number(demo_db, arguments):
    shown = ESCAPE.sub("", at_terminal(arguments, demo_db))
    assert max(map(len, shown.splitlines())) <= 100
    assert "…" not in shown
    assert set(NUMBER.findall(piped(arguments, demo_db))) <= set(NUMBER.findall(shown))


def test_measurements_fit_with_their_errors_in_short_form(demo_db):
    arguments = ["list", "measurements", "--electrode", "Prussian white D"]
    shown = ESCAPE.sub("", at_terminal(arguments, demo_db))
    assert max(map(len, shown.splitlines())) <= 100
    written = re.findall(r"(\d+\.\d+) ± 0\.\d*?([1-9]\d*)(?=\s)", piped(arguments, demo_db))
    assert len(written) > 30
    for value, error in written:
        assert f"{value}({error})" in shown


def test_no_color_is_honoured(demo_db):
    coloured = at_terminal(["list", "cells"], demo_db)
    assert ESCAPE.search(coloured)
    for changes in ({"NO_COLOR": "1"}, {"TERM": "dumb"}):
        assert not ESCAPE.search(at_terminal(["list", "cells"], demo_db, **changes))


@pytest.mark.parametrize("arguments", TABLES[:3:2], ids=" ".join)
def test_a_pipe_gets_neither_boxes_nor_colour(demo_db, arguments):
    text = piped(arguments, demo_db)
    assert not ESCAPE.search(text)
    assert not BOX.search(text)


def test_plot_shows_every_specimen_and_the_line(demo_db):
    text = piped(
        ["trend", "concentration", "--electrode", "NFM film A", "--solvents", "PC", "--plot"],
        demo_db,
    )
    plot = text[text.index("R_ct / (ohm cm2)") :]
    for letter, cell in zip("abcd", ("A01", "A04", "A10", "A14"), strict=True):
        assert f"{letter} {cell}" in plot
        assert re.search(rf"\|[ .a-d]*{letter}", plot)
    assert plot.count(".") > 30


def test_progress_is_shown_at_a_terminal_only_and_counts(demo_db, tmp_path, monkeypatch, capsys):
    from campaign.ledger.progress import counted
    from campaign.present import progress

    monkeypatch.setattr(progress, "PATIENCE_s", 0.0)
    with progress.progress_bar():  # standard error is no terminal here
        assert list(counted(range(120), "rows")) == list(range(120))
    assert capsys.readouterr().err == ""
    monkeypatch.setattr("sys.stderr.isatty", lambda: True, raising=False)
    monkeypatch.setenv("TERM", "xterm")
    told = []
    monkeypatch.setattr(progress._Bar, "tell", lambda self, *what: told.append(what))
    with progress.progress_bar():
        assert list(counted(range(120), "rows")) == list(range(120))
    assert told == [("rows", 0, 120), ("rows", 50, 120), ("rows", 100, 120), ("rows", 120, 120)]
