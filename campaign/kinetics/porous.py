"""The dc limit of the transmission line of a porous electrode.

With the faradaic resistance R_ct (of the whole thickness) in parallel along pores whose ionic
resistance is R_ion, the low-frequency resistance is
R_app = sqrt(R_ion R_ct) coth(sqrt(R_ion/R_ct)).

[1] R. de Levie, Electrochemical response of porous and rough electrodes, in: Advances in
    Electrochemistry and Electrochemical Engineering 6 (1967) 329.
[2] N. Ogihara, S. Kawauchi, C. Okuda, Y. Itou, Y. Takeuchi, Y. Ukyo,
    J. Electrochem. Soc. 159 (2012) A1034.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


def apparent_resistance(
    charge_transfer: npt.ArrayLike, pore_resistance: npt.ArrayLike
) -> FloatArray:
    """Return R_app [ohm cm2] from R_ct and R_ion > 0 [ohm cm2], [1], [2].

    R_ion << R_ct: R_ct + R_ion/3. R_ion >> R_ct: sqrt(R_ion R_ct).
    """
    r_ct = np.asarray(charge_transfer, dtype=np.float64)
    r_ion = np.asarray(pore_resistance, dtype=np.float64)
    return np.asarray(np.sqrt(r_ion * r_ct) / np.tanh(np.sqrt(r_ion / r_ct)))


def sensitivity(charge_transfer: npt.ArrayLike, pore_resistance: npt.ArrayLike) -> FloatArray:
    """Return d ln R_app / d ln R_ct [1], between 1/2 (R_ion >> R_ct) and 1 (R_ion << R_ct).

    The share with which order and barrier of R_ct enter those of R_app; the rest is that of
    R_ion. By differentiating R_app of [2]: (1 + 2s/sinh 2s)/2, s = sqrt(R_ion/R_ct).
    """
    r_ct = np.asarray(charge_transfer, dtype=np.float64)
    r_ion = np.asarray(pore_resistance, dtype=np.float64)
    return np.asarray((1 + _slope_share(np.sqrt(r_ion / r_ct))) / 2)


def _slope_share(s: FloatArray) -> FloatArray:
    """Return 2s/sinh(2s) without overflow."""
    return np.asarray(4 * s * np.exp(-2 * s) / -np.expm1(-4 * s))


def charge_transfer_from_apparent(
    apparent: npt.ArrayLike, pore_resistance: npt.ArrayLike
) -> FloatArray:
    """Return R_ct [ohm cm2] with which R_app of [2] equals `apparent` [ohm cm2].

    R_app rises from 0 to infinity with R_ct, so every finite `apparent` > 0 has exactly one
    R_ct (below R_ion/3 only the mouth of the pores works, see `penetrated`). NaN where an
    input is not finite and positive. Inputs broadcast.
    """
    r_app, r_ion = np.broadcast_arrays(
        np.asarray(apparent, dtype=np.float64), np.asarray(pore_resistance, dtype=np.float64)
    )
    valid = np.isfinite(r_app) & np.isfinite(r_ion) & (r_app > 0) & (r_ion > 0)
    ion = np.where(valid, r_ion, 1.0)
    target = np.log(np.where(valid, r_app, 1.0)) - np.log(ion)
    # ln(coth(s)/s) = ln(R_app/R_ion) in u = ln s: decreasing with slope between -2 and -1 and
    # convex, so Newton's method converges from any start.
    u = np.where(target > 0, -target / 2, -target)
    for _ in range(100):
        s = np.exp(u)
        log_coth = np.log1p(np.exp(-2 * s)) - np.log(-np.expm1(-2 * s))
        step = (log_coth - u - target) / (1 + _slope_share(s))
        u = u + step
        if np.all(np.abs(step) < 1e-14):
            break
    return np.asarray(np.where(valid, ion * np.exp(-2 * u), np.nan))


def penetrated(apparent: npt.ArrayLike, pore_resistance: npt.ArrayLike) -> npt.NDArray[np.bool_]:
    """Return whether R_app > R_ion/3: below it only part of the thickness is at work, [2]."""
    r_app = np.asarray(apparent, dtype=np.float64)
    r_ion = np.asarray(pore_resistance, dtype=np.float64)
    return np.asarray(r_app > r_ion / 3)


def conductivity_at(table: Sequence[tuple[float, float]], temperature_K: float) -> float | None:
    """Return the conductivity [S cm^-1] at `temperature_K` [K], or None outside the table.

    `table` holds (temperature [K], conductivity [S cm^-1]) pairs; between two of them ln kappa
    is linear in 1/T (common practice, no source). Within 1 K of an end the end value is taken.
    """
    if not table:
        return None
    points = sorted(table)
    temperatures = np.array([point[0] for point in points])
    if not temperatures[0] - 1 <= temperature_K <= temperatures[-1] + 1:
        return None
    inverse = -1 / temperatures
    logs = np.log([point[1] for point in points])
    return float(np.exp(np.interp(-1 / temperature_K, inverse, logs)))


def scaled_pore_resistance(
    reference_resistance: float, reference_conductivity: float, conductivity: float
) -> float:
    """Return R_ion kappa_ref/kappa [ohm cm2]: the pores' shape stays, the electrolyte changes.

    R_ion [ohm cm2] was measured where the conductivity was `reference_conductivity` [S cm^-1];
    R_ion is inversely proportional to the conductivity, [2].
    """
    return reference_resistance * reference_conductivity / conductivity
