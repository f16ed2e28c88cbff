"""Diffusion: the Warburg impedance, what it gives after a current step, and its limit.

[1] C. Ho, I. D. Raistrick, R. A. Huggins, J. Electrochem. Soc. 127 (1980) 343.
[2] A. J. Bard, L. R. Faulkner, Electrochemical Methods, 2nd ed., Wiley (2001), ch. 8 and 10.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from campaign.kinetics.constants import FARADAY_CONSTANT

FloatArray = npt.NDArray[np.float64]


def impedance(
    coefficient: npt.ArrayLike, angular_frequency: npt.ArrayLike
) -> npt.NDArray[np.complex128]:
    """Return Z = sigma_w (1 - j)/sqrt(omega) [ohm cm2], [1].

    coefficient sigma_w [ohm cm2 s^-1/2], angular_frequency omega [rad s^-1] broadcast.
    """
    sigma = np.asarray(coefficient, dtype=np.float64)
    omega = np.asarray(angular_frequency, dtype=np.float64)
    return np.asarray(sigma * (1 - 1j) / np.sqrt(omega), dtype=np.complex128)


def diffusivity(
    coefficient: npt.ArrayLike,
    dE_dx_V: npt.ArrayLike,
    molar_volume: float,
    charge: int = 1,
) -> FloatArray:
    """Return D = [V_m (dE/dx) / (sqrt(2) z F sigma_w)]^2 [cm2 s^-1], [1].

    coefficient sigma_w per active area [ohm cm2 s^-1/2], dE_dx_V slope of the coulometric
    titration curve [V] per unit of x, molar_volume V_m of the host [cm3 mol^-1].
    """
    sigma = np.asarray(coefficient, dtype=np.float64)
    slope = np.asarray(dE_dx_V, dtype=np.float64)
    return np.asarray(
        (molar_volume * slope / (np.sqrt(2) * charge * FARADAY_CONSTANT * sigma)) ** 2
    )


def diffusion_time(length_cm: float, diffusivity_cm2_s: float) -> float:
    """Return L^2/D [s]; length L [cm], D [cm2 s^-1], [1]."""
    return length_cm**2 / diffusivity_cm2_s


def diffusion_resistance(
    coefficient: npt.ArrayLike, length_cm: float, diffusivity_cm2_s: float
) -> FloatArray:
    """Return R_D = sqrt(2) sigma_w L / sqrt(D) [ohm cm2]; its dc limit is R_D/3, [1].

    The finite-space element R_D coth(sqrt(s tau))/sqrt(s tau), tau = L^2/D, joins the Warburg
    impedance at high frequency. sigma_w [ohm cm2 s^-1/2], L [cm], D [cm2 s^-1].
    """
    sigma = np.asarray(coefficient, dtype=np.float64)
    return np.asarray(np.sqrt(2) * sigma * length_cm / np.sqrt(diffusivity_cm2_s))


def step_resistance(coefficient: npt.ArrayLike, time_s: npt.ArrayLike) -> FloatArray:
    """Return W(t) = 2 sigma_w sqrt(2t/pi) [ohm cm2], the response to a unit current step, [2].

    The inverse Laplace transform of sigma_w sqrt(2) s^(-3/2).
    coefficient [ohm cm2 s^-1/2], time_s [s] broadcast.
    """
    sigma = np.asarray(coefficient, dtype=np.float64)
    time = np.asarray(time_s, dtype=np.float64)
    return np.asarray(2 * sigma * np.sqrt(2 * time / np.pi))


def capped_step_resistance(
    coefficient: npt.ArrayLike,
    time_s: npt.ArrayLike,
    length_cm: float | None = None,
    diffusivity_cm2_s: float | None = None,
) -> FloatArray:
    """Return W(t) [ohm cm2], held at R_D/3 once it gets there; uncapped without L or D.

    coefficient [ohm cm2 s^-1/2], time_s [s], length_cm [cm], diffusivity_cm2_s [cm2 s^-1]. [1]
    """
    response = step_resistance(coefficient, time_s)
    if length_cm is None or diffusivity_cm2_s is None:
        return response
    limit = diffusion_resistance(coefficient, length_cm, diffusivity_cm2_s) / 3
    return np.asarray(np.minimum(response, limit))
