"""What is proposed for simulated campaigns that leave questions open."""

import importlib.util
import itertools
import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from campaign.diagnosis.lazy import trend_evidence
from campaign.diagnosis.next_cells import grouped, hours_of
from campaign.diagnosis.next_proposals import (
    LARGEST,
    Plan,
    of_one,
    propose,
    ranked,
    within_budget,
    worth,
)
from campaign.ledger.costs import Costs
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrolyteFacts

_spec = importlib.util.spec_from_file_location(
    "next_campaign", Path(__file__).parent / "next_campaign.py"
)
made = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(made)

CRITERIA = Criteria()
PLAN = Plan(draws=1000)


def by_axis(rows, plan=PLAN, electrolytes=(), **facts):
    planned = of_one(made.snapshot(rows, electrolytes, **facts), CRITERIA, "film", plan)
    return {one.axis: one for one in planned.proposals}


def open_order(seed=3, **options):
    return made.rows(seed, order=0.3, between=0.12, **options)


def test_cells_at_the_extremes_are_proposed_for_an_open_order():
    found = by_axis(open_order())["concentration"]
    used = [cell.electrolyte for cell in found.cells]
    ends = used.count("0.1 mol/L NaPF6 in PC") + used.count("1 mol/L NaPF6 in PC")
    # a middle level may need a cell too: to be unresponsive every ratio has to be inside
    assert ends > used.count("0.5 mol/L NaPF6 in PC")
    assert found.settles and found.chance >= PLAN.chance
    assert found.alpha == 0.025
    now, expected = found.interval_now, found.interval_expected
    assert expected[1] - expected[0] < now[1] - now[0]
    slope = trend_evidence(made.snapshot(open_order()), CRITERIA, "film", "R_ct")[
        "concentration"
    ].slope
    assert now == pytest.approx(slope.interval(0.95))
    assert sum(expected) / 2 == pytest.approx(slope.value)


def test_the_fewest_cells_that_reach_the_chance_are_proposed():
    found = by_axis(open_order())["concentration"]
    smaller = [one.chance for one in found.frontier if one.hours < found.hours]
    assert smaller and max(smaller) < PLAN.chance


def test_a_higher_chance_costs_more():
    plan = replace(PLAN, affordable_h=400.0)
    cheap = by_axis(open_order(), replace(plan, chance=0.6))["concentration"]
    sure = by_axis(open_order(), replace(plan, chance=0.9))["concentration"]
    assert cheap.settles and sure.settles
    assert cheap.hours < sure.hours


def test_the_line_says_what_and_why():
    found = by_axis(open_order())["concentration"]
    text = found.why
    most = max(count for _, count in grouped(found.cells))
    assert f"{most} more cells of" in text or f"and {most} of" in text
    assert "at 25 degC, 3 V vs Na/Na+" in text
    assert "interval of the order from" in text
    assert f"decides with chance {found.chance:.2f}" in text
    assert text.endswith(f"{found.hours:.3g} h")
    assert found.cautions[-1].endswith("does not authorise.")


def test_proposed_cells_match_a_condition_already_measured():
    rows = open_order(ion_content=0.42)
    for cell in by_axis(rows)["concentration"].cells:
        (condition,) = cell.conditions
        assert (condition.temperature_K, condition.potential_V) == (298.15, 3.0)
        assert condition.ion_content == 0.42
        assert cell.area_cm2 == 1.13 and cell.known


def test_hours_follow_the_costs():
    costs = Costs(build_cell=10.0, settle_potential=2.0, measure=1.0)
    found = by_axis(open_order(), replace(PLAN, costs=costs, affordable_h=1000.0))["concentration"]
    assert found.hours == pytest.approx(13.0 * len(found.cells))
    assert found.hours == hours_of(found.cells, costs)


def test_an_untested_axis_without_a_second_recipe_says_what_would_help():
    found = by_axis(open_order())["solvent"]
    assert not found.cells and found.chance is None and not found.settles
    assert "no electrolyte that differs in the solvent alone" in found.why


