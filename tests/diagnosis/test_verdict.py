"""The rules from surviving steps to word and strength, one by one."""

import pytest

from campaign.diagnosis.engine import assess
from campaign.diagnosis.signatures import UNEXPLAINED, candidates
from campaign.diagnosis.verdict import (
    WORDS,
    Judged,
    Verdict,
    agree,
    confounded_axes,
    judge,
    limit,
)


@pytest.fixture
def judged(says):
    def build(response, absent=frozenset(), **words):
        evidence = {
            axis: says(word) if isinstance(word, str) else word for axis, word in words.items()
        }
        return Judged(response, evidence, assess(candidates(response), evidence, absent=absent))

    return build


def test_the_six_words():
    assert sorted(WORDS) == [
        "conflicting", "electron transfer", "host", "ion transport", "mixed", "undetermined",
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("response", "words", "word", "strength"),
    [
        # one control left, all required confirmed, two discriminating confirmations
        ("R_ct", {"concentration": "responds", "solvent": "responds", "barrier": "responds"},
         "ion transport", "strong"),
        ("R_ct", {"concentration": "responds", "solvent": "unresponsive",
                  "barrier": "unresponsive"}, "mixed", "strong"),
        ("R_ct", {"concentration": "unresponsive", "solvent": "unresponsive"},
         "electron transfer", "strong"),
        ("R_sl", {"solvent": "responds", "additive": "responds"}, "ion transport", "strong"),
        ("sigma_w", {"concentration": "unresponsive", "solvent": "unresponsive"}, "host",
         "strong"),
        ("R_lat", {"concentration": "unresponsive", "solvent": "unresponsive"}, "host", "strong"),
        # one discriminating confirmation only
        ("R_lat", {"concentration": "responds", "potential": "responds"}, "ion transport",
         "moderate"),
        ("R_lat", {"concentration": "unresponsive"}, "host", "moderate"),
        ("R_sl", {"solvent": "responds"}, "ion transport", "moderate"),
        # a required prediction that the levels do not allow to be tested
        ("R_ct", {"concentration": "unresponsive"}, "electron transfer", "moderate"),
        # a testable required prediction that is open
        ("R_ct", {"concentration": "unresponsive", "solvent": "open"}, "electron transfer",
         "weak"),
        ("sigma_w", {"concentration": "responds", "potential": "open"}, "ion transport", "weak"),
        # ion transport and mixed both left
        ("R_ct", {"concentration": "responds"}, "ion transport", "weak"),
        ("R_ct", {"concentration": "responds", "solvent": "responds", "barrier": "open"},
         "ion transport", "weak"),
        # nothing discriminates
        ("R_ct", {}, "undetermined", None),
        ("R_ct", {"potential": "responds"}, "undetermined", None),
        ("R_lat", {"potential": "responds"}, "undetermined", None),
        ("R_el", {"potential": "unresponsive"}, "undetermined", None),
        # none left
        ("R_ct", {"concentration": "unresponsive", "solvent": "responds"}, "conflicting", None),
        ("R_ct", {"concentration": "responds, inverse"}, "conflicting", None),
        ("sigma_w", {"concentration": "unresponsive", "solvent": "responds"}, "conflicting", None),
        # R_el, where electronic contact and conduction compete
        ("R_el", {"concentration": "responds", "potential": "unresponsive"}, "ion transport",
         "moderate"),
        ("R_el", {"concentration": "unresponsive", "solvent": "unresponsive",
                  "potential": "responds"}, "electron transfer", "strong"),
    ],
)  # fmt: skip
def test_word_and_strength(judged, response, words, word, strength):
    found = judge(judged(response, **words))
    assert (found.word, found.strength) == (word, strength)
    assert found.text == (f"leans to {word}" if strength == "weak" else word)


def test_all_survivors_of_one_control_without_a_discriminating_confirmation(judged):
    found = judge(judged("R_sl", absent={"R_sl"}))
    assert found.word == "undetermined"
    assert "nothing that tells it from the others" in found.because[0]


def test_coupled_transfer_not_excluded_says_which_test_would(judged):
    found = judge(judged("R_ct", concentration="responds", solvent="responds"))
    assert "coupled ion and electron transfer is not excluded" in found.missing
    assert any(text.startswith("barrier not tested: measure temp") for text in found.missing)


