"""Each assignment check passes, fails and is left untested, and names its measurements."""

import pytest

from campaign.diagnosis.assignment import assignment_checks, failed
from campaign.ledger.readings import ElectrodeFacts, Plateau

GOOD = {
    "R_el": 5, "R_sl": 10, "Q_sl": 5e-6, "n_sl": 0.9, "R_ct": 50, "Q_ct": 1e-4, "n_ct": 0.85,
    "R_lat": 80, "Q_lat": 0.05, "n_lat": 0.9,
}  # fmt: skip


def check(name, readings, **options):
    return next(one for one in assignment_checks(readings, **options) if one.name == name)


def many(readings_of, odd, good=GOOD, n=10):
    return readings_of([{"specimen": f"c{i}", **good} for i in range(n - 1)] + [{**good, **odd}])


def test_a_sound_assignment_fails_nothing(readings_of):
    found = assignment_checks(readings_of([GOOD] * 3))
    assert failed(found) == ()
    passing = {one.name for one in found if one.outcome == "passes"}
    assert passing == {
        "order of time constants", "capacitance of R_sl", "capacitance of R_ct",
        "capacitance of R_lat",
    }  # fmt: skip


def test_nothing_fitted_leaves_every_check_untested(readings_of):
    found = assignment_checks(readings_of([{"R_ct": 5}]))
    assert {one.outcome for one in found} == {"untested"}


@pytest.mark.parametrize(
    "odd",
    [
        {"Q_sl": 1e-2, "n_sl": 1},  # tau_sl 0.1 s > tau_ct
        {"Q_ct": 1.0, "n_ct": 1},  # tau_ct 50 s > tau_lat
        {"R_ct": float("nan"), "Q_sl": 10, "n_sl": 1},  # tau_sl 100 s > tau_lat
    ],
)
def test_time_constants_out_of_order_are_named(readings_of, odd):
    found = check("order of time constants", many(readings_of, odd))
    assert (found.outcome, found.measurements, found.tested) == ("fails", (10,), 10)
    assert "1 of 10" in found.sentence


def test_one_odd_fit_in_many_is_named_but_fails_nothing(readings_of):
    found = check("order of time constants", many(readings_of, {"Q_ct": 1.0, "n_ct": 1}, n=40))
    assert (found.outcome, found.measurements) == ("passes", (40,))


@pytest.mark.parametrize(
    ("word", "outcome"), [("unresponsive", "passes"), ("responds", "fails"), ("open", "untested")]
)
def test_surface_layer_flat_in_potential(readings_of, says, word, outcome):
    readings = readings_of([GOOD] * 3)
    found = check("R_sl flat in potential", readings, film_potential=says(word))
    assert found.outcome == outcome
    assert found.measurements == ((1, 2, 3) if outcome == "fails" else ())


def test_no_surface_layer_in_additive_free_water(readings_of):
    water = {**GOOD, "aqueous": True}
    found = check("no R_sl in water", readings_of([water] * 2 + [GOOD]))
    assert (found.outcome, found.measurements) == ("fails", (1, 2))
    bare = {**water, "R_sl": float("nan"), "absent": ("R_sl",)}
    assert check("no R_sl in water", readings_of([bare])).outcome == "passes"
    with_additive = {**water, "additives": "2 wt% FEC"}
    assert check("no R_sl in water", readings_of([with_additive])).outcome == "untested"


@pytest.mark.parametrize(
    ("arc", "odd"),
    [
        ("R_sl", {"Q_sl": 0.1, "n_sl": 1}),
        ("R_ct", {"Q_ct": 1e-9, "n_ct": 1}),
        ("R_lat", {"Q_lat": 1e-7, "n_lat": 1}),
    ],
)
def test_capacitance_outside_its_role(readings_of, arc, odd):
    found = check(f"capacitance of {arc}", many(readings_of, odd))
    assert (found.outcome, found.measurements) == ("fails", (10,))


def test_capacitance_is_per_area_and_per_interface(readings_of):
    # Q = 0.2 on 10 cm2 is 2e-2 F/cm2, inside the range of R_ct; as if on 1 cm2 it would not be
    row = {"R_ct": 5, "Q_ct": 0.2, "n_ct": 1, "area_cm2": 10}
    assert check("capacitance of R_ct", readings_of([row])).outcome == "passes"
    assert check("capacitance of R_ct", readings_of([row | {"area_cm2": 1}])).outcome == "fails"
    symmetric = row | {"configuration": "symmetric"}  # twice Q per interface: 4e-2
    assert check("capacitance of R_ct", readings_of([symmetric])).outcome == "fails"


def test_plateau_points(readings_of):
    facts = ElectrodeFacts("A", "phosphate", "Na+", 1, plateaus=(Plateau(2.9, 3.05, "Na/Na+"),))
    inside, outside = {**GOOD, "potential_V": 3.0}, {**GOOD, "potential_V": 3.3}
    found = check("plateau points", readings_of([inside, outside, outside]), facts=facts)
    assert (found.outcome, found.measurements) == ("passes", (1,))
    found = check("plateau points", readings_of([inside, inside, outside]), facts=facts)
    assert (found.outcome, found.measurements) == ("fails", (1, 2))


def test_an_arc_absent_from_some_cells_of_an_electrolyte(readings_of):
    gone = {"R_ct": 50, "absent": ("R_sl",)}
    found = check("absent arcs", readings_of([gone] + [GOOD] * 3))
    assert (found.outcome, found.measurements) == ("fails", (1,))
    other = {**gone, "electrolyte": "another"}
    assert check("absent arcs", readings_of([other] + [GOOD] * 3)).outcome == "passes"
