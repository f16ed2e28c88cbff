"""What is written reads back as the same rows; what spreadsheets would run is kept from them."""

import io

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from campaign.ledger.fields import clean_text
from campaign.ledger.flat.columns import unguarded
from campaign.ledger.flat.headers import CANONICAL, COLUMNS
from campaign.ledger.flat.reading import read_table
from campaign.ledger.flat.template import template_text
from campaign.ledger.flat.values import BOUNDS
from campaign.ledger.flat.writing import guarded, write_rows

BASE = {"cell": "A1", "measured_at": "2026-03-14T09:30+01:00", "temperature_C": 25.0, "R_ct": 41.2}


def written(rows):
    stream = io.StringIO()
    write_rows(rows, stream)
    return stream.getvalue()


def test_a_written_row_is_a_row_of_the_flat_table():
    text = written([{**BASE, "R_sl": "absent", "ion": "Na", "note": 'a "b", c', "cycle": 3}])
    head, row, end = text.split("\n")
    assert tuple(head.split(",")) == CANONICAL
    assert end == ""
    assert '"a ""b"", c"' in row
    assert ",absent," in row


@pytest.mark.parametrize(
    "text", ["=1+1", "+1", "-1", "@SUM(A1)", "=cmd|' /C calc'!A0", "'=x", "''-"]
)
def test_formulas_are_guarded_and_read_back(read, text):
    table = read(written([{**BASE, "cell": text, "note": text}]))
    assert table.faults == []
    assert table.rows[0].values["cell"] == table.rows[0].values["note"] == text
    assert guarded(text)[0] == "'"


@given(st.text("'=+-@ab", max_size=6))
def test_the_guard_can_be_taken_off(text):
    assert unguarded(guarded(text)) == text
    assert not guarded(text).startswith(("=", "+", "-", "@"))


def numbers(name):
    bounds = BOUNDS[name]
    low, high = max(bounds.low, -1e300), min(bounds.high, 1e300)
    if name == "temperature_C":
        low, high = -273.0, 1900.0
    return st.floats(low, high, exclude_min=bounds.above)


LABELS = st.text(
    st.characters(exclude_categories=("C", "Z")), min_size=1, max_size=20
).map(lambda text: clean_text(text, "cell"))
ROWS = st.fixed_dictionaries(
    {
        "cell": LABELS,
        "measured_at": st.just(BASE["measured_at"]),
        "temperature_C": numbers("temperature_C"),
        "R_ct": st.floats(1e-290, 1e290),
    },
    optional={
        "R_ct_se": st.floats(1e-290, 1e290),
        "R_sl": st.just("absent"),
        "potential_V": numbers("potential_V"),
        "area_cm2": numbers("area_cm2"),
        "ion_content": numbers("ion_content"),
        "n_ct": numbers("n_ct"),
        "Q_ct": st.floats(1e-290, 1e290),
        "rest_h": numbers("rest_h"),
        "chi2": numbers("chi2"),
        "cycle": st.integers(0, 10**9),
        "note": LABELS,
        "operator": LABELS,
        "circuit": LABELS,
    },
)


@given(st.lists(ROWS, min_size=1, max_size=6))
@settings(
    max_examples=100, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
def test_what_is_written_reads_back(tmp_path, rows):
    path = tmp_path / "t.csv"
    path.write_text(written(rows), encoding="utf-8")
    table = read_table(path, zone="UTC", decimal=".")
    assert table.faults == []
    for row, found in zip(rows, table.rows, strict=True):
        values = dict(found.values)
        assert values.pop("temperature_K") == row["temperature_C"] + 273.15
        value, se = values.pop("R_ct")
        assert (value, se) == (row["R_ct"], row.get("R_ct_se"))
        assert values.pop("measured_at").offset_minutes == 60
        for name, item in values.items():
            kind = COLUMNS[name][0]
            expected = None if row[name] == "absent" else row[name]
            assert (item.value if kind == "value" else item) == expected


def test_the_template_with_its_example_reads_without_fault(read):
    assert template_text().strip().split(",") == list(CANONICAL)
    table = read(template_text(example=True))
    assert table.faults == table.warnings == []
    assert table.rows[0].values["R_sl"].absent
    filled = template_text() + "A1" + "," * (len(CANONICAL) - 1) + "\n"
    assert {f.column for f in read(filled).faults} == {
        "cell", "measured_at", "temperature_C", "R_ct",
    }  # fmt: skip
