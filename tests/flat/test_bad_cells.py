"""One bad cell in an otherwise good row: told with file, line, column, value and expectation."""

import pytest

BAD = [
    ("R_ct", "0"), ("R_ct", "-1"), ("R_ct", "nan"), ("R_ct", "inf"), ("R_ct", "1e999"),
    ("R_ct", "n/a"), ("R_ct", "-"), ("R_ct", "41.2±0"), ("R_ct", "41.2(0)"), ("R_ct", "#DIV/0!"),
    ("R_ct", "=1+1"), ("R_ct", "41.2 Ω"), ("R_ct", "<5"), ("R_ct", "~5"), ("R_ct_se", "0"),
    ("n_ct", "1.01"), ("n_ct", "0"), ("Q_ct", "0"), ("Q_ct", "2.1e-5(2)"), ("n_ct", "0.9(1)"),
    ("R_el", "absent"), ("sigma_w", "absent"), ("potential_V", "101"), ("potential_V", "3.4(1)"),
    ("temperature_C", "-273.15"), ("temperature_C", "-300"), ("temperature_C", "3000"),
    ("area_cm2", "0"), ("area_cm2", "-1"), ("ion_content", "1.01"), ("ion_content", "-0.1"),
    ("cycle", "1.5"), ("cycle", "-1"), ("cycle", "1e300"), ("rest_h", "-1"), ("chi2", "-1"),
    ("amplitude_mV", "0"), ("f_min_Hz", "0"), ("configuration", "four-electrode"), ("ion", "Xx"),
    ("measured_at", "03/04/2026"), ("measured_at", "2026-02-30"), ("measured_at", "today"),
    ("measured_at", "2026-03-29T02:30"), ("measured_at", "2026-10-25T02:30"),
    ("measured_at", "1066-10-14T09:00Z"), ("assembled_at", "1.3.2026"), ("fitted_at", "2026"),
    ("note", "x\x1b[31m"), ("cell", "x" * 501), ("note", "\u202ehidden"), ("cell", "\u200b"),
]  # fmt: skip


@pytest.mark.parametrize(("header", "text"), BAD)
def test_it_is_told(one, header, text):
    table = one({header: text}, decimal=".")
    assert len(table.faults) == 1
    fault = table.faults[0]
    assert (fault.file, fault.line, fault.column) == ("t.csv", 2, header)
    assert fault.message and fault.expected and fault.value
    assert (fault.message + fault.value).isprintable()
