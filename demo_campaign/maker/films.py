"""The four electrodes, the media they meet, and what is true of them. All invented."""

from __future__ import annotations

from dataclasses import dataclass

TEMPERATURES_C = (5.0, 15.0, 25.0, 35.0, 45.0)
BETWEEN = 0.15  # standard deviation of ln R between specimens
WITHIN = 0.04  # and between readings of one specimen
BARRIER_SPREAD = 1.3  # kJ/mol, standard deviation between specimens
QUANTITIES = ("R_el", "R_sl", "R_ct", "R_lat", "sigma_w")


@dataclass(frozen=True)
class Medium:
    """One solvent blend with its additives, as one electrode meets it.

    factor_sl, factor_ct: multiply R_sl, R_ct at 25 C and 1 mol/L. barrier_kJ_mol: of the
    exchange current, so of ln(R_ct/T); None takes the electrode's. kappa: conductivity at
    1 mol/L and 25 C [S cm^-1].
    """

    solvents: str
    additive: str = ""
    factor_sl: float = 1.0
    factor_ct: float = 1.0
    barrier_kJ_mol: float | None = None
    kappa: float = 0.007
    aqueous: bool = False


@dataclass(frozen=True)
class Film:
    """An electrode and what is true of it; resistances at 25 C, 1 mol/L [ohm cm2].

    order_*: m = -d ln R / d ln c. barrier_*: [kJ/mol], of ln R for R_sl and R_lat, of
    ln(R/T) for R_ct. growth: R_sl grows as 1 + growth sqrt(age in days), relative to one
    day. potential_law: of R_ct about E0_V, with Frumkin's g, or with the e-folding
    potential `fold_V` where exponential. Q_*: [S s^n cm^-2].
    """

    label: str
    material: str
    form: str
    R_sl: float
    R_ct: float
    R_lat: float
    sigma_w: float
    E0_V: float
    offsets_V: tuple[float, ...]
    order_sl: float = 0.0
    order_ct: float = 0.0
    barrier_sl: float = 35.0
    barrier_ct: float = 50.0
    barrier_lat: float = 38.0
    barrier_w: float = 20.0
    growth: float = 0.03
    potential_law: str = "valley"
    g: float = 0.0
    fold_V: float = 0.25
    Q_sl: float = 8e-6
    Q_ct: float = 6e-5
    Q_lat: float = 7e-3


FILM_A = Film(
    "NFM film A", "NaNi1/3Fe1/3Mn1/3O2", "thin film",
    R_sl=18.0, R_ct=230.0, R_lat=14.0, sigma_w=2.6, E0_V=3.15,
    offsets_V=(-0.11, -0.07, -0.03, 0.0, 0.05, 0.10),
    order_ct=0.55, barrier_ct=58.0, g=1.0, Q_ct=3.8e-5, Q_lat=1e-2,
)  # fmt: skip
FILM_B = Film(
    "NiHCF film B", "Na2Ni[Fe(CN)6]", "thin film",
    R_sl=13.0, R_ct=260.0, R_lat=22.0, sigma_w=3.0, E0_V=3.25,
    offsets_V=(-0.13, -0.08, -0.04, 0.0, 0.05, 0.10),
    order_ct=0.0, barrier_ct=46.0, Q_ct=5e-5,
)  # fmt: skip
FILM_C = Film(
    "hard carbon C", "hard carbon", "composite",
    R_sl=330.0, R_ct=55.0, R_lat=16.0, sigma_w=3.2, E0_V=0.50,
    offsets_V=(-0.20, -0.10, 0.0, 0.10, 0.20, 0.30),
    order_sl=0.04, order_ct=0.25, barrier_sl=44.0, barrier_ct=52.0, growth=0.30,
    potential_law="exponential", Q_ct=1.6e-4, Q_sl=4e-6, Q_lat=1.2e-2,
)  # fmt: skip
FILM_D = Film(
    "Prussian white D", "Na2Fe[Fe(CN)6]", "composite",
    R_sl=16.0, R_ct=92.0, R_lat=84.0, sigma_w=4.0, E0_V=3.10,
    offsets_V=(-0.10, 0.0, 0.10),
    order_ct=0.1, barrier_ct=48.0,
)  # fmt: skip

MEDIA_A = (
    Medium("EC:DEC (1:1 v/v)", kappa=0.0070),
    Medium("PC", factor_ct=1.25, barrier_kJ_mol=56.0, kappa=0.0065),
    Medium("diglyme", factor_sl=0.6, factor_ct=0.36, barrier_kJ_mol=40.0, kappa=0.0060),
    Medium("EC:DEC (1:1 v/v)", "2 wt% FEC", factor_sl=1.6, factor_ct=1.1, kappa=0.0068),
)
MEDIA_B = (
    Medium("water", kappa=0.070, aqueous=True),
    Medium("PC", kappa=0.0065),
    Medium("EC:DMC (1:1 v/v)", kappa=0.0090),
)
MEDIA_C = (
    Medium("EC:DEC (1:1 v/v)", kappa=0.0070),
    Medium("EC:DEC (1:1 v/v)", "2 wt% FEC", factor_sl=1 / 2.8, kappa=0.0068),
    Medium("EC:DEC (1:1 v/v)", "1 vol% VC", factor_sl=1.2, kappa=0.0069),
    Medium("diglyme", factor_sl=0.28, factor_ct=0.8, kappa=0.0060),
    Medium("PC", factor_sl=1.2, factor_ct=1.1, kappa=0.0065),
)
MEDIA_D = (
    Medium("PC", kappa=0.0065),
    Medium("water", factor_ct=0.8, kappa=0.070, aqueous=True),
)