def test_a_stated_reason_is_what_is_missing(judged, says):
    reason = says("open", open_because="potential not comparable")
    found = judge(judged("R_ct", concentration=reason))
    assert "concentration open: potential not comparable" in found.missing


def test_conflicting_names_the_readings_that_explain_it(judged):
    found = judge(judged("R_ct", concentration="unresponsive", solvent="responds"))
    assert any("film" in text or "surface-layer arc merged" in text for text in found.missing)
    assert any("solvent reorganisation" in text for text in found.missing)
    inverse = judge(judged("R_ct", concentration="responds, inverse"))
    assert any("ion pairing" in text for text in inverse.missing)
    bare = judge(
        judged("sigma_w", concentration="responds", solvent="responds", potential="responds")
    )
    assert (bare.word, bare.missing) == ("conflicting", (UNEXPLAINED,))


def test_a_step_is_judged_eliminated_in_an_electrolyte_without_its_arc(judged):
    found = judge(judged("R_sl", absent={"R_sl"}, solvent="responds"))
    assert found.word == "conflicting"


STRONG = Verdict("host", "strong")


def test_strong_survives_every_removal():
    asked = []

    def without(specimen):
        asked.append(specimen)
        return "host"

    assert limit(STRONG, specimens=["a", "b", "c"], without=without).strength == "strong"
    assert asked == ["a", "b", "c"]


def test_one_removal_that_changes_the_verdict_makes_it_moderate():
    found = limit(
        STRONG,
        specimens=["a", "b"],
        without=lambda one: "undetermined" if one == "b" else "host",
    )
    assert found.strength == "moderate"
    assert "without specimen b the verdict is undetermined" in found.warnings[0]


def test_a_single_specimen_is_never_strong():
    assert limit(STRONG, specimens=["a"], without=lambda one: "host").strength == "moderate"


def test_removal_is_asked_only_where_all_else_says_strong():
    def without(specimen):
        raise AssertionError("asked for nothing")

    for strength in ("moderate", "weak"):
        found = limit(Verdict("host", strength), specimens=["a", "b"], without=without)
        assert found.strength == strength
    assert limit(STRONG, confounded=["solvent"], without=without).strength == "moderate"
    assert limit(STRONG, two_electrode=True, without=without).strength == "weak"


@pytest.mark.parametrize(
    ("before", "after"), [("strong", "moderate"), ("moderate", "weak"), ("weak", "weak")]
)
def test_failed_checks_lower_one_grade(before, after):
    found = limit(Verdict("host", before), failed_checks=["order of time constants"])
    assert found.strength == after
    assert "order of time constants" in found.warnings[0]


@pytest.mark.parametrize("before", ["strong", "moderate", "weak"])
def test_two_electrode_cells_are_at_most_weak_and_said(before):
    found = limit(Verdict("host", before), two_electrode=True)
    assert (found.word, found.strength) == ("host", "weak")
    assert "counter electrode" in found.warnings[0]


@pytest.mark.parametrize("word", ["undetermined", "conflicting"])
def test_no_strength_is_left_alone(word):
    verdict = Verdict(word, None)
    assert limit(verdict, two_electrode=True, failed_checks=["x"]) == verdict


def test_terms_not_told_apart_that_lead_to_the_same_control_agree():
    both = {"R_lat": Verdict("host", "strong"), "diffusion": Verdict("host", "weak")}
    found = agree(both)
    assert (found.word, found.strength) == ("host", "weak")


@pytest.mark.parametrize("other", [Verdict("mixed", "strong"), Verdict("undetermined", None)])
def test_terms_not_told_apart_that_differ_leave_it_undetermined(other):
    found = agree({"R_ct": Verdict("host", "strong"), "R_sl": other})
    assert (found.word, found.strength) == ("undetermined", None)
    assert "R_ct and R_sl" in found.missing[0]


def test_two_undetermined_terms_do_not_agree_on_a_control():
    found = agree(dict.fromkeys(("R_ct", "R_sl"), Verdict("undetermined", None)))
    assert found.word == "undetermined"


def test_confounding_counts_where_the_verdict_rests_on_the_axis(judged, says):
    one = judged(
        "R_lat",
        concentration=says("responds", confounded=True),
        solvent=says("open", confounded=True),
        age=says("responds", confounded=True),
    )
    assert confounded_axes(one) == ("concentration",)
