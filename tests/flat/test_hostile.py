"""Files that were not made to be read: each is refused in one sentence."""

import subprocess
import sys

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from campaign.ledger.flat import sources
from campaign.ledger.flat.headers import CANONICAL
from campaign.ledger.flat.reading import read_table, row_from_mapping

HEAD = b"cell,measured_at,potential_V,temperature_C,R_ct,note\n"
ROW = b"A,2026-03-14T09:30+01:00,3.4,25,41.2,fine\n"


def only_fault(table):
    assert len(table.faults) == 1
    fault = table.faults[0]
    assert fault.expected
    assert fault.sentence().isprintable()
    assert len(fault.sentence()) < 500
    return fault


@pytest.mark.parametrize(
    ("content", "line", "message"),
    [
        (HEAD + ROW + ROW.replace(b"fine", b"\x00"), 3, "NUL"),
        (b"\x00" * 1000, 1, "NUL"),
        (HEAD + ROW + ROW.replace(b"fine", b"5 \xb5m"), 3, "byte 0xb5"),
        (HEAD + ROW.replace(b"fine", "Ω".encode()) + ROW.replace(b"fine", b"\xd9"), 3, "0xd9"),
        (HEAD.decode().encode("utf-16-le"), 1, "NUL"),
        (b"\xff\xfe" + HEAD.decode().encode("utf-16-le") + b"\x00", 2, "not UTF-16"),
        (b"\xff\xfe\x00\xd8\x41\x00", 1, "not UTF-16"),
        (HEAD + b'"' + ROW, 2, "quotation"),
        (HEAD + b'A,"x"y,3,25,1,\n', 2, "quotation"),
        (HEAD + b'A,"' + b"x\n" * 600_000, None, "quotation"),
        (b"%PDF-1.7\n%\xe2\xe3\xcf\xd3\n", 2, "byte 0xe2"),
        (b"\x89PNG\r\n\x1a\n" + bytes(99), 1, "byte 0x89"),
        (b"<html><body>no table</body></html>", 1, "one column only"),
        (b",".join(b"c%d" % i for i in range(501)) + b"\n", 1, "500 columns"),
    ],
)
def test_files_that_are_no_tables(read, content, line, message):
    fault = only_fault(read(content))
    assert message in fault.message
    if line is not None:
        assert fault.line == line


def test_a_very_long_line_is_not_read(read):
    fault = only_fault(read(HEAD + b"A," + b"9" * (sources.LONGEST_LINE + 10)))
    assert fault.line == 2
    assert "characters" in fault.message


def test_a_large_file_is_not_read(read, monkeypatch):
    monkeypatch.setattr(sources, "LARGEST", 1 << 10)
    assert "larger" in only_fault(read(HEAD + ROW * 100)).message


def test_many_rows_are_not_read(read, monkeypatch):
    monkeypatch.setattr(sources, "MOST_ROWS", 50)
    assert "more than 50 rows" in only_fault(read(HEAD + ROW * 100)).message


def test_a_file_that_is_not_there_or_a_folder(tmp_path):
    for path in (tmp_path / "none.csv", tmp_path):
        assert "cannot be read" in only_fault(read_table(path, zone="UTC")).message


def test_what_could_change_a_terminal_is_refused_and_not_echoed(read):
    """Escape sequences and direction marks, in labels and in headers."""
    table = read(HEAD + "A\x1b[2J,2026-03-14T09:30Z,3.4,25,41.2,\u202enote\n".encode())
    assert [f.column for f in table.faults] == ["cell", "note"]
    table = read(HEAD.replace(b"note", b"no\x1b[31mte") + ROW)
    assert "\\u001b" in table.faults[0].message
    assert all(f.sentence().isprintable() and (f.value or "").isprintable() for f in table.faults)


def test_headers_that_multiply_are_few(read):
    """As many unknown headers as fit are each a fault, and none takes long."""
    head = ",".join(f"unknown{i}" for i in range(300)).encode()
    assert len(read(head + b"\n").faults) == 300


ANY_CELL = st.one_of(
    st.sampled_from(
        ["", "absent", "41.2", "41,2", "41.2(8)", "41.2±0.8", "1e999", "nan", "A1", "2026-03-14",
         "2026-03-14T09:30Z", "03/04/2026", "=1+1", "'=1", '"', "\n", "0", "-1", "1,234", "#"]
    ),
    st.text(max_size=12),
    st.floats().map(str),
)  # fmt: skip
ANY_HEAD = st.one_of(
    st.sampled_from(
        [*CANONICAL, "T/K", "R_ct/kΩ", "R_ct/(Ω cm2)", "E/V vs. Na/Na+", "Rs", "A/mm2"]
    ),
    st.text(max_size=12),
)
FEW = settings(
    max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)


def check_refusals(table):
    for fault in table.faults:
        assert fault.message
        assert fault.file
        fault.sentence().encode()  # can be printed
    for row in table.rows:
        for name in row.values:
            row.raw(name)


@given(st.binary(max_size=400))
@FEW
def test_any_bytes_are_read_or_refused(tmp_path, content):
    path = tmp_path / "t.csv"
    path.write_bytes(content)
    table = read_table(path, zone="Europe/Paris")
    assert table.rows or table.faults
    check_refusals(table)


@given(
    st.lists(ANY_HEAD, min_size=1, max_size=9),
    st.lists(st.lists(ANY_CELL, max_size=9), max_size=6),
    st.sampled_from(",;\t"),
    st.sampled_from(["utf-8", "utf-8-sig", "utf-16"]),
    st.sampled_from([None, ".", ","]),
)
@FEW
def test_any_table_is_read_or_refused(tmp_path, head, rows, delimiter, encoding, decimal):
    lines = [delimiter.join(cells) for cells in [head, *rows]]
    path = tmp_path / "t.csv"
    path.write_bytes("\n".join(lines).encode(encoding, "replace"))
    check_refusals(read_table(path, zone="Europe/Paris", decimal=decimal))


ANY_JSON = st.recursive(
    st.one_of(st.none(), st.booleans(), st.integers(), st.floats(), ANY_CELL),
    lambda inner: st.one_of(st.lists(inner, max_size=2), st.dictionaries(st.text(), inner)),
    max_leaves=3,
)


@given(st.dictionaries(ANY_HEAD, ANY_JSON, max_size=12))
@FEW
def test_any_object_is_read_or_refused(stated):
    row, faults = row_from_mapping(stated, "Europe/Paris")
    assert faults or "cell" in row.values
    for fault in faults:
        fault.sentence().encode()


def test_reading_one_row_imports_no_heavy_library():
    """Logging a measurement waits for none of these; pint is for rare units only."""
    code = (
        "import sys\n"
        "from campaign.ledger.flat.reading import row_from_mapping\n"
        "row, faults = row_from_mapping({'cell': 'A', 'measured_at': '2026-03-14 09:30', 'E/mV': 3,"
        " 'T/K': 298, 'R_ct/kΩ': '41.2±0.8', 'A/mm2': 3, 'ion': 'Na', 'reference': 'SCE'}, 'UTC')\n"
        "assert not faults, faults\n"
        "heavy = ['numpy', 'pandas', 'scipy', 'matplotlib', 'alembic', 'pint', 'uncertainties',\n"
        "         'openpyxl', 'rich', 'sqlalchemy']\n"
        "print([name for name in heavy if name in sys.modules])\n"
    )
    done = subprocess.run(
        [sys.executable, "-X", "utf8", "-c", code], capture_output=True, text=True, check=False
    )
    assert (done.stdout.strip(), done.stderr) == ("[]", "")
