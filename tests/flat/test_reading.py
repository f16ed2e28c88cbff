"""Whole tables: every fault at once, with line, column, what was found and what was expected."""

import pytest

from campaign.ledger.flat.reading import MOST_FAULTS, row_from_mapping
from campaign.ledger.flat.values import Value
from campaign.ledger.instants import format_utc

AT = "2026-03-14T09:30+01:00"


def test_a_full_row_is_read_in_canonical_units(one):
    table = one(
        {"potential_V": None, "temperature_C": None, "R_ct": None, "electrode": "film A",
         "ion": "Na+", "A/mm2": "113", "configuration": "3 electrode", "E/mV": "3410",
         "T/K": "298.15", "R_ct/kΩ": "0.0412±0.0008", "Rs": "4.1(2)", "R_SEI": "absent",
         "Q_ct/(uS s^n)": "21", "n_ct": "0.86", "rest/min": "90", "f_min/mHz": "10",
         "f_max/kHz": "200", "cycle": "3", "amplitude/V": "0.005", "SOC/%": "50",
         "reference": "Na|Na+", "note": "kept; as, it is"},
    )  # fmt: skip
    assert table.faults == []
    values = table.rows[0].values
    assert values["R_ct"] == pytest.approx((41.2, 0.8))
    assert values["R_el"] == pytest.approx((4.1, 0.2))
    assert values["R_sl"] == Value(None)
    assert values["Q_ct"].value == pytest.approx(21e-6)
    expected = {
        "electrode": "film A", "area_cm2": 1.13, "configuration": "three-electrode",
        "potential_V": 3.41, "temperature_K": 298.15, "rest_h": 1.5, "f_min_Hz": 0.01,
        "f_max_Hz": 2e5, "cycle": 3, "amplitude_mV": 5.0, "ion_content": 0.5,
        "reference": "Na/Na+", "note": "kept; as, it is",
    }  # fmt: skip
    assert {name: values[name] for name in expected} == pytest.approx(expected)
    assert (values["ion"].symbol, values["ion"].charge) == ("Na", 1)
    assert format_utc(values["measured_at"].utc) == "2026-03-14T08:30:00.000000Z"
    assert table.rows[0].raw("R_ct") == "0.0412±0.0008"
    assert table.rows[0].raw("potential_V") == "3410"
    assert table.rows[0].raw("direction") is None
    assert len(table.sha256) == 64


FAULTY = f"""cell,measured_at,potential_V,T/K,R_ct/kΩ,R_ct_se/%,R_lat,n_ct,cycle,f_min_Hz,f_max_Hz
A,{AT},3.4,298.15,0.0412,2,12,0.9,1,0.01,1e5
,03/04/2026,3.4,298.15,0.0412,2,12,0.9,1,0.01,1e5
B,{AT},3.4V,0,0.0412±0.001,2,absent,1.01,1.5,1e5,0.01
C,{AT},,-3,,2,,,,,
D,{AT},3.4,,absent,,n.d.,,,,
E,{AT},3.4,298.15,0.0412
F,{AT},3.4,298.15,,,,,,,
G,2026-03-29 02:30,3.4,1e999,-1,,,0,-1,0,
"""


def test_every_fault_at_once(read):
    table = read(FAULTY)
    assert [(f.line, f.column, f.value) for f in table.faults] == [
        (3, "cell", None),
        (3, "measured_at", "03/04/2026"),
        (4, "potential_V", "3.4V"),
        (4, "T/K", "0"),
        (4, "R_ct_se/%", "2"),
        (4, "n_ct", "1.01"),
        (4, "cycle", "1.5"),
        (4, "f_min_Hz", "1e5"),
        (5, "T/K", "-3"),
        (5, "R_ct_se/%", "2"),
        (6, "T/K", None),
        (6, "R_ct/kΩ", "absent"),
        (6, "R_lat", "n.d."),
        (7, None, "0.0412"),
        (8, "R_ct/kΩ", None),
        (9, "measured_at", "2026-03-29 02:30"),
        (9, "T/K", "1e999"),
        (9, "R_ct/kΩ", "-1"),
        (9, "n_ct", "0"),
        (9, "cycle", "-1"),
        (9, "f_min_Hz", "0"),
    ]
    assert all(f.file == "t.csv" and f.expected and f.message for f in table.faults)
    assert "R_ct" in table.rows[0].values


