"""Every step can be reached, eliminated and left untested; every rule of elimination."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.diagnosis.engine import assess
from campaign.diagnosis.signatures import AXES, CANDIDATES, Prediction, Step, candidates
from campaign.statistics.estimate import Estimate


class Shown:
    """A finding with levels that says one word at every level."""

    slope = Estimate(0.0, 1.0, 5)

    def __init__(self, word):
        self.word = word

    def decision(self, alpha=0.05):
        return self.word


PAIRS = [(response, step) for step in CANDIDATES for response in step.seen_in]
IDS = [f"{step.name}, {response}" for response, step in PAIRS]
OPPOSITE = {"responds": "unresponsive", "unresponsive": "responds"}


def of(step, response, evidence, **options):
    found = assess(candidates(response), evidence, **options)
    return next(one for one in found if one.step == step)


def fulfilled(step, says):
    return {axis: says(p.outcome) for p in step.predictions for axis in p.axes}


@pytest.mark.parametrize(("response", "step"), PAIRS, ids=IDS)
def test_every_step_can_be_reached(response, step, says):
    found = of(step, response, fulfilled(step, says))
    assert found.status == "stands"
    assert found.opposing == ()
    assert found.required_confirmed == found.required_total == len(step.required)
    assert set(found.confirmed) == {axis for p in step.predictions for axis in p.axes}


@pytest.mark.parametrize(("response", "step"), PAIRS, ids=IDS)
def test_every_step_can_be_eliminated(response, step, says):
    for prediction in step.required:
        evidence = fulfilled(step, says)
        evidence |= {axis: says(OPPOSITE[prediction.outcome]) for axis in prediction.axes}
        found = of(step, response, evidence)
        assert found.status == "eliminated"
        assert len(found.opposing) == 1
        assert prediction.axes[0] in found.opposing[0]


@pytest.mark.parametrize(("response", "step"), PAIRS, ids=IDS)
def test_every_step_can_be_left_untested(response, step, says, untested):
    for evidence in ({}, dict.fromkeys(AXES, untested), dict.fromkeys(AXES, says("open"))):
        found = of(step, response, evidence)
        assert found.status == "untested"
        assert found.supporting == found.opposing == found.confirmed == ()
        assert set(found.open_axes) == {axis for p in step.predictions for axis in p.axes}


@pytest.mark.parametrize(("response", "step"), PAIRS, ids=IDS)
def test_a_typical_prediction_counts_against_but_never_eliminates(response, step, says):
    for prediction in step.predictions:
        if not prediction.required:
            evidence = fulfilled(step, says)
            evidence |= {axis: says(OPPOSITE[prediction.outcome]) for axis in prediction.axes}
            found = of(step, response, evidence)
            assert found.status == "stands"
            assert "typical" in found.opposing[0]


@pytest.mark.parametrize(("response", "step"), PAIRS, ids=IDS)
def test_elimination_asks_for_the_stricter_level(response, step, says):
    r = len(step.required)
    for prediction in step.required:
        for alpha, status in ((0.05 / r, "eliminated"), (0.05 / r * 1.01, "stands")):
            evidence = {
                axis: says(OPPOSITE[prediction.outcome], from_alpha=alpha)
                for axis in prediction.axes
            }
            if r == 1 and status == "stands":
                continue  # then the level is that of any decision, and there is none at all
            found = of(step, response, evidence)
            assert found.status == status
            if status == "stands":
                assert "stricter level" in found.opposing[0]


def test_an_either_or_falls_only_when_all_its_testable_parts_are_against(says, untested):
    step = next(one for one in CANDIDATES if one.name == "desolvation and adsorption")
    against, open_, for_ = says("unresponsive"), says("open"), says("responds")
    cases = [
        ({"solvent": against, "barrier": against}, "eliminated"),
        ({"solvent": against, "barrier": open_}, "stands"),
        ({"solvent": open_, "barrier": against}, "stands"),
        ({"solvent": against, "barrier": for_}, "stands"),
        ({"solvent": against, "barrier": untested}, "eliminated"),
        ({"solvent": against}, "eliminated"),
        ({"barrier": against}, "eliminated"),
        ({"solvent": untested, "barrier": untested}, "untested"),
    ]
    for evidence, status in cases:
        assert of(step, "R_ct", evidence).status == status, evidence


def test_one_part_of_an_either_or_confirms_it(says):
    step = next(one for one in CANDIDATES if one.name == "migration through the surface layer")
    found = of(step, "R_sl", {"solvent": says("unresponsive"), "additive": says("responds")})
    assert (found.required_confirmed, found.confirmed) == (1, ("additive",))
    assert "another part" in found.opposing[0]


@pytest.mark.parametrize(("response", "step"), PAIRS, ids=IDS)
def test_an_inverse_response_confirms_nothing_and_contradicts_both(response, step, says):
    found = of(step, response, {"concentration": says("responds, inverse")})
    assert found.confirmed == ()
    predicted = [p for p in step.predictions if "concentration" in p.axes]
    if not predicted:
        assert found.status == "untested"
    else:
        assert found.opposing
        assert found.status == ("eliminated" if predicted[0].required else "stands")


def test_an_absent_surface_layer_eliminates_migration_only(says):
    found = assess(candidates("R_sl"), {"solvent": says("responds")}, absent={"R_sl"})
    status = {one.step.name: one.status for one in found}
    assert status == {
        "electronic contact": "eliminated", "migration through the surface layer": "eliminated",
    }  # fmt: skip
    found = assess(candidates("R_sl"), {}, absent={"R_sl"})
    assert [one.status for one in found] == ["untested", "eliminated"]
    assert "absent" in found[1].opposing[0]


@pytest.mark.parametrize(
    ("response", "step", "discriminating"),
    [
        ("R_ct", "coupled ion and electron transfer", {"concentration", "potential", "barrier"}),
        ("R_ct", "desolvation and adsorption", {"concentration", "solvent", "barrier"}),
        ("R_lat", "surface diffusion of adsorbed ions", {"concentration"}),
        ("R_lat", "incorporation into the lattice", {"concentration", "solvent", "barrier"}),
        ("R_sl", "migration through the surface layer", {"solvent", "additive", "age"}),
        ("R_sl", "electronic contact", {"concentration", "solvent", "additive", "barrier"}),
        ("R_el", "electrolyte conduction", {"concentration", "solvent", "age"}),
    ],
)
def test_what_all_candidates_share_confirms_none(response, step, discriminating, says):
    step = next(one for one in candidates(response) if one.name == step)
    assert set(of(step, response, fulfilled(step, says)).discriminating) == discriminating


def test_the_engine_applies_any_table(says):
    heavy = Step("sinks", ("depth",), "host", (Prediction(("weight",), "responds", True),))
    light = Step("floats", ("depth",), "mixed", (Prediction(("weight",), "unresponsive", True),))
    found = assess((heavy, light), {"weight": says("responds")})
    assert [one.status for one in found] == ["stands", "eliminated"]


@settings(max_examples=60, deadline=None)
@given(
    words=st.lists(
        st.sampled_from(["responds", "responds, inverse", "unresponsive", "open"]),
        min_size=6,
        max_size=6,
    ),
    response=st.sampled_from(["R_el", "R_sl", "R_ct", "R_lat", "sigma_w"]),
)
def test_opening_a_finding_never_eliminates_more(words, response):
    def statuses(said):
        evidence = {axis: Shown(word) for axis, word in zip(AXES, said, strict=True)}
        return [one.status for one in assess(candidates(response), evidence)]

    before = statuses(words)
    for i in range(len(AXES)):
        after = statuses([*words[:i], "open", *words[i + 1 :]])
        for old, new in zip(before, after, strict=True):
            assert not (new == "eliminated" and old != "eliminated")
