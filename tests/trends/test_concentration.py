"""The reaction order: known truths, decisions, units of experiment, state, confounding."""

from __future__ import annotations

import math

import numpy as np
import pytest
from simulated_campaign import FARADAY, GAS, START, simulate, snapshot, with_facts

from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrolyteFacts
from campaign.trends import concentration
from campaign.trends.bases import molar
from campaign.trends.sample import comparable, draw, source

KEYS = {
    "electrode", "salt", "solvents", "additives", "order", "order_ci", "df", "n_specimens",
    "n_measurements", "sigma_between", "sigma_within", "decision", "warnings",
}  # fmt: skip


def orders(rows, facts=None, **options):
    return concentration.estimate(snapshot(rows, facts), Criteria(), **options)


def test_a_known_order_comes_back_with_the_keys_of_the_interface(rng):
    result = orders(simulate(rng, order=0.5, solvents={"EC:DMC (1:1 v/v)": 1.0, "PC": 2.0}))
    assert [e.solvents for e in result.estimates] == ["EC:DMC (1:1 v/v)", "PC"]
    for e in result.estimates:
        assert e.order_ci[0] < 0.5 < e.order_ci[1]
        assert e.decision == "responds"
        assert (e.n_specimens, e.n_measurements, len(e.rows)) == (12, 180, 180)
        assert 0.03 < e.sigma_within < 0.05 and 0.07 < e.sigma_between < 0.3
    whole = result.as_dict()
    assert whole["estimates"][0].keys() >= KEYS
    assert whole["axis"] == "concentration" and whole["unit"] == "ohm cm2"


def test_the_fit_is_the_mixed_model_of_a_reference_library(rng):
    """statsmodels MixedLM: random specimen intercept, temperature as fixed effects, REML."""
    import pandas as pd
    import statsmodels.formula.api as smf

    rows = simulate(rng, order=0.4, se=None, cells=2)
    rows = [row for i, row in enumerate(rows) if i % 7]  # unbalanced
    e = orders(rows).estimates[0]
    data = {
        "y": [math.log(row["R_ct"]) for row in rows],
        "x": [math.log(row["concentration"]) for row in rows],
        "t": [str(row["temperature_K"]) for row in rows],
        "g": [row["cell"] for row in rows],
    }
    frame = pd.DataFrame(data)
    theirs = smf.mixedlm("y ~ x + C(t)", frame, groups=frame["g"]).fit(reml=True)
    assert e.order == pytest.approx(-theirs.params["x"], rel=1e-4)
    assert e.sigma_between == pytest.approx(math.sqrt(float(theirs.cov_re.iloc[0, 0])), rel=1e-3)
    assert e.sigma_within == pytest.approx(math.sqrt(theirs.scale), rel=1e-3)


def test_no_effect_is_shown_not_inferred(rng):
    flat = orders(simulate(rng, order=0.0, cells=4, between=0.1)).estimates[0]
    assert flat.decision == "unresponsive"
    few = orders(simulate(rng, order=0.0, cells=1, between=0.3)).estimates[0]
    assert few.decision == "open"


def test_a_negative_order_responds_inversely(rng):
    assert orders(simulate(rng, order=-0.6)).estimates[0].decision == "responds, inverse"


def test_repeated_readings_of_one_cell_do_not_narrow_the_interval(rng):
    few = orders(simulate(np.random.default_rng(5), cells=2, repeats=2)).estimates[0]
    many = orders(simulate(np.random.default_rng(5), cells=2, repeats=40)).estimates[0]
    assert few.df == pytest.approx(6.0, abs=0.1) and many.df == pytest.approx(6.0, abs=0.1)
    width = [e.order_ci[1] - e.order_ci[0] for e in (few, many)]
    # bounded by the scatter between cells: 8 cells at sd(ln c) = 1.24
    assert width[1] > 0.5 * 2 * 2.45 * many.sigma_between / (math.sqrt(8) * 1.24)
    assert many.n_measurements == 20 * few.n_measurements


