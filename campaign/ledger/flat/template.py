"""The empty flat table, ready to be filled."""

from __future__ import annotations

from campaign.ledger.flat.canonical import CANONICAL

EXAMPLE = {
    "electrode": "film A",
    "material": "Na3V2(PO4)3",
    "ion": "Na",
    "form": "thin film",
    "cell": "A01",
    "area_cm2": "1.13",
    "configuration": "three-electrode",
    "reference": "Na/Na+",
    "electrolyte": "1 M NaPF6 in PC",
    "assembled_at": "2026-03-02T15:00+01:00",
    "measured_at": "2026-03-04T09:30+01:00",
    "potential_V": "3.40",
    "temperature_C": "25",
    "R_el": "4.1",
    "R_el_se": "0.1",
    "R_sl": "absent",
    "R_ct": "41.2",
    "R_ct_se": "0.8",
    "Q_ct": "2.1e-5",
    "n_ct": "0.86",
}


def template_text(*, example: bool = False) -> str:
    """Return the header line of the flat table, with one filled row as an example if asked."""
    lines = [",".join(CANONICAL)]
    if example:
        lines.append(",".join(EXAMPLE.get(name, "") for name in CANONICAL))
    return "\n".join(lines) + "\n"
