"""What a specimen's resistances are, without scatter, at a potential and a temperature.

[1] Bard & Faulkner, Electrochemical Methods: R_ct = R T / (z F i0).
[2] Levi & Aurbach, Electrochim. Acta 45 (1999) 167: R_ct(E) = R_min / (2 sqrt(x (1 - x))),
    with the Frumkin isotherm E = E0 + (R T / z F) [ln((1 - x)/x) - g (x - 1/2)].
Square-root growth of a surface layer with age, and the values chosen for conductivities
and capacitances, are common practice, no source.
"""

from __future__ import annotations

import math

from maker.films import Film
from maker.plan import Cell

GAS = 8.314462618  # J mol^-1 K^-1
FARADAY = 96485.33212  # C mol^-1
ROOM_K = 298.15


def frumkin_occupancy(overpotential_V: float, T_K: float, g: float) -> float:
    """Return x [1] where E - E0 = (RT/F)[ln((1-x)/x) - g (x - 1/2)] [2], by bisection."""
    low, high = 1e-12, 1.0 - 1e-12
    target = overpotential_V * FARADAY / (GAS * T_K)
    for _ in range(80):
        x = (low + high) / 2
        value = math.log((1 - x) / x) - g * (x - 0.5)
        low, high = (x, high) if value > target else (low, x)
    return (low + high) / 2


def arrhenius(barrier_kJ_mol: float, T_K: float) -> float:
    """Return exp(Ea/R (1/T - 1/298.15)) [1]: how much a resistance grows on cooling."""
    return math.exp(barrier_kJ_mol * 1000 / GAS * (1 / T_K - 1 / ROOM_K))


def potential_factor(film: Film, offset_V: float, T_K: float) -> float:
    """Return R_ct(E)/R_ct(E0) [1] by the electrode's law."""
    if film.potential_law == "exponential":
        return math.exp(offset_V / film.fold_V)
    x = frumkin_occupancy(offset_V, T_K, film.g)
    return 1 / (2 * math.sqrt(x * (1 - x)))


def true_values(cell: Cell, offset_V: float, T_K: float, age_days: float) -> dict[str, float]:
    """Return the specimen's own values per area [ohm cm2, ohm cm2 s^-1/2] without scatter.

    R_ct = R T / (F i0) with i0 ~ c^m exp(-Ea/RT) [1]; R_sl is left out in water.
    """
    film, medium, c = cell.film, cell.medium, cell.concentration
    barrier = film.barrier_ct if medium.barrier_kJ_mol is None else medium.barrier_kJ_mol
    barrier += cell.effects["barrier"]
    kappa = medium.kappa * c**0.8 * arrhenius(-15.0, T_K)
    aged = (1 + film.growth * math.sqrt(age_days)) / (1 + film.growth)
    values = {
        "R_el": 2.0 + 0.045 / kappa,
        "R_sl": film.R_sl * medium.factor_sl * c**-film.order_sl * aged
        * arrhenius(film.barrier_sl + cell.effects["barrier"], T_K),
        "R_ct": film.R_ct * medium.factor_ct * c**-film.order_ct * (T_K / ROOM_K)
        * arrhenius(barrier, T_K) * potential_factor(film, offset_V, T_K),
        "R_lat": film.R_lat * arrhenius(film.barrier_lat, T_K),
        "sigma_w": film.sigma_w * arrhenius(film.barrier_w, T_K),
    }  # fmt: skip
    if medium.aqueous:
        del values["R_sl"]
    return {name: value * math.exp(cell.effects[name]) for name, value in values.items()}


def half_potential(cell: Cell, T_K: float) -> float:
    """Return the half-filling potential [V] against the cell's reference.

    Against sodium in the same electrolyte it does not move; against a fixed reference it
    moves by RT/F ln c.
    """
    if cell.reference == "Na/Na+":
        return cell.film.E0_V
    base = {"Ag/AgCl": 0.395, "SCE": 0.350}[cell.reference]
    return base + GAS * T_K / FARADAY * math.log(cell.concentration)