def test_one_specimen_moved_through_all_electrolytes_has_no_interval_and_it_is_said(rng):
    rows = [{**row, "specimen": "piece 1"} for row in simulate(rng, cells=1, between=0.05)]
    e = orders(rows).estimates[0]
    assert e.order_ci is None and e.n_specimens == 1 and e.decision == "open"
    assert any("one specimen" in text for text in e.warnings)


def test_moved_specimens_use_the_scatter_of_assemblies(rng):
    """Three pieces, each moved through four cells; each assembly scatters by 10 %."""

    def campaign(repeats):
        rows = simulate(np.random.default_rng(8), cells=3, between=0.1, repeats=repeats)
        return [{**row, "specimen": f"piece {int(row['cell'][5:]) % 3}"} for row in rows]

    few, many = (orders(campaign(repeats)).estimates[0] for repeats in (2, 30))
    assert few.n_specimens == 3
    for e in (few, many):
        assert e.order_ci[0] < 0.5 < e.order_ci[1]
        assert e.order_ci[1] - e.order_ci[0] > 2 * 2 * 0.05 / (math.sqrt(12) * 1.24)
    assert few.sigma_within == pytest.approx(0.04, abs=0.01)


def test_one_cell_a_concentration_gives_an_order_but_no_level_intervals(rng):
    e = orders(simulate(rng, cells=1)).estimates[0]
    assert e.order_ci is not None and e.df == pytest.approx(2.0, abs=0.01)
    assert all(ratio.ratio_ci is None for ratio in e.ratios)


def test_two_cells_at_two_concentrations_have_no_interval(rng):
    e = orders(simulate(rng, cells=1, concentrations=(0.1, 1.0))).estimates[0]
    assert e.order_ci is None and e.decision == "open"
    assert any("no interval between specimens" in text for text in e.warnings)


def test_no_contrast_is_listed_with_its_reason(rng):
    rows = simulate(rng, concentrations=(1.0,))
    rows += [{**row, "solvents": "PC", "cell": "x" + row["cell"]} for row in simulate(
        rng, concentrations=(0.1,), temperatures=(298.15,))]  # fmt: skip
    rows += [{**row, "solvents": "PC", "cell": "y" + row["cell"]} for row in simulate(
        rng, concentrations=(1.0,), temperatures=(313.15,))]  # fmt: skip
    result = orders(rows)
    assert result.estimates == ()
    assert [gone.reason for gone in result.left_out] == [
        "one concentration only (1)",
        "no stratum holds two concentrations under equal conditions",
    ]


def test_strata_without_contrast_are_counted(rng):
    rows = simulate(rng)
    rows = [row for row in rows if row["temperature_K"] > 280 or row["concentration"] == 1.0]
    e = orders(rows).estimates[0]
    assert [(gone.reason, gone.count) for gone in e.left_out] == [("strata without contrast", 9)]
    assert e.n_measurements == len(rows) - 9


def test_missing_errors_are_flagged_and_counted(rng):
    rows = simulate(rng)
    for row in rows[:7]:
        del row["R_ct_se"]
    assert orders(rows).estimates[0].flagged_se == 7


def half_filling_campaign(rng, matched: bool, **recorded):
    """Interfacial kinetics without order in c, read against a fixed reference.

    The half-filling potential moves by RT/F ln c; R_ct is the valley around it. `matched`
    readings follow the half-filling potential, the others sit at one potential, on the flank.
    """
    rows = []
    T = 298.15
    for i, c in enumerate((0.1, 0.3, 1.0, 3.0)):
        half = 0.20 + GAS * T / FARADAY * math.log(c)
        for k in range(4):
            scatter = rng.normal(0, 0.08)
            for _ in range(3):
                E = half + 0.20 if matched else 0.40
                valley = math.log(math.cosh(FARADAY * (E - half) / (2 * GAS * T)))
                rows.append({
                    "cell": f"c{i}{k}", "concentration": c, "reference": "Ag/AgCl",
                    "potential_V": E, "R_ct": 5 * math.exp(valley + scatter + rng.normal(0, 0.02)),
                    **dict.fromkeys(recorded, half),
                })  # fmt: skip
    return rows


