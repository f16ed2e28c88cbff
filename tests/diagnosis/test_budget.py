"""Shares, their intervals and crossings against numbers worked by hand."""

import math

import numpy as np
import pytest
from scipy.special import erfcx
from scipy.stats import t as student

from campaign.diagnosis.budget import budget, budgets, crossings, terms_of
from campaign.diagnosis.reference import reference_condition
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrodeFacts

CRITERIA = Criteria()


def facts(**given):
    return ElectrodeFacts("A", "oxide", "Na+", 1, **given)


def cells(readings_of, values, **common):
    return readings_of([{"specimen": f"c{i}", **common, **one} for i, one in enumerate(values)])


def test_arcs_without_q_count_fully_and_it_is_said(readings_of):
    r = cells(readings_of, [{"R_sl": 10, "R_ct": 30}] * 4)
    found = budget(r, CRITERIA)
    assert found.shares["R_ct"].share == pytest.approx(0.75)
    assert found.shares["R_sl"].contribution == pytest.approx(10)
    assert found.missing_terms == ("R_lat", "diffusion")
    assert any("R_ct without Q" in text for text in found.warnings)


def test_slow_arc_counts_by_its_step_response(readings_of):
    # n = 1: tau_lat = 100 ohm * 0.1 F = 10 s; at 10 s it shows 1 - 1/e of 100 ohm
    row = {"R_ct": 50, "Q_ct": 1e-4, "n_ct": 1, "R_lat": 100, "Q_lat": 0.1, "n_lat": 1}
    found = budget(cells(readings_of, [row] * 4), CRITERIA)
    assert found.shares["R_ct"].contribution == pytest.approx(50)
    assert found.shares["R_lat"].contribution == pytest.approx(100 * (1 - math.exp(-1)))
    assert found.dominant == "R_lat"
    early = budget(cells(readings_of, [row] * 4), CRITERIA, time_s=1.0)
    assert early.dominant == "R_ct"
    assert early.shares["R_lat"].contribution == pytest.approx(100 * (1 - math.exp(-0.1)))


def test_depressed_arc_by_erfcx(readings_of):
    # n = 1/2: tau = (R Q)^2 = 4 s, at 9 s 1 - erfcx(3/2)
    row = {"R_ct": 20, "Q_ct": 0.1, "n_ct": 0.5}
    found = budget(cells(readings_of, [row] * 2), CRITERIA, time_s=9.0)
    assert found.shares["R_ct"].contribution == pytest.approx(20 * (1 - erfcx(1.5)), rel=1e-8)


def test_diffusion_by_the_square_root_of_time_and_its_cap(readings_of):
    r = cells(readings_of, [{"R_ct": 10, "sigma_w": 4.0}] * 4)
    free = budget(r, CRITERIA)
    by_hand = 2 * 4 * math.sqrt(20 / math.pi)  # 20.18
    assert free.shares["diffusion"].contribution == pytest.approx(by_hand)
    assert any("grows without limit" in text for text in free.warnings)
    capped = budget(r, CRITERIA, facts(diffusion_length_cm=1e-5, diffusivity_cm2_s=1e-10))
    # R_D/3 = sqrt(2) * 4 * 1e-5 / 1e-5 / 3
    assert capped.shares["diffusion"].contribution == pytest.approx(math.sqrt(2) * 4 / 3)
    assert capped.dominant == "R_ct"
    assert not any("grows without limit" in text for text in capped.warnings)


def test_everything_is_per_area_and_per_interface(readings_of):
    row = {"R_el": 3, "R_ct": 50, "Q_ct": 1e-3, "n_ct": 0.8, "sigma_w": 4, "area_cm2": 2}
    symmetric = row | {"configuration": "symmetric", "R_ct": 100, "Q_ct": 5e-4, "sigma_w": 8}
    terms = terms_of(readings_of([row, symmetric]))
    for name, expected in (("R_el", 6), ("R_ct", 100), ("diffusion", 8)):
        np.testing.assert_allclose(terms.values[name], expected)
    np.testing.assert_allclose(terms.cpe["R_ct"], 5e-4)
    np.testing.assert_allclose(terms.at("R_ct", 0.01, None)[0], terms.at("R_ct", 0.01, None)[1])


def test_an_absent_arc_adds_zero(readings_of):
    r = cells(readings_of, [{"R_ct": 30, "absent": ("R_sl",)}] * 4)
    found = budget(r, CRITERIA)
    assert found.shares["R_sl"].share == 0
    assert found.missing_terms == ("R_lat", "diffusion")
    assert found.rivals == ()


