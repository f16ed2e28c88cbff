"""Mapping files: columns renamed, constants given, columns ignored."""

import pytest

from campaign.errors import Refused
from campaign.ledger.flat.mapping import read_mapping
from campaign.ledger.flat.values import Value

AT = "2026-03-14T09:30+01:00"
TABLE = f"Cell no.,when,Pot,Temp in lab,charge transfer,rubbish\nA,{AT},3410,25,0.0412,x\n"
MAPPING = """
decimal = "."
ignore = ["rubbish"]

[columns]
"Cell no." = "cell"
"when" = "measured_at"
"Pot" = "E/mV"
"Temp in lab" = "temperature_C"
"charge transfer" = "R_ct/kΩ"

[constants]
electrode = "film A"
reference = "Na+/Na"
"A/mm2" = 113
R_sl = "absent"
assembled_at = 2026-03-01T10:00:00+01:00
rest_h = "1.5"
"""


@pytest.fixture
def mapping(tmp_path):
    def reader(text):
        path = tmp_path / "mapping.toml"
        path.write_bytes(text if isinstance(text, bytes) else text.encode())
        return read_mapping(path)

    return reader


def test_columns_are_renamed_and_constants_given(read, mapping):
    table = read(TABLE, mapping=mapping(MAPPING))
    assert table.faults == []
    values = table.rows[0].values
    assert values["R_ct"].value == pytest.approx(41.2)
    assert values["potential_V"] == pytest.approx(3.41)
    assert values["area_cm2"] == pytest.approx(1.13)
    assert (values["electrode"], values["reference"]) == ("film A", "Na/Na+")
    assert values["R_sl"] == Value(None)
    assert values["rest_h"] == 1.5
    assert values["assembled_at"].offset_minutes == 60
    assert table.rows[0].raw("R_ct") == "0.0412"
    assert "rubbish" not in table.headers.values()


def test_without_mapping_the_same_columns_are_faults(read):
    assert [f.column for f in read(TABLE).faults] == [
        "Cell no.", "when", "Pot", "Temp in lab", "charge transfer", "rubbish",
    ]  # fmt: skip


def test_constants_have_decimal_points_whatever_the_file_has(read, mapping):
    rules = mapping('[constants]\nA = "1.13"\n')
    table = read(f"cell;measured_at;E;T;R_ct\nA;{AT};3,41;25;41,2\n", mapping=rules)
    assert table.faults == []
    assert table.rows[0].values["area_cm2"] == 1.13


@pytest.mark.parametrize(
    ("text", "column", "message"),
    [
        ('[constants]\ncell = "B"\n', "cell", "constant, and there is a column"),
        ('[constants]\nA = 0\n', "A", "out of range"),
        ('[constants]\nion = "Xx"\n', "ion", "not a known ion"),
        ('[columns]\n"not there" = "R_sl"\n', "not there", "does not have"),
    ],
)
def test_mappings_that_do_not_fit_the_table(read, mapping, text, column, message):
    table = read(f"cell,measured_at,E,T,R_ct\nA,{AT},3,25,41\n", mapping=mapping(text))
    assert [f.column for f in table.faults] == [column]
    assert message in table.faults[0].message


@pytest.mark.parametrize(
    ("text", "columns"),
    [
        ("colums = 1\n", ["colums"]),
        ("[columns]\na = 1\n", ["columns"]),
        ("columns = []\n", ["columns"]),
        ("[constants]\ncell = [1]\n", ["constants"]),
        ("[constants]\ncell = true\n", ["constants"]),
        ('ignore = "x"\n', ["ignore"]),
        ("sheet = 1\n", ["sheet"]),
        ('decimal = ";"\n', ["decimal"]),
        ('sheet = 1\n[columns]\na = "Rzz"\n[constants]\nfoo = 1\n', ["sheet", "Rzz", "foo"]),
        ("= 1\n", [None]),
        ("a = " + "[" * 5000, [None]),
        ("a = " + "1" * 5000, [None]),
        (b"\xff\xfe", [None]),
        (b"a = 1\x00", [None]),
        ("#" * (1 << 21), [None]),
    ],
)
def test_mapping_files_refused(mapping, text, columns):
    with pytest.raises(Refused) as caught:
        mapping(text)
    assert [fault.column for fault in caught.value.faults] == columns
    assert all(f.file and f.file.endswith("mapping.toml") for f in caught.value.faults)
    assert all(f.expected and len(f.message) < 500 for f in caught.value.faults)


def test_a_mapping_file_that_is_not_there(tmp_path):
    with pytest.raises(Refused, match="cannot be read"):
        read_mapping(tmp_path / "none.toml")
    with pytest.raises(Refused, match="cannot be read"):
        read_mapping(tmp_path)
