"""The sentences of caution; the species table refers to them by key."""

from __future__ import annotations

# General laboratory knowledge, common practice, no source; the safety data sheet has the detail.
SENTENCES = {
    "oxidiser": "perchlorate, a strong oxidiser: may explode with organics when dried or heated",
    "oxidiser_salt": "an oxidiser: keep away from combustible material and reducing agents",
    "fluoride": (
        "gives hydrogen fluoride (HF) with moisture or heat: keep dry and have HF first aid ready"
    ),
    "arsenic": "contains arsenic: very toxic, and carcinogenic after decomposition",
    "corrosive": "corrosive to skin and eyes",
    "toxic": "toxic",
    "harmful": "harmful if swallowed or inhaled",
    "irritant": "irritates skin and eyes",
    "flammable": "flammable: keep from ignition sources, vapour forms explosive mixtures with air",
    "peroxide": "an ether that can form explosive peroxides on storage: test before distilling",
    "reprotoxic": "may damage fertility or the unborn child",
    "carcinogen": "suspected or known to cause cancer",
    "skin": "passes through the skin and carries solutes with it",
    "water_reactive": "reacts violently with water",
    "aquatic": "toxic to aquatic life: collect the waste",
}
METALS = ("Li", "Na", "K")
METAL_SENTENCE = (
    "alkali metal: ignites with water and can ignite in moist air; "
    "keep under inert gas and a class D extinguishant at hand"
)
UNKNOWN_SENTENCE = "not in the table of species: read its safety data sheet first"
CLOSING = (
    "The safety data sheet, the laboratory's risk assessment, local rules and qualified people "
    "decide; this program proposes and does not authorise."
)
