"""A resistance beside a constant-phase element, Z_Q = 1/(Q (j omega)^n).

[1] G. J. Brug, A. L. G. van den Eeden, M. Sluyters-Rehbach, J. H. Sluyters,
    J. Electroanal. Chem. 176 (1984) 275.
[2] C. H. Hsu, F. Mansfeld, Corrosion 57 (2001) 747.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


def _arrays(*values: npt.ArrayLike) -> tuple[FloatArray, ...]:
    return tuple(np.asarray(value, dtype=np.float64) for value in values)


def time_constant(
    resistance: npt.ArrayLike, cpe: npt.ArrayLike, exponent: npt.ArrayLike
) -> FloatArray:
    """Return tau = (R Q)^(1/n) [s]; R [ohm cm2], Q [S s^n cm^-2], n [1] broadcast.

    The apex of the arc lies at omega = 1/tau. R and Q may also both be of the whole cell.
    """
    r, q, n = _arrays(resistance, cpe, exponent)
    return np.asarray((r * q) ** (1 / n))


def brug_capacitance(
    electrolyte_resistance: npt.ArrayLike,
    resistance: npt.ArrayLike,
    cpe: npt.ArrayLike,
    exponent: npt.ArrayLike,
) -> FloatArray:
    """Return C = Q^(1/n) (1/R_el + 1/R)^((n-1)/n) [F cm^-2], [1].

    A distribution of time constants along the surface. R_el and R [ohm cm2],
    Q [S s^n cm^-2], n [1] broadcast.
    """
    r_el, r, q, n = _arrays(electrolyte_resistance, resistance, cpe, exponent)
    return np.asarray(q ** (1 / n) * (1 / r_el + 1 / r) ** ((n - 1) / n))


def hsu_mansfeld_capacitance(
    resistance: npt.ArrayLike, cpe: npt.ArrayLike, exponent: npt.ArrayLike
) -> FloatArray:
    """Return C = Q^(1/n) R^((1-n)/n) = tau/R [F cm^-2], [2].

    A distribution normal to the surface. R [ohm cm2], Q [S s^n cm^-2], n [1] broadcast.
    """
    r, q, n = _arrays(resistance, cpe, exponent)
    return np.asarray(q ** (1 / n) * r ** ((1 - n) / n))
