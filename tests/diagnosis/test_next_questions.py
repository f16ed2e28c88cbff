"""Which open diagnostics can change a verdict."""

import pytest

from campaign.diagnosis.engine import assess
from campaign.diagnosis.next_questions import (
    ALONE,
    STRENGTH,
    TOGETHER,
    needed_alpha,
    open_axes,
    predicted,
    questions,
)
from campaign.diagnosis.signatures import candidates
from campaign.diagnosis.verdict import Judged


def judged(response, evidence):
    return Judged(response, evidence, assess(candidates(response), evidence))


def asked(response, evidence):
    return {one.axis: one for one in questions(judged(response, evidence), 0.05)}


def test_a_step_with_two_required_predictions_falls_at_half_the_error():
    # DESIGN: a step with r required predictions is eliminated only at 1 - 0.05/r intervals
    assert needed_alpha("R_ct", "concentration", 0.05) == 0.025
    assert needed_alpha("R_ct", "potential", 0.05) == 0.05
    assert needed_alpha("R_lat", "concentration", 0.05) == 0.05


def test_only_predicted_axes_are_asked():
    assert "age" not in predicted("R_ct")
    assert "additive" not in predicted("R_lat")


def test_concentration_decides_between_lattice_and_surface_diffusion(says):
    evidence = {axis: says("open") for axis in predicted("R_lat")}
    found = asked("R_lat", evidence)
    one = found["concentration"]
    assert one.changes == ALONE
    assert one.outcomes == {"responds": "ion transport", "unresponsive": "host"}


def test_an_axis_that_matters_only_with_others_is_said_to(says):
    evidence = {axis: says("open") for axis in predicted("R_ct")}
    found = asked("R_ct", evidence)
    assert found["concentration"].changes == ALONE
    assert found["barrier"].changes == TOGETHER


def test_what_is_decided_at_the_eliminating_level_is_not_asked_again(says):
    evidence = {
        "concentration": says("responds"), "solvent": says("responds"),
        "barrier": says("responds"), "potential": says("responds"),
        "additive": says("unresponsive"),
    }  # fmt: skip
    assert asked("R_ct", evidence) == {}


def test_what_is_decided_only_at_the_looser_level_is_still_open(says):
    loose = says("responds", from_alpha=0.04)
    evidence = {axis: says("open") for axis in predicted("R_ct")} | {"concentration": loose}
    assert "concentration" in open_axes("R_ct", evidence, 0.05)
    firm = says("responds", from_alpha=0.02)
    assert "concentration" not in open_axes("R_ct", evidence | {"concentration": firm}, 0.05)


def test_an_answer_that_only_grades_the_verdict_changes_its_strength(says, untested):
    evidence = {
        "concentration": says("unresponsive"), "solvent": untested, "additive": untested,
        "potential": untested, "barrier": untested,
    }  # fmt: skip
    found = asked("R_lat", {axis: evidence[axis] for axis in predicted("R_lat")})
    # the potential is predicted alike by both steps: it tells them apart no better
    assert {axis: one.changes for axis, one in found.items()} == {
        "solvent": STRENGTH, "barrier": STRENGTH,
    }  # fmt: skip
    assert all(one.outcomes["unresponsive"] == "host" for one in found.values())


@pytest.mark.parametrize("response", ["R_el", "R_sl", "R_ct", "R_lat", "sigma_w"])
def test_a_question_has_two_answers_that_do_not_both_leave_all_as_it_is(response, says):
    evidence = {axis: says("open") for axis in predicted(response)}
    for one in asked(response, evidence).values():
        if one.changes == ALONE:
            assert set(one.outcomes.values()) != {"undetermined"}
