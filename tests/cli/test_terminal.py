"""The program at a terminal of its own: `log` asks, Enter accepts, tables are framed."""

import os
import pty
import re
import select
import subprocess
import time

import pytest

PROMPT = re.compile(r"(?:^|\n)\s*(\w+)(?: \[[^\]\n]*\])?: ?$")


@pytest.fixture
def converse(bench):
    """Run a command at a pseudo terminal, answering its prompts; return (code, what it showed).

    `asked` on it names the prompts it answered, in order.
    """
    names = type(bench).start.__globals__

    def run(arguments, answers):
        ours, theirs = pty.openpty()
        process = subprocess.Popen(
            names["command"](*arguments),
            cwd=bench.folder,
            stdin=theirs,
            stdout=theirs,
            stderr=theirs,
            env=names["surroundings"](TERM="xterm", COLUMNS="100"),
            close_fds=True,
        )
        os.close(theirs)
        shown, seen, end = "", 0, time.monotonic() + 90
        while time.monotonic() < end:
            if select.select([ours], [], [], 0.2)[0]:
                try:
                    piece = os.read(ours, 65536)
                except OSError:  # the other end is closed
                    break
                if not piece:
                    break
                shown += piece.decode().replace("\r", "")
            prompt = PROMPT.search(shown, seen)
            if prompt:
                seen = len(shown)
                run.asked.append(prompt[1])
                os.write(ours, (answers.get(prompt[1], "") + "\n").encode())
        os.close(ours)
        return process.wait(timeout=30), shown

    run.asked = []
    return run


def test_log_asks_for_what_is_missing_and_offers_the_last_measurement(bench, converse):
    code, shown = converse(("log",), {"R_ct": "61.0(9)", "R_sl": "absent"})
    assert code == 0, shown
    assert "Logged 1 measurement." in shown
    last = bench.done("list", "measurements", "--json").json["rows"][-1]
    # Cell, potential and temperature of the measurement logged last were accepted by Enter.
    assert (last["cell"], last["potential_V"], last["temperature_C"]) == ("B", 3.4, 25)
    assert (last["R_ct"], last["R_ct_se"], last["R_sl"]) == (61.0, pytest.approx(0.9), "absent")
    assert "R_el" not in last and "R_lat" not in last


def test_the_next_potential_of_a_cell_takes_under_ten_key_presses(bench, converse):
    """The fitted values come from the fitting script; what is typed is the potential."""
    answers = {"potential_V": "3.45"}
    fitted = ("--R_el", "4.2", "--R_ct", "58.1(7)")
    code, shown = converse(("log", *fitted), answers)
    assert code == 0 and "Logged 1 measurement." in shown
    keys = sum(len(answers.get(name, "")) + 1 for name in converse.asked)
    assert converse.asked == ["cell", "measured_at", "potential_V", "temperature_C"]
    assert keys < 10
    last = bench.done("list", "measurements", "--json").json["rows"][-1]
    assert (last["cell"], last["potential_V"], last["R_ct"]) == ("B", 3.45, 58.1)


def test_log_asks_nothing_that_was_given(bench, converse):
    given = ("log", "--cell", "A", "--measured_at", "2026-03-08T10:00Z", "--potential_V", "3.3",
             "--temperature_C", "30", "--R_ct", "40")  # fmt: skip
    code, shown = converse(given, {})
    assert code == 0 and "Logged 1 measurement." in shown
    assert "potential_V" not in shown


def test_a_new_cell_is_asked_for(bench, converse):
    code, shown = converse(
        ("log", "--cell", "Z"), {"electrolyte": "2 M NaPF6 in PC", "R_ct": "33"}
    )
    assert code == 0, shown
    cells = {c["cell"]: c for c in bench.done("list", "cells", "--json").json["rows"]}
    assert cells["Z"]["electrolyte"] == "2 mol/L NaPF6 in PC"
    assert (cells["Z"]["electrode"], cells["Z"]["area_cm2"]) == ("film E", 1.13)


def test_a_bad_answer_is_refused_with_a_sentence(bench, converse):
    before = bench.digest()
    code, shown = converse(("log", "--cell", "A"), {"temperature_C": "warm", "R_ct": "4"})
    assert "Traceback" not in shown
    assert code in (0, 1)
    if code == 1:
        assert bench.digest() == before and "warm" in shown


def test_lists_are_framed_at_a_terminal(converse):
    code, shown = converse(("list", "cells"), {})
    assert code == 0
    assert "film E" in shown and "─" in shown
