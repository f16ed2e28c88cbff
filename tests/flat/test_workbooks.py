"""XLSX sheets, written by openpyxl and altered by hand."""

import io
import zipfile
from datetime import date, datetime

import openpyxl
import pytest

from campaign.ledger.instants import format_utc

HEAD = ["cell", "measured_at", "E/mV", "T/K", "R_ct/kΩ", "R_sl", "area_cm2", "note"]
ROW = ["A1", datetime(2026, 3, 14, 9, 30), 3410, 298.15, 0.0412, "absent", 1.13, "as read"]


def workbook(*rows, sheets=("fits",)):
    book = openpyxl.Workbook()
    for title in sheets:
        sheet = book.create_sheet(title)
        for row in rows:
            sheet.append(row)
    del book[book.sheetnames[0]]
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


def altered(content, old, new):
    """The workbook with bytes of its sheet replaced."""
    stream = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(content)) as source, zipfile.ZipFile(stream, "w") as target:
        for part in source.namelist():
            data = source.read(part)
            if part == "xl/worksheets/sheet1.xml":
                assert old in data
                data = data.replace(old, new)
            target.writestr(part, data)
    return stream.getvalue()


def test_a_sheet_reads_like_the_same_text(read):
    sheet = read(workbook(HEAD, ROW), name="t.xlsx")
    text = read(
        "cell,measured_at,E/mV,T/K,R_ct/kΩ,R_sl,area_cm2,note\n"
        "A1,2026-03-14 09:30,3410,298.15,0.0412,absent,1.13,as read\n"
    )
    assert sheet.faults == text.faults == []
    assert sheet.rows[0].values == text.rows[0].values
    assert sheet.rows[0].raw("R_ct") == "0.0412"
    assert sheet.rows[0].raw("potential_V") == "3410"


def test_numbers_dates_and_texts_of_a_spreadsheet(read):
    rows = [
        [7, date(2026, 3, 14), 3410.5, "298.15", "0.0412(8)", 12, "1.13", None],
        [7.0, "2026-03-14T09:30Z", 3410, 298, 0.05, None, 1.13, 2.5],
        [None] * 8,
        ["B", datetime(2026, 3, 14, 9, 30, 15), 3410, 298.15, 0.05],
    ]
    table = read(workbook(HEAD, *rows), name="t.xlsx")
    assert table.faults == []
    assert [(row.line, row.values["cell"]) for row in table.rows] == [(2, "7"), (3, "7"), (5, "B")]
    assert table.rows[0].values["R_ct"] == pytest.approx((41.2, 0.8))
    assert table.rows[1].values["note"] == "2.5"
    at = [format_utc(row.values["measured_at"].utc) for row in table.rows]
    assert at[2] == "2026-03-14T08:30:15.000000Z"


def test_faults_name_line_and_column(read):
    bad = ["", "03/04/2026", "3,4V", -1, True, "#DIV/0!", 0, "#N/A"]
    table = read(workbook(HEAD, ROW, bad), name="t.xlsx")
    assert [(f.line, f.column, f.value) for f in table.faults] == [
        (3, "cell", None), (3, "measured_at", "03/04/2026"), (3, "E/mV", "3,4V"), (3, "T/K", "-1"),
        (3, "R_ct/kΩ", "True"), (3, "R_sl", "#DIV/0!"), (3, "area_cm2", "0"), (3, "note", "#N/A"),
    ]  # fmt: skip


def test_formulas_count_by_their_stored_result(read):
    row = [*ROW[:4], "=0.04+0.0012", *ROW[5:]]
    content = workbook(HEAD, row)
    fault = read(content, name="t.xlsx").faults[0]
    assert (fault.line, fault.column, fault.value) == (2, "R_ct/kΩ", "=0.04+0.0012")
    assert "result" in fault.message
    formula = b"<f>0.04+0.0012</f>"
    stored = altered(content, formula + b"<v />", formula + b"<v>0.0412</v>")
    assert read(stored, name="t.xlsx").rows[0].values["R_ct"].value == pytest.approx(41.2)


def test_a_formula_that_gives_an_empty_text_is_empty(read):
    content = workbook(HEAD, [*ROW[:7], '=IF(A2="B","x","")'])
    old = b'<c r="H2"><f>'
    table = read(altered(content, old, b'<c r="H2" t="str"><f>'), name="t.xlsx")
    assert table.faults == []
    assert "note" not in table.rows[0].values


def test_one_of_several_sheets_is_named(read):
    content = workbook(HEAD, ROW, sheets=("raw", "fits"))
    assert "several sheets (raw, fits)" in read(content, name="t.xlsx").faults[0].message
    assert read(content, name="t.xlsx", sheet="fits").faults == []
    assert "no sheet 'other'" in read(content, name="t.xlsx", sheet="other").faults[0].message
    assert "not an XLSX" in read("cell,R_ct\n", sheet="fits").faults[0].message


LAUGHS = (
    b'<?xml version="1.0"?><!DOCTYPE x [<!ENTITY a "ha">'
    + b"".join(
        b'<!ENTITY %c "%s">' % (98 + i, (b"&%c;" % (97 + i)) * 10) for i in range(12)
    )
    + b"]><worksheet"
)


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        (b'<row r="2"', b'<row r="99999999999"', "more than 1048576 rows"),
        (b'r="H1"', b'r="XFD1"', "more than 500 columns"),
        (b"<worksheet", b"<worksheet <", "cannot be read"),
        (b"<v>3410</v>", b"<v>34x</v>", "cannot be read"),
    ],
)
def test_broken_and_sprawling_sheets_are_refused(read, old, new, message):
    content = altered(workbook(HEAD, ROW), old, new)
    if b"row r=" in old:
        content = altered(content, b'r="A2"', b'r="A99999999999"')
    table = read(content, name="t.xlsx")
    assert message in table.faults[0].message
    assert table.rows == []


def test_what_a_sheet_says_of_its_size_is_not_believed(read):
    content = altered(workbook(HEAD, ROW), b'ref="A1:H2"', b'ref="A1:XFD1048576"')
    assert read(content, name="t.xlsx").faults == []


def test_entities_that_multiply_are_refused(read):
    content = altered(workbook(HEAD, ROW), b"<v>3410</v>", b"<v>&m;</v>")
    content = altered(content, b"<worksheet", LAUGHS)
    assert "cannot be read" in read(content, name="t.xlsx").faults[0].message


def archive(**parts):
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as target:
        for name, data in parts.items():
            target.writestr(name, data)
    return stream.getvalue()


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (archive(bomb=b"0" * 30_000_000), "would unpack to 30 MB"),
        (archive(**{f"p{i}": b"" for i in range(10_001)}), "no table needs"),
        (archive(readme=b"no workbook"), "cannot be read (KeyError)"),
        (b"PK\x03\x04 and nothing", "cannot be read (BadZipFile)"),
        (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(600), "old or a protected workbook"),
    ],
    ids=["bomb", "many parts", "other archive", "no archive", "old workbook"],
)
def test_other_archives_are_refused(read, content, message):
    table = read(content, name="t.xlsx")
    assert message in table.faults[0].message
    assert table.faults[0].expected