def test_every_required_column(read):
    table = read("electrode,area_cm2\nfilm A,1.13\n")
    assert [(f.line, f.column) for f in table.faults] == [
        (1, "cell"), (1, "measured_at"), (1, "temperature_C"), (1, None),
    ]  # fmt: skip


def test_header_faults_come_with_the_faults_of_the_rows(read):
    table = read("cell,measured_at,T/parrot,foo,Rct,R_ct\nA,yesterday,25,1,2,3\n")
    assert [(f.line, f.column) for f in table.faults] == [
        (1, "T/parrot"), (1, "foo"), (1, "R_ct"), (2, "measured_at"),
    ]  # fmt: skip
    assert "'Rct' and 'R_ct' both mean R_ct" in table.faults[2].message


@pytest.mark.parametrize("delimiter", [",", ";", "\t"])
@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16"])
def test_delimiters_line_ends_and_encodings(read, delimiter, end, encoding):
    lines = ["cell,measured_at,E/V,T/K,R_ct/Ω", f"Ä1,{AT},3,298,41", "", f"Ä2,{AT},3,298,42"]
    table = read(end.join(lines).replace(",", delimiter).encode(encoding))
    assert table.faults == []
    assert [(row.line, row.values["cell"]) for row in table.rows] == [(2, "Ä1"), (4, "Ä2")]


def test_quoted_newlines_comments_and_stated_separators(read):
    head = "cell;measured_at;potential_V;temperature_C;R_ct;note\n"
    body = f'A;{AT};3;25;41;"two\nlines"\nB;{AT};3;25;x;"; ""so"""\n'
    plain = read(head + f'B;{AT};3;25;x;"; ""so"""\n')
    assert [(f.line, f.value) for f in plain.faults] == [(2, "x")]
    assert plain.rows[0].values["note"] == '; "so"'
    for before, lines in (("", 0), ("# made by hand\n\n", 2), ("sep=;\n", 1)):
        table = read(before + head + body)
        assert [(f.line, f.column, f.value) for f in table.faults] == [
            (2 + lines, "note", "two\\u000alines"), (4 + lines, "R_ct", "x"),
        ]  # fmt: skip
        assert table.rows[1].raw("note") == '; "so"'


def test_a_value_above_no_header_is_a_fault(read):
    rows = "".join(f"{cell},{AT},3,25,41,{last}\n" for cell, last in ("A ", "B7", "C8"))
    table = read(f"cell,measured_at,E,T,R_ct,\n{rows}")
    assert [(f.line, f.column, f.value) for f in table.faults] == [(3, "column 6", "7")]


def test_longer_rows_are_faults_unless_the_rest_is_empty(read):
    table = read(f"cell,measured_at,E,T,R_ct\nA,{AT},3,25,41,,\nB,{AT},3,25,41,7\n")
    assert [(f.line, f.value) for f in table.faults] == [(3, "7")]


@pytest.mark.parametrize("content", ["", "  \n\n", "\ufeff", "# only a remark\n", "cell\nA\n",
                                     "cell,measured_at,E,T,R_ct\n"])  # fmt: skip
def test_files_without_table_are_refused(read, content):
    table = read(content)
    assert table.rows == []
    assert len(table.faults) == 1
    assert table.faults[0].expected


def test_many_faults_are_cut_with_a_count(read):
    rows = "".join(f"A,{AT},3,25,x\n" for _ in range(5000))
    table = read("cell,measured_at,E,T,R_ct\n" + rows)
    assert len(table.faults) == MOST_FAULTS + 1
    assert "1000 more faults" in table.faults[-1].message
    assert "3000 rows" in table.faults[-1].message


