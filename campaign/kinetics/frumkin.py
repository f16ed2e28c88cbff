"""The Frumkin insertion isotherm and the valley it makes of R_ct against potential.

[1] M. D. Levi, D. Aurbach, Electrochim. Acta 45 (1999) 167.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from campaign.kinetics.constants import FARADAY_CONSTANT, GAS_CONSTANT

FloatArray = npt.NDArray[np.float64]

TWO_PHASES = -4.0
"""Interaction g [1] at and below which the isotherm has two phases, [1]."""


_ROUNDING = 4e-16


class IsothermUndefined(ValueError):
    """The interaction parameter gives two phases: no isotherm, no valley."""


def _defined(interaction: float) -> float:
    if not interaction > TWO_PHASES:
        raise IsothermUndefined(
            f"interaction g = {interaction:g} gives two phases (g <= -4): "
            "the isotherm and R_ct(E) are defined for g > -4 only"
        )
    return interaction


def _reduced(
    potential_V: npt.ArrayLike, E0_V: float, temperature_K: npt.ArrayLike, charge: int
) -> FloatArray:
    potential = np.asarray(potential_V, dtype=np.float64)
    temperature = np.asarray(temperature_K, dtype=np.float64)
    return np.asarray(charge * FARADAY_CONSTANT * (potential - E0_V) / (GAS_CONSTANT * temperature))


def _log_odds_empty(reduced: FloatArray, interaction: float) -> FloatArray:
    """Solve u = y - g(theta - 1/2) for y = ln((1-theta)/theta), theta = 1/(1 + e^y).

    The right side rises in y for g > -4 and |theta - 1/2| < 1/2 brackets the root in
    [u - |g|/2, u + |g|/2]. A Newton step that leaves the bracket, or is not half as long as
    the one before (it may run in a cycle), is replaced by the bracket's middle. A value whose
    excess is no larger than the rounding of its terms stays as it is.
    """
    low = reduced - abs(interaction) / 2
    high = reduced + abs(interaction) / 2
    y = reduced.copy()
    last = high - low
    rounding = _ROUNDING * (np.abs(reduced) + abs(interaction))
    for _ in range(200):
        half = np.tanh(y / 2) / 2  # 1/2 - theta
        excess = y + interaction * half - reduced
        high = np.where(excess > 0, y, high)
        low = np.where(excess > 0, low, y)
        slope = 1 + interaction * (0.25 - half**2)
        step = y - excess / np.where(slope > 1e-12, slope, 1e-12)
        good = (step >= low) & (step <= high) & (np.abs(step - y) <= last / 2)
        new = np.where(good, step, (low + high) / 2)
        new = np.where(np.abs(excess) <= rounding + _ROUNDING * np.abs(y), y, new)
        last = np.abs(new - y)
        if np.all(np.abs(new - y) <= 1e-14 * (1 + np.abs(y))):
            return np.asarray(new)
        y = new
    return y


def isotherm_potential(
    occupancy: npt.ArrayLike,
    E0_V: float,
    interaction: float,
    temperature_K: npt.ArrayLike,
    charge: int = 1,
) -> FloatArray:
    """Return E = E0 + (RT/zF)[ln((1-theta)/theta) - g(theta - 1/2)] [V], [1].

    occupancy theta [1], 0 < theta < 1; interaction g [1], g > 0 repulsive; temperature_K [K].
    Raises IsothermUndefined for g <= -4.
    """
    g = _defined(interaction)
    theta = np.asarray(occupancy, dtype=np.float64)
    temperature = np.asarray(temperature_K, dtype=np.float64)
    unit = GAS_CONSTANT * temperature / (charge * FARADAY_CONSTANT)
    return np.asarray(E0_V + unit * (np.log((1 - theta) / theta) - g * (theta - 0.5)))


def isotherm_occupancy(
    potential_V: npt.ArrayLike,
    E0_V: float,
    interaction: float,
    temperature_K: npt.ArrayLike,
    charge: int = 1,
) -> FloatArray:
    """Return theta(E) [1], the inverse of `isotherm_potential`; E and E0 [V], T [K].

    Raises IsothermUndefined for g <= -4.
    """
    y = _log_odds_empty(_reduced(potential_V, E0_V, temperature_K, charge), _defined(interaction))
    return np.asarray(0.5 * (1 - np.tanh(y / 2)))


def valley_resistance(
    potential_V: npt.ArrayLike,
    E0_V: float,
    interaction: float,
    minimum: npt.ArrayLike,
    temperature_K: npt.ArrayLike,
    charge: int = 1,
) -> FloatArray:
    """Return R_ct(E) = R_min / (2 sqrt(theta(1-theta))) in the unit of `minimum`, [1].

    With y = ln((1-theta)/theta) this is R_min cosh(y/2); for g = 0,
    R_min cosh(zF(E - E0)/2RT). Potentials [V], temperature_K [K].
    Raises IsothermUndefined for g <= -4.
    """
    y = _log_odds_empty(_reduced(potential_V, E0_V, temperature_K, charge), _defined(interaction))
    return np.asarray(np.asarray(minimum, dtype=np.float64) * np.cosh(y / 2))


def log_valley_slopes(
    potential_V: npt.ArrayLike,
    E0_V: float,
    interaction: float,
    temperature_K: npt.ArrayLike,
    charge: int = 1,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return ln(R_ct/R_min) [1] and its derivatives by E0 [1/V] and by g [1], [1].

    From y + g tanh(y/2)/2 = zF(E - E0)/RT, with h = tanh(y/2)/2 and s = 1 + g(1/4 - h^2):
    dy/dE0 = -zF/(RT s), dy/dg = -h/s, and d ln cosh(y/2)/dy = h.
    Raises IsothermUndefined for g <= -4.
    """
    g = _defined(interaction)
    y = _log_odds_empty(_reduced(potential_V, E0_V, temperature_K, charge), g)
    half = np.tanh(y / 2) / 2
    ratio = half / (1 + g * (0.25 - half**2))
    per_volt = charge * FARADAY_CONSTANT / (GAS_CONSTANT * np.asarray(temperature_K, np.float64))
    return np.log(np.cosh(y / 2)), -ratio * per_volt, -ratio * half