def test_interval_of_the_difference_by_hand(readings_of):
    # shares of R_ct 0.6, 0.7, 0.8, 0.9: differences 0.2, 0.4, 0.6, 0.8
    r = cells(readings_of, [{"R_ct": 10 * x, "R_sl": 10 - 10 * x} for x in (0.6, 0.7, 0.8, 0.9)])
    found = budget(r, CRITERIA)
    half = student.ppf(0.975, 3) * np.std([0.2, 0.4, 0.6, 0.8], ddof=1) / 2
    assert found.difference == pytest.approx(0.5)
    assert found.difference_interval == pytest.approx((0.5 - half, 0.5 + half))
    assert found.rivals == ()
    assert found.shares["R_ct"].interval == pytest.approx((0.75 - half / 2, 0.75 + half / 2))


def test_a_difference_inside_its_interval_leaves_rivals(readings_of):
    r = cells(readings_of, [{"R_ct": x, "R_sl": 10 - x} for x in (3.0, 5.0, 6.0, 8.0)])
    found = budget(r, CRITERIA)
    assert found.dominant == "R_ct"
    assert found.difference_interval[0] < 0 < found.difference_interval[1]
    assert found.rivals == ("R_sl",)


def test_repeated_spectra_of_one_specimen_are_not_specimens(readings_of):
    r = readings_of([{"specimen": "c1", "R_ct": 30 + i, "R_sl": 10} for i in range(9)])
    found = budget(r, CRITERIA)
    assert found.n_specimens == 1
    assert found.difference_interval is None
    assert found.rivals == ("R_sl",)
    assert found.scatter == "none"


def test_few_specimens_pool_the_scatter_of_other_electrolytes(readings_of):
    # two terms: d = s1 - s2 and the gradient over (ln R_ct, ln R_sl) is (2 s1 s2, -2 s1 s2)
    rows = []
    for electrolyte, scale in (("1 M NaX in PC", 1.0), ("1 M NaX in EC", 5.0)):
        for i, factor in enumerate((1.1, 1 / 1.1)):
            rows.append({
                "specimen": f"{electrolyte} {i}", "electrolyte": electrolyte,
                "R_ct": 30 * scale * factor, "R_sl": 10.0,
            })  # fmt: skip
    found = budget(readings_of(rows), CRITERIA)
    s1 = np.mean([33, 30 / 1.1]) / (np.mean([33, 30 / 1.1]) + 10)
    if found.condition.electrolyte.endswith("EC"):
        s1 = np.mean([165, 150 / 1.1]) / (np.mean([165, 150 / 1.1]) + 10)
    deviation = 2 * s1 * (1 - s1) * math.log(1.1)
    se = math.sqrt(4 * deviation**2 / 2 / 2)  # four deviations, 2 df, 2 specimens
    half = student.ppf(0.975, 2) * se
    assert found.difference == pytest.approx(2 * s1 - 1)
    assert found.difference_interval == pytest.approx((2 * s1 - 1 - half, 2 * s1 - 1 + half))
    assert "pooled over electrolytes" in found.scatter


def test_other_temperatures_and_potentials_are_not_pooled(readings_of):
    rows = [{"specimen": "c1", "R_ct": 30, "R_sl": 10}]
    rows += [
        {"specimen": f"d{i}", "R_ct": 30 + i, "R_sl": 10, "electrolyte": "other", **elsewhere}
        for i in range(1)
        for elsewhere in ({"temperature_K": 318.15}, {"potential_V": 3.2})
    ]
    assert budget(readings_of(rows), CRITERIA).difference_interval is None


def test_one_specimen_in_each_of_several_electrolytes_takes_their_spread(readings_of):
    rows = [
        {"specimen": f"c{i}", "electrolyte": f"e{i}", "R_ct": 30 * factor, "R_sl": 10.0}
        for i, factor in enumerate((0.9, 1.0, 1.1, 1.2))
    ]
    found = budget(readings_of(rows), CRITERIA)
    assert found.rivals == ()
    assert found.scatter.startswith("the spread between electrolytes")
    two = budget(readings_of(rows[:2]), CRITERIA)
    assert two.rivals == ("R_sl",)