# Standard errors ---------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("columns", "expected"),
    [
        ({"R_ct": "41.2", "R_ct_se": "0.8"}, (41.2, 0.8)),
        ({"R_ct": "40", "R_ct_se/%": "2"}, (40.0, 0.8)),
        ({"R_ct": None, "R_ct/kΩ": "0.04", "R_ct_se/%": "2"}, (40.0, 0.8)),
        ({"R_ct": None, "R_ct/kΩ": "0.04", "R_ct_se/mΩ": "800"}, (40.0, 0.8)),
        ({"R_ct": "41.2(8)", "R_ct_se": ""}, (41.2, 0.8)),
        ({"R_ct": "41.2", "R_ct_se": ""}, (41.2, None)),
    ],
)
def test_standard_errors(one, columns, expected):
    table = one(columns)
    assert table.faults == []
    assert table.rows[0].values["R_ct"] == pytest.approx(expected)
    assert "R_ct_se" not in table.rows[0].values


@pytest.mark.parametrize(
    ("columns", "column", "message"),
    [
        ({"R_ct": "41.2±0.8", "R_ct_se": "0.8"}, "R_ct_se", "keep one"),
        ({"R_sl": "", "R_sl_se": "0.8"}, "R_sl_se", "R_sl is empty"),
        ({"R_lat": "absent", "R_lat_se": "0.8"}, "R_lat_se", "R_lat is absent"),
        ({"sigma_w_se": "0.8"}, "sigma_w_se", "sigma_w is empty"),
        ({"R_ct_se": "0"}, "R_ct_se", "out of range"),
        ({"R_ct_se": "0.8(1)"}, "R_ct_se", "uncertainty belongs"),
        ({"Q_ct": "1e-5(2)"}, "Q_ct", "not a number"),
        ({"Q_ct": "1.0(2)e-5"}, "Q_ct", "uncertainty belongs"),
        ({"R_el": "absent"}, "R_el", "only R_sl and R_lat can be"),
    ],
)
def test_standard_errors_refused(one, columns, column, message):
    faults = one(columns).faults
    assert [f.column for f in faults] == [column]
    assert message in faults[0].message


def test_an_error_without_unit_beside_a_value_with_one_is_said(one):
    table = one({"R_ct": None, "R_ct/kΩ": "0.04", "R_ct_se": "0.8"})
    assert table.rows[0].values["R_ct"] == pytest.approx((40.0, 0.8))
    assert any("states no unit" in warning for warning in table.warnings)


# Per area ----------------------------------------------------------------------------------


def test_values_per_area_are_divided_by_the_area(read):
    """R_ct A is 50 ohm cm2 on 2 cm2: 25 ohm. A CPE of 1e-5 S s^n cm^-2 is 2e-5 S s^n."""
    table = read(
        "cell,measured_at,E,T,A/mm2,R_ct/(Ω cm2),R_ct_se/%,Q_ct/(S s^n cm^-2)\n"
        f"A,{AT},3,25,200,50,2,1e-5\nA,2026-03-15T10:00Z,3,25,,60,,1e-5\nB,{AT},3,25,,50,,1e-5\n"
    )
    assert table.faults == []
    first, second, other = table.rows
    assert first.values["R_ct"] == pytest.approx((25.0, 0.5))
    assert first.values["Q_ct"].value == pytest.approx(2e-5)
    assert second.values["R_ct"].value == pytest.approx(30.0)
    assert (first.per_area, second.per_area, other.per_area) == ((), (), ("R_ct", "Q_ct"))


def test_an_error_per_area_of_a_value_that_is_not_is_refused(one):
    assert "per area" in one({"R_ct_se/(Ω cm2)": "1"}).faults[0].message


# What is assumed ---------------------------------------------------------------------------