def test_a_recorded_electrolyte_with_declared_limits_can_be_a_new_level():
    other = ElectrolyteFacts("1 mol/L NaPF6 in G2", minimum_temperature_K=273.15,
                             maximum_temperature_K=323.15)  # fmt: skip
    found = by_axis(open_order(), electrolytes=[other])["solvent"]
    assert "1 mol/L NaPF6 in G2" in {cell.electrolyte for cell in found.cells}
    new = [cell for cell in found.cells if cell.electrolyte == other.recipe]
    assert not any(cell.known for cell in new)
    per_cell = PLAN.costs.build_cell + PLAN.costs.settle_potential + PLAN.costs.measure
    assert found.hours == pytest.approx(
        per_cell * len(found.cells) + PLAN.costs.prepare_electrolyte
    )
    assert any("even odds" in one for one in found.assumed)


def test_a_recorded_electrolyte_without_limits_is_not_proposed():
    found = by_axis(open_order(), electrolytes=[ElectrolyteFacts("1 mol/L NaPF6 in G2")])
    assert not found["solvent"].cells


def test_new_concentrations_come_from_what_the_campaign_has_measured():
    # two close concentrations of the film cannot settle the order; another electrode's recipes can
    rows = made.rows(2, concentrations=(0.8, 1.0), cells=2, between=0.2)
    other = made.rows(3, concentrations=(0.05, 2.0), cells=2, electrode="other")
    alone = by_axis(rows)["concentration"]
    wider = by_axis([*rows, *other])["concentration"]
    assert not alone.settles
    assert wider.settles
    assert {"0.05 mol/L NaPF6 in PC"} <= {cell.electrolyte for cell in wider.cells}
    assert all(cell.electrode == "film" for cell in wider.cells)


def test_too_much_scatter_is_said_with_what_would_have_to_fall():
    rows = made.rows(2, concentrations=(0.8, 1.0), cells=3, between=0.3)
    found = by_axis(rows, replace(PLAN, affordable_h=60.0))["concentration"]
    assert not found.settles and found.hours <= 60.0
    assert "no work of up to 60 h reaches 0.8" in found.why
    assert "scatter between cells" in found.why and " % to " in found.why
    # what is proposed all the same is the set with the fewest hours for each answer
    assert found.price == min(one.price for one in found.frontier)


def test_work_dearer_than_affordable_is_said_with_its_cost():
    found = by_axis(open_order(), replace(PLAN, affordable_h=5.0))["concentration"]
    assert not found.settles
    assert "so the cost of a cell would have to fall to" in found.why


def test_a_potential_that_is_not_comparable_is_not_a_matter_of_more_cells():
    rows = open_order(reference="SCE")
    found = by_axis(rows)["concentration"]
    assert not found.cells
    assert "record the ion content or the half-filling potential" in found.why


def test_potentials_span_the_declared_window_where_too_little_was_measured():
    rows = made.rows(2, term="R_sl", potentials=(3.0,), cells=2)
    for row in rows:
        row |= {"R_ct": 5.0}
    without = by_axis(rows)
    assert "potential" not in without or not without["potential"].cells
    found = by_axis(rows, window_low_V=2.9, window_high_V=3.3, window_reference="Na/Na+")
    if "potential" in found:
        values = {one.potential_V for cell in found["potential"].cells for one in cell.conditions}
        assert min(values) >= 2.9 and max(values) <= 3.3


def test_terms_not_told_apart_are_settled_at_the_reference_condition():
    rows = open_order(cells=2)
    rng = np.random.default_rng(4)
    own = {row["cell"]: rng.normal(0, 0.15) for row in rows}
    for row in rows:
        row["R_lat"] = 0.9 * row["R_ct"] * math.exp(own[row["cell"]])
    found = by_axis(rows)
    assert LARGEST in found
    used = {cell.electrolyte for cell in found[LARGEST].cells}
    assert len(used) == 1
    assert found[LARGEST].between in (("R_ct", "R_lat"), ("R_lat", "R_ct"))


