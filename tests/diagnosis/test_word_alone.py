"""The word alone, found with as few findings as it takes, is the word of the whole judgement."""

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from campaign.diagnosis.engine import assess
from campaign.diagnosis.lazy import LazyEvidence, trend_evidence
from campaign.diagnosis.signatures import AXES, RESPONSES, candidates
from campaign.diagnosis.summary import settle, settle_word
from campaign.diagnosis.verdict import Judged, judge, word_alone
from campaign.ledger.criteria import Criteria
from campaign.trends.evidence import findings

SAID = ("responds", "responds, inverse", "unresponsive", "open")
FINDING = st.tuples(st.sampled_from(SAID), st.sampled_from([0.0, 0.02, 0.2]), st.booleans())
EVIDENCE = st.dictionaries(st.sampled_from(AXES), FINDING)


@settings(
    max_examples=400, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(EVIDENCE, st.sampled_from(RESPONSES), st.booleans())
def test_the_word_alone_is_that_of_the_judgement(says, stated, response, gone):
    evidence = {
        axis: says(word, from_alpha=level, tested=tested)
        for axis, (word, level, tested) in stated.items()
    }
    absent = frozenset({response}) if gone else frozenset()
    steps = candidates(response)
    whole = judge(Judged(response, evidence, assess(steps, evidence, absent=absent)))
    assert word_alone(response, evidence, absent=absent) == whole.word


@settings(
    max_examples=80, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(st.dictionaries(st.sampled_from(RESPONSES), EVIDENCE), st.floats(1, 100))
def test_and_where_several_terms_are_not_told_apart(says, snapshot_of, stated, size):
    def source(snapshot, criteria, electrode, response):
        return {
            axis: says(word, from_alpha=level, tested=tested)
            for axis, (word, level, tested) in stated.get(response, {}).items()
        }

    rows = [
        {"specimen": f"c{i}", "R_sl": 20.0 * (1 + 0.3 * i), "R_ct": size * (1.4 - 0.2 * i)}
        for i in range(3)
    ]
    snapshot = snapshot_of(rows)
    whole = settle(snapshot, Criteria(), "A", source)
    assert settle_word(snapshot, Criteria(), "A", source) == whole.verdict.word


def test_only_what_is_asked_for_is_estimated(says):
    asked = []

    def estimate(axis):
        asked.append(axis)
        return says({"concentration": "unresponsive", "solvent": "unresponsive"}.get(axis, "open"))

    evidence = LazyEvidence(AXES, estimate)
    assert word_alone("R_ct", evidence) == "electron transfer"
    assert sorted(asked) == ["concentration", "solvent"]
    assert list(evidence) == list(AXES)
    assert "colour" not in evidence


def test_the_lazy_findings_are_those_of_the_trends(snapshot_of):
    rows = [
        {"specimen": f"s{c}{k}", "concentration": c, "electrolyte": f"{c} M NaX in PC",
         "temperature_K": t, "ion_content": 0.5, "R_ct": 40 * c**-0.5 * (1 + 0.03 * k)}
        for c in (0.1, 0.5, 1.0) for k in range(3) for t in (288.15, 298.15)
    ]  # fmt: skip
    snapshot = snapshot_of(rows)
    lazy = trend_evidence(snapshot, Criteria(), "A", "R_ct")
    whole = findings(snapshot, Criteria(), "A", "R_ct")
    assert set(lazy) == set(whole)
    for axis, finding in whole.items():
        assert lazy[axis].decision(0.05) == finding.decision(0.05)
        assert lazy[axis] is lazy[axis]
