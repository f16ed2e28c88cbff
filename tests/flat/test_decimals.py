"""One decimal mark a file."""

import pytest

HEAD = "cell;measured_at;potential_V;temperature_C;R_ct\n"
AT = "2026-03-14T09:30+01:00"


def numbers(table):
    return [
        (row.values["potential_V"], row.values["temperature_K"], row.values["R_ct"].value)
        for row in table.rows
    ]


def test_points_and_commas_read_alike(read):
    point = read(HEAD + f"A;{AT};3.41;25.0;41.25\n")
    comma = read(HEAD + f"A;{AT};3,41;25,0;41,25\n")
    assert point.faults == comma.faults == []
    assert numbers(point) == numbers(comma) == [(3.41, 298.15, 41.25)]


def test_quoted_decimal_commas_in_a_comma_separated_file(read):
    table = read(HEAD.replace(";", ",") + f'A,{AT},"3,41",25,"41,2(8)"\n')
    assert table.faults == []
    assert table.rows[0].values["R_ct"] == (41.2, 0.8)


def test_whole_numbers_need_no_mark(read):
    assert numbers(read(HEAD + f"A;{AT};3;25;41\n")) == [(3.0, 298.15, 41.0)]


@pytest.mark.parametrize("mark", [",", "."])
def test_a_file_readable_both_ways_is_refused_until_the_mark_is_stated(read, mark):
    """1,234 is 1.234 or 1234; a potential of 3 is in range either way."""
    text = HEAD + f"A;{AT};3;25;1{mark}234\nA;{AT};3;26;12{mark}345\n"
    fault = read(text).faults[0]
    assert (fault.line, fault.column, fault.value) == (2, "R_ct", f"1{mark}234")
    assert f"--decimal '{mark}'" in fault.message
    stated = read(text, decimal=mark)
    assert stated.faults == []
    assert [row.values["R_ct"].value for row in stated.rows] == [1.234, 12.345]


def test_the_other_mark_stated_leaves_separators_to_be_taken_out(read):
    table = read(HEAD + f"A;{AT};3;25;1,234\n", decimal=".")
    assert [f.value for f in table.faults] == ["1,234"]


@pytest.mark.parametrize(
    "decisive",
    ["R_ct=0,867", "R_ct=41,2", "R_ct=1,2345", "R_ct=1234,567", "potential_V=3,412",
     "R_ct=41,234(12)"],
)  # fmt: skip
def test_one_number_that_reads_one_way_settles_it(read, decisive):
    """Leading zero, digits not in threes, or a value out of range with thousands separators."""
    name, text = decisive.split("=")
    cells = {"potential_V": "3", "R_ct": "1,234", name: text}
    table = read(
        HEAD + f"A;{AT};3;25;1,234\n" + f"B;{AT};{cells['potential_V']};25;{cells['R_ct']}\n"
    )
    assert table.faults == []
    assert table.rows[0].values["R_ct"].value == 1.234


def test_both_marks_are_refused_naming_both_places(read):
    table = read(HEAD + f"A;{AT};3.41;25.0;41.2\nB;{AT};3.41;25.0;41,2\nC;{AT};3,5;25.0;7,2\n")
    assert len(table.faults) == 1
    fault = table.faults[0]
    assert (fault.line, fault.column, fault.value) == (3, "R_ct", "41,2")
    for part in ("'3.41' in line 2, column potential_V", "2 more numbers", "--decimal"):
        assert part in fault.message


def test_both_marks_in_one_number_are_refused(read):
    table = read(HEAD + f"A;{AT};3;25;1.234,5\n")
    assert "points ('1.234,5'" in table.faults[0].message
    assert len(table.faults) == 1


def test_other_faults_are_still_reported_beside_the_mark(read):
    table = read(HEAD + f"A;{AT};3;25;1,234\n;yesterday;3;;12,345\n")
    assert [(f.line, f.column) for f in table.faults] == [
        (2, "R_ct"), (3, "cell"), (3, "measured_at"), (3, "temperature_C"),
    ]  # fmt: skip


def test_marks_in_words_do_not_count(read):
    head = HEAD.strip() + ";note\n"
    table = read(head + f"A;{AT};3,41;25,0;n.d.;see 4.2\n")
    assert [(f.column, f.value) for f in table.faults] == [("R_ct", "n.d.")]
    assert "not a number" in table.faults[0].message