def test_assumptions_are_said(one):
    table = one({"measured_at": "2026-03-14", "temperature_C": "298.15"})
    assert [w.split(": ")[1].split()[0] for w in table.warnings] == ["1", "1", "every"]
    assert "campaign's zone" in table.warnings[0]
    assert "00:00" in table.warnings[1]
    assert "T/K" in table.warnings[2]


def test_other_names_without_unit_are_said(read):
    table = read(f"cell,measured_at,E,T,Rct,n_ct,SOC\nA,{AT},3,25,41,0.9,0.5\n")
    assert table.faults == []
    assert table.warnings == [
        "t.csv: headers that state no unit were read so: E in V, T in degC, Rct in ohm"
    ]


def test_a_row_knows_its_headers_and_cells(read):
    table = read(f"cell,measured_at,E/mV,T,Rct\nA,{AT},3000,25,41\n")
    row = table.rows[0]
    assert (row.header("potential_V"), row.raw("potential_V")) == ("E/mV", "3000")
    assert (row.header("R_sl"), row.raw("R_sl")) == ("R_sl", None)


def test_a_potential_header_gives_the_reference(read):
    table = read(f"cell,measured_at,E/V vs. Na+/Na,T,R_ct\nA,{AT},3,25,41\n")
    assert table.rows[0].values["reference"] == "Na/Na+"
    twice = read(f"cell,measured_at,E/V vs. Na+/Na,T,R_ct,reference\nA,{AT},3,25,41,SCE\n")
    assert "in one place" in twice.faults[0].message


# One object --------------------------------------------------------------------------------

OBJECT = {"cell": "A1", "measured_at": AT, "potential_V": 3.41, "temperature_C": 25, "R_ct": 41.2}


def test_an_object_reads_like_a_row(one):
    row, faults = row_from_mapping(OBJECT, "UTC")
    assert faults == []
    assert row.values == one({}).rows[0].values
    renamed = {"cell": "A1", "measured_at": AT, "E/mV": "3410", "T/K": 298.15, "Rct/kΩ": 0.0412}
    again, faults = row_from_mapping(renamed, "UTC")
    assert faults == []
    assert again.values["R_ct"].value == pytest.approx(41.2)
    assert again.values["potential_V"] == pytest.approx(3.41)
    assert row.raw("R_ct") == "41.2"


@pytest.mark.parametrize(
    ("changes", "columns"),
    [
        ({"R_ct": None}, ["R_ct"]),
        ({"R_ct": [41.2]}, ["R_ct", "R_ct"]),
        ({"R_ct": {"value": 41.2}}, ["R_ct", "R_ct"]),
        ({"R_ct": True}, ["R_ct", "R_ct"]),
        ({"R_ct": "41,2"}, ["R_ct"]),
        ({"R_ct": float("nan")}, ["R_ct"]),
        ({"R_ct": float("inf")}, ["R_ct"]),
        ({"R_ct": 10**400}, ["R_ct"]),
        ({"foo": 1}, ["foo"]),
        ({"Rct": 1}, ["Rct"]),
        ({"cell": None, "measured_at": "soon"}, ["measured_at", "cell"]),
        ({"temperature_C": -274}, ["temperature_C"]),
        ({"ion_content": 1.2}, ["ion_content"]),
        ({"area_cm2": 0}, ["area_cm2"]),
        ({"configuration": "coin"}, ["configuration"]),
        ({"ion": "Xx"}, ["ion"]),
        ({"reference": "\u202e"}, ["reference"]),
        ({"cell": "a\x1b[31m"}, ["cell"]),
        ({"cell": "\ud800"}, ["cell"]),
        ({"\ud800": "x"}, ["\\ud800"]),
    ],
)
def test_objects_refused(changes, columns):
    _, faults = row_from_mapping({**OBJECT, **changes}, "UTC")
    assert sorted(f.column for f in faults) == sorted(columns)
    assert all(f.file == "standard input" and f.line == 1 and f.expected for f in faults)
    assert all(f.sentence().isprintable() for f in faults)
