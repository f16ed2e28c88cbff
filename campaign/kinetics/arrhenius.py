"""Barriers from the temperature dependence of a resistance, in both Arrhenius forms.

`ln R`: R = A exp(Ea/RT), common in papers on insertion electrodes [1].
`ln(R/T)`: follows from R_ct = RT/(z F i0) with i0 = A exp(-Ea/RT) [2].
They differ by RT, about 2.5 kJ/mol at room temperature, so a barrier always names its form.

[1] Y. Yamada, Y. Iriyama, T. Abe, Z. Ogumi, Langmuir 25 (2009) 12766.
[2] A. J. Bard, L. R. Faulkner, Electrochemical Methods, 2nd ed., Wiley (2001), section 3.4.
[3] P. Atkins, J. de Paula, Physical Chemistry, the chapter on reaction rates.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np
import numpy.typing as npt

from campaign.kinetics.constants import GAS_CONSTANT

FloatArray = npt.NDArray[np.float64]
Form = Literal["ln R", "ln(R/T)"]
FORMS: Final[tuple[Form, Form]] = ("ln R", "ln(R/T)")


@dataclass(frozen=True)
class ArrheniusLine:
    """A least-squares line: barrier_kJ_mol [kJ/mol], log_prefactor (of the unit of R), form."""

    barrier_kJ_mol: float
    log_prefactor: float
    form: Form


def barrier_from_slope(slope_K: npt.ArrayLike) -> FloatArray:
    """Return Ea = R d(y)/d(1/T) [kJ/mol], [3]; slope_K [K] of ln R or ln(R/T) over 1/T [1/K]."""
    return np.asarray(GAS_CONSTANT * np.asarray(slope_K, dtype=np.float64) / 1000)


def ordinate(resistance: npt.ArrayLike, temperature_K: npt.ArrayLike, form: Form) -> FloatArray:
    """Return ln R or ln(R/T) for resistance (any unit) and temperature_K [K]."""
    value = np.log(np.asarray(resistance, dtype=np.float64))
    if form == "ln(R/T)":
        value = value - np.log(np.asarray(temperature_K, dtype=np.float64))
    return np.asarray(value)


def convert_barrier(
    barrier_kJ_mol: npt.ArrayLike, temperature_K: npt.ArrayLike, source: Form, target: Form
) -> FloatArray:
    """Return a barrier [kJ/mol] in the other form at the mean temperature_K [K].

    d ln(R/T)/d(1/T) = d ln R/d(1/T) + T, so Ea[ln(R/T)] = Ea[ln R] + RT, [2].
    """
    barrier = np.asarray(barrier_kJ_mol, dtype=np.float64)
    shift = GAS_CONSTANT * np.asarray(temperature_K, dtype=np.float64) / 1000
    sign = FORMS.index(target) - FORMS.index(source)
    return np.asarray(barrier + sign * shift)


def arrhenius_line(
    temperature_K: npt.ArrayLike, resistance: npt.ArrayLike, form: Form = "ln R"
) -> ArrheniusLine:
    """Return the least-squares Arrhenius line through n >= 2 points of one series, [3].

    temperature_K [K], resistance > 0 (any unit), both of shape (n,). For a rate constant k,
    pass 1/k: then log_prefactor is -ln A. No interval: points of one specimen are not
    independent, the mixed model of the trends gives one.
    """
    inverse = 1 / np.asarray(temperature_K, dtype=np.float64)
    y = ordinate(resistance, temperature_K, form)
    centred = inverse - inverse.mean()
    slope = float(centred @ y / (centred @ centred))
    return ArrheniusLine(
        float(barrier_from_slope(slope)), float(y.mean() - slope * inverse.mean()), form
    )