def test_cell_limited_when_the_ohmic_term_is_the_largest_of_all(readings_of):
    r = cells(readings_of, [{"R_el": 100 + i, "R_ct": 30, "R_sl": 10} for i in range(4)])
    found = budget(r, CRITERIA)
    assert found.cell_limited
    assert found.dominant == "R_el"
    assert found.share == pytest.approx(101.5 / 141.5, rel=1e-3)
    assert found.shares["R_ct"].share == pytest.approx(0.75)
    assert any("cell-limited" in text for text in found.warnings)
    beside = budget(cells(readings_of, [{"R_el": 25, "R_ct": 30}] * 4), CRITERIA)
    assert (beside.dominant, beside.cell_limited) == ("R_ct", False)
    assert beside.shares["R_ct"].share == pytest.approx(1)


def test_crossing_time_of_two_exponentials_by_hand(readings_of):
    # a fast arc of 50 ohm is overtaken by 100 [1 - exp(-t/10)] at t = 10 ln 2
    row = {"R_ct": 50, "Q_ct": 1e-7, "n_ct": 1, "R_lat": 100, "Q_lat": 0.1, "n_lat": 1}
    r = cells(readings_of, [row] * 2)
    (found,) = crossings(r, reference_condition(r, CRITERIA))
    assert found.time_s == pytest.approx(10 * math.log(2), rel=2e-3)
    assert (found.before, found.after, found.leading) == ("R_ct", "R_lat", True)


def test_crossing_with_diffusion_by_hand(readings_of):
    # 2 sigma sqrt(2t/pi) = R at t = pi R^2 / (8 sigma^2)
    r = cells(readings_of, [{"R_ct": 40, "sigma_w": 2.0}])
    (found,) = crossings(r, reference_condition(r, CRITERIA))
    assert found.time_s == pytest.approx(math.pi * 1600 / 32, rel=2e-3)
    assert found.after == "diffusion"


def test_budget_over_times_follows_the_crossing(readings_of):
    r = cells(readings_of, [{"R_ct": 40, "sigma_w": 2.0}] * 4)
    found = budgets(r, CRITERIA, None, (1.0, 100.0, 1000.0))
    assert [one.dominant for one in found] == ["R_ct", "R_ct", "diffusion"]
    assert [one.time_s for one in found] == [1, 100, 1000]


def test_only_the_asked_terms_share(readings_of):
    r = cells(readings_of, [{"R_ct": 30, "R_sl": 50}] * 4)
    found = budget(r, CRITERIA, terms=("R_ct", "R_lat"))
    assert (found.dominant, found.shares["R_ct"].share) == ("R_ct", 1)


def test_no_fitted_term_gives_no_budget(readings_of):
    assert budget(cells(readings_of, [{"R_el": 5}] * 3), CRITERIA) is None
    assert budget(cells(readings_of, [{"absent": ("R_sl",)}] * 3), CRITERIA) is None


def at(readings_of, *rows):
    base = {"R_ct": 1}
    return reference_condition(readings_of([base | row for row in rows]), CRITERIA)


def test_reference_condition_takes_most_specimens_before_temperature(readings_of):
    found = at(
        readings_of,
        {"specimen": "a", "temperature_K": 298.15},
        {"specimen": "b", "temperature_K": 318.15},
        {"specimen": "c", "temperature_K": 318.3},
    )
    assert found.temperature_K == pytest.approx(318.225)
    assert (found.n_specimens, found.rows) == (2, (1, 2))


def test_reference_condition_is_nearest_25_celsius_and_the_lower_of_two(readings_of):
    temperatures = [{"temperature_K": x} for x in (278.15, 288.15, 308.15, 318.15)]
    assert at(readings_of, *temperatures).temperature_K == pytest.approx(288.15)


def test_reference_condition_takes_median_potential_then_concentration(readings_of):
    found = at(
        readings_of,
        *({"potential_V": x, "concentration": c, "electrolyte": f"{c} M"}
          for x in (3.0, 3.1, 3.4) for c in (0.1, 1.0, 3.0)),
    )  # fmt: skip
    assert (found.potential_V, found.concentration) == (3.1, 1.0)
    assert {one.electrolyte for one in found.others} == {"0.1 M", "3.0 M"}


def test_symmetric_cells_without_a_potential_have_a_condition(readings_of):
    found = at(
        readings_of,
        *({"specimen": s, "potential_V": np.nan, "configuration": "symmetric"} for s in "ab"),
    )
    assert found.n_specimens == 2
    assert math.isnan(found.potential_V)
