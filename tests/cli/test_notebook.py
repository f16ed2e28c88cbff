"""The campaign in Python: frames with units, logging, and the README's own example."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from campaign import open_campaign
from campaign.errors import Refused
from campaign.ledger.demonstration import build
from campaign.ledger.starting import start

ROOT = Path(__file__).parents[2]


@pytest.fixture(scope="module")
def demo(tmp_path_factory):
    built = build(tmp_path_factory.mktemp("notebook") / "demo")
    with open_campaign(built.database) as campaign:
        yield campaign


def test_importing_the_package_stays_light():
    code = (
        "import sys, campaign\n"
        "heavy = {'pandas', 'numpy', 'scipy', 'sqlalchemy', 'matplotlib', 'rich', 'typer'}\n"
        "assert not heavy & set(sys.modules), heavy & set(sys.modules)\n"
        "assert callable(campaign.open_campaign)\n"
        "assert 'pandas' not in sys.modules\n"
    )
    subprocess.run([sys.executable, "-c", code], check=True, cwd=ROOT)


def test_measurements_are_a_frame_with_units_and_numbers(demo):
    frame = demo.measurements(electrode="NiHCF film B", temperature=(20, 30))
    assert frame.attrs["units"]["R_ct"] == "ohm" and frame.attrs["units"]["potential_V"] == "V"
    assert frame["temperature_C"].between(20, 30).all()
    assert set(frame["electrode"]) == {"NiHCF film B"}
    assert all(frame[name].dtype == "float64" for name in frame.attrs["units"])
    assert str(frame["measured_at"].dt.tz) == "UTC"
    water = demo.measurements(electrode="NiHCF film B", solvents="water")
    assert water["R_sl_absent"].any() and water.loc[water["R_sl_absent"], "R_sl"].isna().all()


def test_frames_hold_what_the_command_line_gives(demo):
    from campaign.diagnosis.reading import summarise
    from campaign.trends.reading import rebuilt

    where = str(demo._database.where.path)
    expected = rebuilt("concentration", where).as_dict()["estimates"]
    frame = demo.trend("concentration")
    assert frame["order"].tolist() == [row["order"] for row in expected]
    assert frame["order_low"].tolist() == [row["order_ci"][0] for row in expected]
    assert demo.trend("temperature").attrs["units"]["sigma_between"] == "kJ/mol"
    rows = summarise(where)["rows"]
    summary = demo.summary()
    assert summary["verdict"].tolist() == [row["verdict"] for row in rows]
    assert summary.attrs["criteria"]["order_margin"] == 0.15
    assert len(demo.cells()) == 77 and len(demo.history()) > 5
    assert demo.explain("NFM film A")["verdict"] == "ion transport"


def test_logging_takes_numbers_of_numpy_and_pandas_and_is_idempotent(tmp_path):
    start(str(tmp_path / "own.sqlite"), "Europe/Paris", "test")
    values = {
        "electrode": "film A", "cell": "A01", "area_cm2": np.float64(1.13), "ion": "Na",
        "electrolyte": "1 M NaPF6 in PC", "reference": "Na/Na+", "cycle": np.int64(3),
        "measured_at": pd.Timestamp("2026-03-04T09:30", tz="UTC"), "potential_V": 3.4,
        "temperature_C": 25, "R_ct": 41.2, "R_ct_se": 0.8, "R_lat": float("nan"),
        "R_sl": "absent", "note": None,
    }  # fmt: skip
    with open_campaign(tmp_path / "own.sqlite") as campaign:
        assert campaign.log(values)["added"]["measurements"] == 1
        assert campaign.log(values)["unchanged"] == 1
        assert campaign.log(values, R_ct=40.0, refit=True)["refitted"] == 1
        (row,) = campaign.measurements().to_dict("records")
        assert row["R_ct"] == 40.0 and row["R_sl_absent"] and row["cycle"] == 3
        assert "R_lat" not in row
        with pytest.raises(Refused, match="R_ct"):
            campaign.log(values, R_ct=-1.0)
        assert len(campaign.measurements()) == 1


def test_wrong_conditions_and_a_closed_campaign_are_refused(demo, tmp_path):
    with pytest.raises(Refused, match="near: electrode"):
        demo.measurements(electrod="NFM film A")
    with pytest.raises(Refused, match="near: NFM film A"):
        demo.trend("concentration", electrode="NFM film")
    start(str(tmp_path / "own.sqlite"), "UTC", "test")
    campaign = open_campaign(tmp_path / "own.sqlite")
    assert campaign.measurements().empty and campaign.trend("age").empty
    campaign.close()
    for ask in (campaign.cells, campaign.summary, lambda: campaign.trend("age")):
        with pytest.raises(Refused, match="closed"):
            ask()


def test_the_example_of_the_readme_runs(demo, tmp_path):
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    (example,) = re.findall(r"^```python\n(.*?)^```$", text, re.MULTILINE | re.DOTALL)
    build(tmp_path / "sodium-demo")
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    done = subprocess.run([sys.executable, "-c", example], cwd=tmp_path, env=environment,
                          capture_output=True, text=True)  # fmt: skip
    assert done.returncode == 0, done.stderr
    assert "EC:DEC" in done.stdout and "responds" in done.stdout
