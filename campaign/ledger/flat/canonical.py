"""The canonical headers of the flat table, their kinds and units.

Apart from `headers`, because the options of `log` are made of them whatever command runs.
"""

from __future__ import annotations

# Canonical header -> (kind, canonical unit). Kinds: text, number, integer, instant, choice,
# ion, reference, recipe, value (a fitted quantity), error (its standard error).
COLUMNS: dict[str, tuple[str, str]] = {
    "electrode": ("text", ""),
    "material": ("text", ""),
    "ion": ("ion", ""),
    "form": ("text", ""),
    "cell": ("text", ""),
    "specimen": ("text", ""),
    "area_cm2": ("number", "cm2"),
    "configuration": ("choice", ""),
    "reference": ("reference", ""),
    "electrolyte": ("text", ""),
    "assembled_at": ("instant", ""),
    "measured_at": ("instant", ""),
    "potential_V": ("number", "V"),
    "temperature_C": ("number", "K"),
    "ion_content": ("number", "1"),
    "E_half_V": ("number", "V"),
    "cycle": ("integer", ""),
    "direction": ("text", ""),
    "rest_h": ("number", "h"),
    "R_el": ("value", "ohm"),
    "R_el_se": ("error", "ohm"),
    "R_sl": ("value", "ohm"),
    "R_sl_se": ("error", "ohm"),
    "Q_sl": ("value", "S s^n"),
    "n_sl": ("value", "1"),
    "R_ct": ("value", "ohm"),
    "R_ct_se": ("error", "ohm"),
    "Q_ct": ("value", "S s^n"),
    "n_ct": ("value", "1"),
    "R_lat": ("value", "ohm"),
    "R_lat_se": ("error", "ohm"),
    "Q_lat": ("value", "S s^n"),
    "n_lat": ("value", "1"),
    "sigma_w": ("value", "ohm s^-1/2"),
    "sigma_w_se": ("error", "ohm s^-1/2"),
    "chi2": ("number", "1"),
    "circuit": ("text", ""),
    "weighting": ("text", ""),
    "fitted_at": ("instant", ""),
    "fitted_by": ("text", ""),
    "amplitude_mV": ("number", "mV"),
    "f_min_Hz": ("number", "Hz"),
    "f_max_Hz": ("number", "Hz"),
    "operator": ("text", ""),
    "instrument": ("text", ""),
    "spectrum": ("text", ""),
    "note": ("text", ""),
}

CANONICAL = tuple(COLUMNS)
