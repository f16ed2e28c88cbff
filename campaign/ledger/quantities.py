"""The fitted quantities, in the order of the flat table, without NumPy."""

from __future__ import annotations

QUANTITIES = (
    "R_el", "R_sl", "Q_sl", "n_sl", "R_ct", "Q_ct", "n_ct", "R_lat", "Q_lat", "n_lat", "sigma_w",
)  # fmt: skip

# Quantities whose arc may have been looked for and found absent.
MAY_BE_ABSENT = ("R_sl", "R_lat")

# Quantities that carry a standard error in the flat table.
WITH_ERROR = ("R_el", "R_sl", "R_ct", "R_lat", "sigma_w")