def test_matching_on_a_fixed_reference_shifts_the_order_and_the_rule_says_so(rng):
    e = orders(half_filling_campaign(rng, matched=False)).estimates[0]
    assert e.order == pytest.approx(0.5, abs=0.12)  # truth 0: all of it is the shift
    assert e.decision == "open: potential not comparable"


def test_matching_on_the_distance_from_half_filling_removes_the_shift(rng):
    e = orders(half_filling_campaign(rng, matched=True, E_half_V=True)).estimates[0]
    assert e.order_ci[0] < 0.0 < e.order_ci[1] and abs(e.order) < 0.12
    assert e.decision == "unresponsive"


def test_half_filling_recorded_but_never_matched_gives_the_estimate_and_leaves_it_open(rng):
    e = orders(half_filling_campaign(rng, matched=False, E_half_V=True)).estimates[0]
    assert e.decision == "open: potential not comparable"


def test_confounding_with_the_date_is_warned_with_the_adjusted_order_beside(rng):
    rows = simulate(rng, order=0.5, cells=3, between=0.05)
    for row in rows:
        # diluted cells were made late; everything drifts by 1 % a day
        day = 40.0 * (1.0 - math.log10(row["concentration"])) + int(row["cell"][5:]) % 3 * 9.0
        row["assembled_at"] = START + 86400 * day
        row["measured_at"] += 86400 * (day + 1.0)
        row["R_ct"] *= math.exp(0.01 * day)
    e = orders(rows).estimates[0]
    assert any(text.startswith("confounded: concentration") for text in e.warnings)
    assert e.finding.confounded
    assert abs(e.order - 0.5) > 0.12
    assert e.adjusted.ci[0] < 0.5 < e.adjusted.ci[1]


def test_a_campaign_in_random_order_is_not_called_confounded(rng):
    rows = simulate(rng, cells=4)
    days = {row["cell"]: float(rng.uniform(0, 90)) for row in rows}
    for row in rows:
        row["assembled_at"] = START + 86400 * days[row["cell"]]
        row["measured_at"] += 86400 * days[row["cell"]]
    assert not orders(rows).estimates[0].finding.confounded


def test_molality_and_concentration_are_separate_series_without_a_density(rng):
    rows = simulate(rng, concentrations=(0.1, 0.3, 1.0))
    for row in rows:
        if row["concentration"] == 1.0:
            row["basis"] = "mol/kg"
    result = orders(rows)
    assert [e.basis for e in result.estimates] == ["mol/L"]
    assert result.left_out[-1].reason == "one concentration only (1)"
    assert any("stay separate series" in text for text in result.estimates[0].warnings)


def test_a_density_joins_the_bases(rng):
    rows = simulate(rng, concentrations=(0.1, 0.3, 1.0))
    for row in rows:
        if row["concentration"] == 1.0:
            row.update(basis="mol/kg", electrolyte="molal", concentration=0.8)
    facts = [ElectrolyteFacts("molal", density_g_cm3=1.3)]
    e = concentration.estimate(snapshot(rows, electrolytes=facts), Criteria()).estimates[0]
    # NaPF6 167.95 g/mol (IUPAC standard atomic weights): 0.8 * 1.3 / (1 + 0.8 * 0.16795)
    assert e.levels == pytest.approx((0.1, 0.3, 0.9167), rel=1e-3)
    assert molar(0.8, 1.3, 167.95) == pytest.approx(0.9167, rel=1e-3)


