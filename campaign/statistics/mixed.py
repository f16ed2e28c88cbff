"""Linear mixed model with the specimen as experimental unit.

    y_j = x_j' beta + alpha_stratum(j) + z_j' u_specimen(j) + e_j                              [1]
    u_i ~ N(0, diag(g)),  Var(e_j) = sigma_within^2 + known_j

with z = 1 (random intercept, g_1 = sigma_between^2) and optional further columns (random
slopes, independent of the intercept: centre them). Fitted by REML, or by ML where likelihoods
of different fixed parts are compared. Repeated readings of one specimen are not independent:
the interval of anything that differs between specimens rests on their scatter and number.

[1] Laird & Ware, Biometrics 38 (1982) 963; Pinheiro & Bates, Mixed-Effects Models in S and
    S-PLUS (2000), ch. 2.
[2] Giesbrecht & Burns, Biometrics 41 (1985) 477: degrees of freedom of a contrast c' beta,
    2 v^2 / (d' I^-1 d), v = c' C c, d = dv/dtheta, I the expected information of theta; after
    Satterthwaite, Biometrics Bull. 2 (1946) 110. dv/dtheta_k = a' V_k a, a = V^-1 F C c.
[3] Henderson, Biometrics 9 (1953) 226, method 3: rank([F Z]) - rank(F) degrees of freedom
    between specimens.
[4] Kenward & Roger, Biometrics 53 (1997) 983: variance of a contrast with the uncertainty of
    the weights, v + 2 sum_kl (I^-1)_kl a' V_k P V_l a.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Literal

import numpy as np
import numpy.typing as npt

from campaign.statistics import outliers
from campaign.statistics.design import Design, NoContrast, Term, prepare, terms
from campaign.statistics.estimate import Estimate
from campaign.statistics.likelihood import Likelihood, Point
from campaign.statistics.optimise import Mask, maximise, solve
from campaign.statistics.sums import Array, Data, grams

Method = Literal["REML", "ML"]

__all__ = ["Method", "MixedFit", "NoContrast", "fit_mixed"]

# least sigma_within^2, in units of the scatter about the fixed effects: a smaller one would lose
# the scatter between specimens to rounding
_FLOOR = 1e-8


@dataclass(frozen=True)
class MixedFit:
    """A fitted mixed model; everything in the unit of y.

    beta (p,), cov (p, p): fixed effects and their covariance; strata (S,): stratum effects, in
    the order of the sorted codes. sigma_between: between specimens, NaN where it cannot be
    estimated; sigma_slopes (q - 1,): of the random slopes, in y per unit of the slope column;
    sigma_within: of a reading, beyond its known variance. rank: number of fixed effects,
    strata included; df_between: specimens less what the fixed effects take of them [3].
    separable: specimens and readings can be told apart, else all scatter is in `sigma_between`
    and `sigma_within` is NaN. at_boundary: a variance was estimated as exactly zero.
    """

    beta: Array
    cov: Array
    strata: Array
    sigma_between: float
    sigma_slopes: Array
    sigma_within: float
    loglik: float
    method: Method
    n: int
    n_specimens: int
    rank: int
    df_between: int
    separable: bool
    at_boundary: bool
    _coefficients: Array = field(repr=False)
    _cov: Array = field(repr=False)
    _point: Point = field(repr=False)
    _free: Mask = field(repr=False)
    _terms: tuple[Term, ...] = field(repr=False)
    _design: Design = field(repr=False)

    @property
    def n_parameters(self) -> int:
        """Number of fixed effects and of estimated variances, for information criteria."""
        return self.rank + int(self._free.sum())

    @property
    def single_specimen(self) -> bool:
        """Only one specimen: estimates carry no interval for another specimen."""
        return self.n_specimens == 1

    def contrast(self, c: Sequence[float] | Array, adjusted: bool = False) -> Estimate:
        """Return c' beta with its standard error and degrees of freedom [2].

        c: (p,) over the columns of X, or (p + S,) over the columns and the strata. What does
        not vary within specimens has at most the degrees of freedom between specimens [3]:
        with sigma_between estimated as zero, too, more readings do not replace specimens.
        `se` is NaN and df 0 where no specimen is to spare. `adjusted` adds to the standard error
        what estimating the variances adds [4]: nothing in a balanced campaign, worth having
        where some specimens were moved through several levels and others were not. Raises
        ValueError for a vector of another length.
        """
        full = self._full(c)
        value = float(full @ self._coefficients)
        direction = self._design.jacobian.T @ full
        cap = self._cap(direction)
        if self.single_specimen or cap <= 0:
            return Estimate(value, math.nan, 0.0)
        variance = max(float(full @ self._cov @ full), 0.0)
        if adjusted:
            variance += self._adjustment(direction)
        return Estimate(value, math.sqrt(variance), min(self._satterthwaite(direction), cap))

    def contrasts(self, rows: Sequence[Sequence[float]] | Array) -> tuple[list[Estimate], Array]:
        """Return the estimates of the rows (k, p) or (k, p + S), and their covariance (k, k)."""
        full = np.array([self._full(row) for row in rows])
        return [self.contrast(row) for row in full], full @ self._cov @ full.T

    def residuals(self) -> Array:
        """Return y - X beta - strata - Z u (n,), the residuals within specimens."""
        return outliers.conditional(self._design.data, self._point) * self._design.scale

    def blups(self) -> Array:
        """Return the predicted effects of the specimens (m, q), intercepts first."""
        effects: Array = self._point.zpy * self._point.theta[1:] * self._design.scale
        effects[:, 1:] /= self._design.slope_units
        return effects

    def studentised_readings(self) -> Array:
        """Return the externally studentised residual of every reading (n,)."""
        df = self.n - self.rank
        return outliers.studentised_readings(self._design.data, self._point, df)

    def studentised_specimens(self) -> Array:
        """Return the externally studentised effect of every specimen (m,)."""
        return outliers.studentised_specimens(self._design.data, self._point, self.df_between)

    def _full(self, c: Sequence[float] | Array) -> Array:
        given = np.asarray(c, dtype=float)
        p, f = self.beta.size, self.rank
        if given.shape == (p,):
            return np.concatenate([given, np.zeros(f - p)])
        if given.shape != (f,):
            raise ValueError(f"a contrast of shape {given.shape}; expected ({p},) or ({f},)")
        return given

    def _cap(self, direction: Array) -> float:
        """Return the degrees of freedom between specimens that bound this contrast [3]."""
        single, joint = self._terms[:-1], self._terms[-1]
        holding = [term.df for term in single if term.holds(direction)]
        if not holding and joint.holds(direction):
            holding = [term.df for term in single]
        return min(holding, default=math.inf)

    def _satterthwaite(self, direction: Array) -> float:
        point = self._point
        free = np.flatnonzero(self._free)
        carried = point.cov @ direction
        f = carried.size
        variance = float(direction @ carried)
        slope = np.empty(point.theta.size)
        slope[0] = carried @ point.ev2e[:f, :f] @ carried
        slope[1:] = ((point.ze1[..., :f] @ carried) ** 2).sum(axis=0)
        slope = slope[free]
        info = point.information[np.ix_(free, free)]
        about = float(slope @ solve(info, slope))
        return 2 * variance**2 / about if about > 0 else math.inf

    def _adjustment(self, direction: Array) -> float:
        """Return 2 sum_kl (I^-1)_kl a' V_k P V_l a [4], a = V^-1 F C c."""
        point = self._point
        free = np.flatnonzero(self._free)
        forms = point.forms(np.append(point.cov @ direction, 0.0))[np.ix_(free, free)]
        info = point.information[np.ix_(free, free)]
        total = sum(float(solve(info, forms[k])[k]) for k in range(free.size))
        return max(2 * total, 0.0)


