"""Tables for papers: what Markdown and LaTeX would read is escaped, minus signs are set."""

import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.present.papers import escape, interval_text, latex, markdown

CRITERIA = {
    "order_margin": 0.15, "ratio_margin": 1.5, "barrier_margin_kJ_mol": 8.0,
    "error_probability": 0.1, "potential_window_V": 0.1, "temperature_tolerance_K": 1.0,
    "potential_tolerance_V": 0.005, "content_tolerance": 0.02, "working_time_s": 10.0,
    "confounding_r": 0.7, "heterogeneity_p": 0.01,
}  # fmt: skip


def found(label="A & B_1", **changes):
    row = {
        "electrode": label, "n_specimens": 9, "dominant": "R_ct", "share": 0.8,
        "cell_limited": False, "verdict": "host", "text": "leans to host", "strength": "weak",
        "diagnostics": {
            "concentration": {"order": -0.0367, "order_ci": [-0.08, 0.0062]},
            "solvent": {"ratio": 0.25, "ratio_ci": [0.2, 0.4]},
            "barrier": {"series": [{"Ea_kJ_mol": 41.2}, {"Ea_kJ_mol": 55.4}]},
            "potential": {"law": "valley"},
        },
    }  # fmt: skip
    return {"criteria": CRITERIA, "rows": [{**row, **changes}]}


def test_values_are_rounded_to_their_interval():
    assert interval_text(-0.0367, (-0.0796, 0.0062)) == "-0.037 [-0.080, 0.006]"
    assert interval_text(None, None) == ""


def test_latex_is_escaped_and_set():
    text = latex(found())
    assert "A \\& B\\_1 & 9 & $R_\\mathrm{ct}$ (80 \\%) & $-$0.037 [$-$0.080, 0.006]" in text
    # R(a)/R(b) of 0.25 (0.2 to 0.4) is shown as the factor 4 (2.5 to 5)
    assert "& 4.0 [2.5, 5.0] & 41 to 55 & valley & leans to host & weak \\\\" in text
    assert "90 \\% intervals" in text
    assert text.count("{") == text.count("}")


def test_markdown_is_escaped_and_set():
    text = markdown(found("a|b*c"))
    head, rule, row = text.splitlines()[:3]
    assert head.count(" | ") == rule.count(" | ")
    assert row.startswith("| a\\|b\\*c | 9 | R\\_ct (80 %) | −0.037 \\[−0.080, 0.006\\] |")
    assert "90 % intervals" in text


def test_groups_and_empty_columns():
    assert "| Electrode | Temperature |" in markdown(found(temperature="25.0 °C"))
    assert "\\textdegree{}C" in latex(found(temperature="25.0 °C"))
    assert "Strength" not in markdown(found(strength=None))


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("-3 V", "$-$3 V"), ("EC:DMC 1-1", "EC:DMC 1-1"), ("Na-ion", "Na-ion"),
        ("50 % {x} ~^ \\", "50 \\% \\{x\\} \\textasciitilde{}\\textasciicircum{} "
         "\\textbackslash{}"), ("R_sl and R_x", "$R_\\mathrm{sl}$ and R\\_x"),
    ],
)  # fmt: skip
def test_escaping(text, shown):
    assert escape(text) == shown


BARE = re.compile(r"(?<!\\)[&#%_]")


@settings(max_examples=200)
@given(st.text(alphabet=st.characters(codec="utf-8", exclude_categories=["C"]), max_size=40))
def test_no_special_character_is_left_bare(text):
    plain = re.sub(r"\$[^$]*\$", "", escape(text).replace("\\$", ""))
    assert not BARE.search(plain)
    assert "$" not in plain
