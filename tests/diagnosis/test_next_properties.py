"""Whatever was measured, coverage and next answer, inside the limits and with sane numbers."""

import importlib.util
import json
import math
from pathlib import Path

import numpy as np
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from campaign.diagnosis.coverage import coverage
from campaign.diagnosis.next_limits import Limits
from campaign.diagnosis.next_proposals import Plan, propose, ranked, within_budget
from campaign.diagnosis.next_sheet import sheet
from campaign.ledger.criteria import Criteria
from campaign.present.coverage import coverage_lines

_spec = importlib.util.spec_from_file_location(
    "next_campaign", Path(__file__).parent / "next_campaign.py"
)
made = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(made)

PLAN = Plan(draws=200)


def campaign(seed, n_concentrations, n_solvents, cells, n_temperatures, n_potentials, kept, odd):
    rng = np.random.default_rng(seed)
    rows = made.rows(
        seed, concentrations=(0.1, 0.3, 1.0)[:n_concentrations],
        solvents=("PC", "DMC", "water")[:n_solvents], cells=cells,
        temperatures=(278.15, 298.15, 318.15)[:n_temperatures],
        potentials=(3.0, 3.1, 3.2)[:n_potentials], between=float(rng.uniform(0.0, 0.5)),
        order=float(rng.normal(0.2, 0.4)),
    )  # fmt: skip
    rows = [row for row in rows if rng.random() < kept] or rows[:1]
    for row in rows:
        row["aqueous"] = row["solvents"] == "water"
        if odd == "no reference":
            row |= {"potential_V": math.nan, "reference": ""}
        elif odd == "two-electrode":
            row["configuration"] = "two-electrode"
        elif odd == "fixed reference":
            row["reference"] = "SCE"
        elif odd == "holes":
            for quantity in ("R_el", "R_sl", "R_lat", "R_ct"):
                if rng.random() < 0.3:
                    row[quantity] = math.nan
        elif odd == "no times":
            row |= {"measured_at": math.nan, "assembled_at": math.nan}
    return made.snapshot(rows)


@settings(
    max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow], derandomize=True
)
@given(
    seed=st.integers(0, 10_000), n_concentrations=st.integers(1, 3), n_solvents=st.integers(1, 3),
    cells=st.integers(1, 2), n_temperatures=st.integers(1, 3), n_potentials=st.integers(1, 3),
    kept=st.floats(0.2, 1.0),
    odd=st.sampled_from(
        ["", "no reference", "two-electrode", "fixed reference", "holes", "no times"]
    ),
)  # fmt: skip
def test_any_campaign_is_answered(**drawn):
    taken = campaign(**drawn)
    for row in coverage(taken, Criteria()):
        json.dumps(row.as_dict(), allow_nan=False)
        assert max(map(len, coverage_lines(row.as_dict()))) <= 100
        for m in row.matrices:
            assert sum(map(sum, m.measurements)) == row.n_measurements
    proposals = ranked([one for each in propose(taken, Criteria(), PLAN) for one in each.proposals])
    for one in proposals:
        json.dumps(one.as_dict(), allow_nan=False)
        assert one.chance is None or 0 <= one.chance <= 1
        assert bool(one.cells) == (one.hours is not None)
        limits = Limits(taken, one.electrode)
        for cell in set(one.cells):
            assert all(limits.allows(cell.electrolyte, at) for at in cell.conditions)
        if one.cells:
            rows = sheet(taken, one.cells, 1)
            assert len(rows) == sum(cell.n_spectra for cell in one.cells)
    chosen = within_budget(proposals, 30.0)
    assert sum(one.hours or 0 for one in chosen) <= 30.0
