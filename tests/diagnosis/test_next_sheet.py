"""Run sheets: balanced blocks, a stated seed, conditions filled and results empty."""

import importlib.util
import io
from collections import Counter
from dataclasses import replace
from pathlib import Path

import numpy as np

from campaign.diagnosis.next_cells import Condition, NewCell
from campaign.diagnosis.next_sheet import new_labels, run_order, sheet
from campaign.ledger.flat.headers import CANONICAL
from campaign.ledger.flat.writing import write_rows
from campaign.ledger.quantities import QUANTITIES

_spec = importlib.util.spec_from_file_location(
    "next_campaign", Path(__file__).parent / "next_campaign.py"
)
made = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(made)

AT = Condition(298.15, 3.0, "Na/Na+", 0.4)
LOW = NewCell("film", "0.1 mol/L NaPF6 in PC", (AT,), area_cm2=1.13)
HIGH = replace(LOW, electrolyte="1 mol/L NaPF6 in PC")
SERIES = replace(
    LOW, conditions=tuple(replace(AT, temperature_K=T) for T in (278.15, 298.15, 318.15))
)


def test_every_block_holds_each_kind_of_cell_once():
    order = run_order([LOW] * 3 + [HIGH] * 5, seed=7)
    assert Counter(cell for _, cell in order) == {LOW: 3, HIGH: 5}
    for block in (1, 2, 3):
        assert {cell for number, cell in order if number == block} == {LOW, HIGH}
    assert [number for number, _ in order] == sorted(number for number, _ in order)


def test_the_order_in_a_block_is_random_and_repeats_with_its_seed():
    first = {run_order([LOW, HIGH], seed)[0][1] for seed in range(20)}
    assert first == {LOW, HIGH}
    assert run_order([LOW, HIGH] * 4, 3) == run_order([LOW, HIGH] * 4, 3)


def test_concentration_and_place_in_the_order_stay_apart():
    # inside blocks the difference of mean places is less than one block
    for seed in range(10):
        order = [cell for _, cell in run_order([LOW] * 6 + [HIGH] * 6, seed)]
        places = {kind: np.mean([i for i, one in enumerate(order) if one is kind])
                  for kind in (LOW, HIGH)}  # fmt: skip
        assert abs(places[LOW] - places[HIGH]) <= 1.0


def test_conditions_are_filled_and_results_empty():
    rows = sheet(made.snapshot(made.rows()), [SERIES, HIGH], seed=5)
    assert len(rows) == 4
    assert set().union(*rows) <= set(CANONICAL)
    for row in rows:
        assert row.get("measured_at") is None
        assert not any(row.get(name) for name in QUANTITIES)
        assert row["potential_V"] == 3.0 and row["ion_content"] == 0.4
        assert "seed 5" in row["note"]
    temperatures = [row["temperature_C"] for row in rows if row["electrolyte"] == LOW.electrolyte]
    assert sorted(temperatures) == [5.0, 25.0, 45.0]


def test_ages_keep_their_order_and_are_said():
    aged = replace(LOW, conditions=(AT, replace(AT, after_d=14.0), replace(AT, after_d=28.0)))
    notes = [row["note"] for row in sheet(made.snapshot(made.rows()), [aged], seed=5)]
    assert "28 d after the first" in notes[-1] and "d after" not in notes[0]


def test_labels_go_on_and_are_never_in_use():
    rows = [*made.rows(concentrations=(0.1, 1.0)), *made.rows(electrode="other")]
    for row in rows:
        row["cell"] = row["cell"].replace("film 0", "A1")
    campaign = made.snapshot(rows)
    assert new_labels(campaign, ["film", "film", "other"]) == ["A13", "A14", "other 04"]
    taken = [*rows, {**rows[0], "electrode": "other", "cell": "A13"}]
    assert new_labels(made.snapshot(taken), ["film"]) == ["A14"]


def test_cells_without_numbers_get_labels_too():
    rows = made.rows(concentrations=(0.1, 1.0))
    for row in rows:
        row["cell"] = "coin " + "ab"[row["concentration"] > 0.5]
    assert new_labels(made.snapshot(rows), ["film", "film"]) == ["new-01", "new-02"]


def test_a_sheet_is_a_flat_table_of_canonical_headers():
    stream = io.StringIO()
    write_rows(sheet(made.snapshot(made.rows()), [LOW, HIGH], seed=1), stream)
    lines = stream.getvalue().splitlines()
    assert lines[0] == ",".join(CANONICAL) and len(lines) == 3