def fit_mixed(
    y: npt.ArrayLike,
    X: npt.ArrayLike,
    specimen: npt.ArrayLike,
    stratum: npt.ArrayLike | None = None,
    known: npt.ArrayLike | None = None,
    slopes: npt.ArrayLike | None = None,
    method: Method = "REML",
) -> MixedFit:
    """Fit the mixed model of this module [1].

    y (n,); X (n, p), without a constant where strata are given; specimen, stratum (n,): codes
    or labels; stratum None: no stratum effects, X holds its own constant; known (n,): the known
    variance of each reading, (SE/R)^2 for y = ln R; slopes (n, q - 1): columns whose
    coefficients differ between specimens.

    Raises NoContrast where a column of X does not vary within strata or cannot be told from
    the others; ValueError for arrays that do not fit together or are not finite.
    """
    design = prepare(y, X, specimen, stratum, known, slopes)
    data = design.data
    unit = grams(data, None)
    found = terms(data, unit)
    likelihood = Likelihood(data, unit if data.known is None else None, method == "REML")
    rank = data.p + data.s
    free = np.array([True, *(term.df > 0 for term in found[:-1])])
    joint = found[-1]
    separable = data.n - rank - joint.df > 0
    if not separable:
        # every reading stands for a specimen: one scatter, whichever of the two it is called
        free[1:] = False
    if data.n <= rank:
        free[:] = False
    point = maximise(likelihood, _starts(data, free), free, _FLOOR)
    return _finish(design, point, free, found, separable, method)


def _starts(data: Data, free: Mask) -> list[Array]:
    """Return starting points: half of the scatter each way, then nearly all between."""
    total = float(np.mean(data.columns[:, -1] ** 2)) or 1.0
    given = 0.0 if data.known is None else float(np.mean(data.known))
    within = max(0.5 * total - given, 0.05 * total) if free[1:].any() else max(total - given, 0.05)
    first = np.array([within] + [0.5 * total / data.q] * data.q)
    second = np.array([0.01 * total] + [total] * data.q)
    return [np.where(free, start, [total, *[0.0] * data.q]) for start in (first, second)]


def _finish(
    design: Design,
    point: Point,
    free: Mask,
    found: tuple[Term, ...],
    separable: bool,
    method: Method,
) -> MixedFit:
    data, scale = design.data, design.scale
    p, f = data.p, data.p + data.s
    coefficients = design.offset + design.jacobian @ point.beta
    cov = design.jacobian @ point.cov @ design.jacobian.T
    sigma = np.where(free, np.sqrt(point.theta), math.nan) * scale
    between, within = float(sigma[1]), float(sigma[0])
    if not separable:
        between, within = within, math.nan
    # the likelihood was taken of y / scale (and of strata and X in units of their own)
    loglik = point.loglik - data.n * math.log(scale)
    if method == "REML":
        loglik += float(np.linalg.slogdet(design.jacobian)[1])
    return MixedFit(
        coefficients[:p], cov[:p, :p], coefficients[p:], between, sigma[2:] / design.slope_units,
        within, loglik, method, data.n, data.m, f, found[0].df, separable,
        bool((point.theta[1:][free[1:]] == 0).any()),
        coefficients, cov, point, free, found, design,
    )  # fmt: skip
