"""Charge-transfer resistance and the exchange current of an insertion electrode.

[1] A. J. Bard, L. R. Faulkner, Electrochemical Methods, 2nd ed., Wiley (2001), section 3.4.
[2] M. Doyle, T. F. Fuller, J. Newman, J. Electrochem. Soc. 140 (1993) 1526.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from campaign.kinetics.constants import FARADAY_CONSTANT, GAS_CONSTANT

FloatArray = npt.NDArray[np.float64]


def charge_transfer_resistance(
    exchange_current: npt.ArrayLike, temperature_K: npt.ArrayLike, charge: int = 1
) -> FloatArray:
    """Return R_ct = RT/(z F i0) [ohm cm2], equation (3.4.12) of [1].

    exchange_current i0 [A cm^-2] and temperature_K [K] broadcast against each other.
    """
    current = np.asarray(exchange_current, dtype=np.float64)
    temperature = np.asarray(temperature_K, dtype=np.float64)
    return np.asarray(GAS_CONSTANT * temperature / (charge * FARADAY_CONSTANT * current))


def exchange_current(
    resistance: npt.ArrayLike, temperature_K: npt.ArrayLike, charge: int = 1
) -> FloatArray:
    """Return i0 = RT/(z F R_ct) [A cm^-2] from R_ct [ohm cm2], equation (3.4.12) of [1]."""
    return charge_transfer_resistance(resistance, temperature_K, charge)


def insertion_exchange_current(
    rate_constant: npt.ArrayLike,
    concentration: npt.ArrayLike,
    occupancy: npt.ArrayLike,
    transfer_coefficient: float = 0.5,
) -> FloatArray:
    """Return i0 = F k c^(1-a) theta^a (1-theta)^(1-a) [A cm^-2], after [2].

    rate_constant k [mol cm^-2 s^-1 at c in units of its standard], concentration c of the
    salt relative to its standard [1], occupancy theta of the host's sites [1], 0 < theta < 1,
    transfer_coefficient a [1]. The order of R_ct in the salt is then 1 - a and its least
    value lies at theta = a.
    """
    a = transfer_coefficient
    k = np.asarray(rate_constant, dtype=np.float64)
    c = np.asarray(concentration, dtype=np.float64)
    theta = np.asarray(occupancy, dtype=np.float64)
    return np.asarray(FARADAY_CONSTANT * k * c ** (1 - a) * theta**a * (1 - theta) ** (1 - a))