def test_a_strong_verdict_asks_for_nothing():
    rows = made.rows(
        3, order=0.6, cells=3, solvents=("PC", "DMC"), factors={"DMC": 4.0}, between=0.05
    )
    for row in rows:
        row["R_ct"] *= math.exp(
            (12e3 if row["solvents"] == "DMC" else 0)
            / 8.314
            * (1 / row["temperature_K"] - 1 / 298.15)
        )
    planned = of_one(made.snapshot(rows), CRITERIA, "film", PLAN)
    assert (planned.verdict, planned.strength) == ("ion transport", "strong")
    assert planned.proposals == ()


def test_one_axis_and_one_electrode_can_be_asked_for():
    rows = [*open_order(), *open_order(5, electrode="other")]
    planned = propose(
        made.snapshot(rows), CRITERIA, PLAN, electrodes=["other"], axes=["concentration"]
    )
    assert [one.electrode for one in planned] == ["other"]
    assert {one.axis for each in planned for one in each.proposals} == {"concentration"}


def test_a_budget_is_kept_and_a_larger_one_promises_no_less():
    rows = made.rows(3, order=0.3, between=0.12, solvents=("PC", "DMC"))
    planned = propose(made.snapshot(rows), CRITERIA, PLAN)
    proposals = ranked([one for each in planned for one in each.proposals])
    promised = []
    assert [one.price for one in proposals] == sorted(one.price for one in proposals)
    for hours in (10.0, 25.0, 40.0, 80.0):
        chosen = within_budget(proposals, hours)
        assert sum(one.hours for one in chosen) <= hours
        assert len({(one.axis, one.response) for one in chosen}) == len(chosen)
        promised.append(sum(worth(one, option_of(one)) for one in chosen))
    assert promised == sorted(promised)
    assert promised[-1] > promised[0]


def test_the_best_set_of_a_budget_is_that_of_trying_all():
    rows = made.rows(3, order=0.3, between=0.12, solvents=("PC", "DMC"))
    planned = propose(made.snapshot(rows), CRITERIA, PLAN)
    proposals = [one for each in planned for one in each.proposals if one.frontier][:3]
    best = 0.0
    options = [
        [(0.0, 0.0), *((o.hours, worth(one, o)) for o in one.frontier if o.chance >= 0.3)]
        for one in proposals
    ]
    for combination in itertools.product(*options):
        if sum(hours for hours, _ in combination) <= 30.0:
            best = max(best, sum(value for _, value in combination))
    chosen = within_budget(proposals, 30.0)
    assert sum(worth(one, option_of(one)) for one in chosen) == pytest.approx(best)


def option_of(one):
    return next(option for option in one.frontier if option.cells == one.cells)


def test_a_seed_repeats_the_proposals():
    one, two = by_axis(open_order()), by_axis(open_order())
    assert {axis: found.as_dict() for axis, found in one.items()} == {
        axis: found.as_dict() for axis, found in two.items()
    }


def test_rows_are_plain_data_with_the_fixed_keys():
    for found in by_axis(open_order()).values():
        row = found.as_dict()
        json.dumps(row, allow_nan=False)
        assert {"electrode", "axis", "response", "add", "specimens", "hours", "interval_now",
                "interval_expected", "chance", "why", "cautions"} <= set(row)  # fmt: skip
        assert row["specimens"] == sum(one["cells"] for one in row["add"])


def test_a_campaign_of_one_reading_is_answered():
    rows = made.rows(1, concentrations=(1.0,), temperatures=(298.15,))
    planned = of_one(made.snapshot(rows), CRITERIA, "film", PLAN)
    assert planned.verdict == "undetermined"
    assert all(one.why for one in planned.proposals)