def test_order_in_activity_where_coefficients_are_tabulated(rng):
    rows = simulate(rng, order=0.5)
    gamma = {0.1: 0.8, 0.3: 0.6, 1.0: 0.5, 3.0: 0.7}
    for row in rows:
        row["electrolyte"] = f"e{row['concentration']}"
        row["R_ct"] *= gamma[row["concentration"]] ** -0.5
        row["R_ct_se"] = 0.01 * row["R_ct"]
    facts = [
        ElectrolyteFacts(f"e{c}", activity=((278.15, g), (318.15, g))) for c, g in gamma.items()
    ]
    e = concentration.estimate(snapshot(rows, electrolytes=facts), Criteria(), activity=True)
    assert e.estimates[0].in_activity
    assert e.estimates[0].order_ci[0] < 0.5 < e.estimates[0].order_ci[1]
    none = orders(rows, activity=True)
    assert none.estimates == () and "no readings" in none.left_out[0].reason


def test_curvature_over_concentration_is_warned(rng):
    rows = simulate(rng, order=0.0, cells=4, between=0.05)
    for row in rows:
        row["R_ct"] *= math.exp(0.3 * math.log(row["concentration"]) ** 2)
    assert any("lack of fit" in text for text in orders(rows).estimates[0].warnings)


def test_outliers_are_shown_and_kept(rng):
    rows = simulate(rng, between=0.05)
    rows[17]["R_ct"] *= 1.5
    e = orders(rows).estimates[0]
    assert 18 in [o.measurement for o in e.outliers if o.kind == "reading"]
    assert 18 in e.rows


def test_unscalable_pores_leave_the_order_open_and_can_be_switched_off(rng):
    campaign = with_facts(snapshot(simulate(rng)), pore_resistance_ohm_cm2=100.0)
    e = concentration.estimate(campaign, Criteria()).estimates[0]
    assert e.decision == "open: pore resistance not scalable"
    plain = concentration.estimate(campaign, Criteria(), porous=False).estimates[0]
    assert plain.decision == "responds"


def test_the_age_is_held_on_request(rng):
    rows = simulate(rng, cells=4)
    days = {row["cell"]: float(rng.uniform(0, 90)) for row in rows}
    for row in rows:
        row["measured_at"] += 86400 * days[row["cell"]]
        row["R_ct"] *= math.exp(0.005 * days[row["cell"]])
    assert orders(rows).estimates[0].adjusted is None
    adjusted = orders(rows, age_adjusted=True).estimates[0].adjusted
    assert adjusted.for_what == "age" and adjusted.ci[0] < 0.5 < adjusted.ci[1]


def test_clean_campaigns_seldom_show_an_outlier():
    """The bound is made for 5 % of campaigns, for specimens and readings each."""
    shown = 0
    for seed in range(60):
        rows = simulate(np.random.default_rng(seed), cells=2, repeats=1)
        shown += bool(orders(rows).estimates[0].outliers)
    assert shown <= 14  # 60 campaigns, 10 %: more than 14 has a chance below 0.1 %


@pytest.mark.parametrize(("missing", "share"), [(0.0, 1e-6), (0.3, 0.1)])
def test_one_effect_a_cell_says_the_same_as_all_readings(missing, share):
    """The same in a complete campaign; within a tenth of the standard error in one with gaps."""
    rng = np.random.default_rng(31)
    rows = [row for row in simulate(rng, cells=2) if rng.random() >= missing]
    campaign = snapshot(rows)
    s = comparable(draw(campaign, source(campaign, Criteria(), "film"), "R_ct"))
    plain, quick = (
        concentration.order(s, Criteria(), by_cell=by_cell).finding for by_cell in (False, True)
    )
    assert abs(quick.slope.value - plain.slope.value) <= share * plain.slope.se
    assert quick.slope.se == pytest.approx(plain.slope.se, rel=max(share, 1e-4))
    assert quick.slope.df == pytest.approx(plain.slope.df, rel=0.01)
