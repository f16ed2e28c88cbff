"""The drawn line and band are the table's estimate."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats
from simulated_campaign import simulate, snapshot

from campaign.trends.curves import curves


def test_band_of_one_reading_a_cell_is_the_textbook_band_of_a_straight_line(criteria, rng):
    # Montgomery & Runger, Applied Statistics and Probability for Engineers, ch. 11: the
    # interval of the mean response is t s sqrt(1/n + (x - mean)^2 / Sxx).
    rows = simulate(rng, temperatures=(298.15,), repeats=1, cells=3, se=None)
    _, (curve,) = curves("concentration", snapshot(rows), criteria)
    x = np.log([row["concentration"] for row in rows])
    y = np.log([row["R_ct"] for row in rows])
    line = stats.linregress(x, y)
    n = len(x)
    s = np.sqrt(((y - line.intercept - line.slope * x) ** 2).sum() / (n - 2))
    at = np.log(curve.lines[0].x)
    half = stats.t.ppf(0.975, n - 2) * s * np.sqrt(
        1 / n + (at - x.mean()) ** 2 / ((x - x.mean()) ** 2).sum()
    )
    mean = line.intercept + line.slope * at
    assert np.log(curve.lines[0].y) == pytest.approx(mean, abs=1e-7)
    assert np.log(curve.lines[0].low) == pytest.approx(mean - half, abs=1e-4)
    assert np.log(curve.lines[0].high) == pytest.approx(mean + half, abs=1e-4)


def test_readings_of_other_temperatures_are_brought_to_the_one_shown(criteria, rng):
    rows = simulate(rng, between=0.0, within=0.0, se=None, repeats=1, base=100.0)
    _, (curve,) = curves("concentration", snapshot(rows), criteria)
    expected = 100.0 * curve.x**-0.5
    assert curve.held.startswith("25 °C")
    assert curve.y == pytest.approx(expected, rel=1e-5)


def test_moved_specimens_are_drawn_on_the_same_line(criteria, rng):
    rows = simulate(rng, between=0.1, within=0.01, repeats=2, temperatures=(298.15, 308.15))
    for row in rows:  # each specimen goes through several cells
        row["specimen"] = f"piece {int(row['cell'].split()[1]) % 3}"
    result, (curve,) = curves("concentration", snapshot(rows), criteria)
    line = curve.lines[0]
    slope = np.diff(np.log(line.y[[0, -1]]))[0] / np.diff(np.log(line.x[[0, -1]]))[0]
    assert slope == pytest.approx(-result.estimates[0].order, abs=1e-9)
    off = np.log(curve.y) - np.interp(np.log(curve.x), np.log(line.x), np.log(line.y))
    assert abs(off.mean()) < 0.1


def test_a_valley_is_drawn_through_its_level_means(criteria, rng):
    law = lambda E: 0.5 * np.log(np.cosh((E - 3.0) / 0.03))  # noqa: E731
    rows = simulate(
        rng, concentrations=(1.0,), cells=10, temperatures=(298.15,), repeats=2,
        potentials=(2.9, 2.94, 2.97, 3.0, 3.03, 3.06, 3.1), potential_law=law, within=0.01,
    )  # fmt: skip
    result, (curve,) = curves("potential", snapshot(rows), criteria)
    assert result.estimates[0].law == "valley"
    levels = curve.levels
    at_levels = np.interp(levels.x, curve.lines[0].x, np.log(curve.lines[0].y))
    assert np.log(levels.y) == pytest.approx(at_levels, abs=0.2)
    known = np.isfinite(levels.low)
    assert known.sum() == len(levels.x) - 1
    assert (levels.low[known] < levels.y[known]).all()


def test_square_root_and_linear_drift_share_their_points(criteria, rng):
    rows = simulate(
        rng, concentrations=(1.0,), temperatures=(298.15,), repeats=4, quantity="R_sl",
        ages=lambda r, count, k: 86400.0 * (1 + 10 * k),
    )  # fmt: skip
    result, (curve,) = curves("age", snapshot(rows), criteria, "R_sl")
    assert len(result.estimates) == 2
    assert [line.name for line in curve.lines] == ["log-linear", "square-root"]
