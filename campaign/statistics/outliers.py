"""Studentised residuals of a mixed model, by reading and by specimen.

[1] Robinson, Statist. Sci. 6 (1991) 15: best linear unbiased predictions u = G Z' P y, with
    conditional residuals e = D P y of variance D P D.
[2] Cook & Weisberg, Residuals and Influence in Regression (1982), ch. 2: externally
    studentised t = r sqrt((v - 1) / (v - r^2)), r the internally studentised residual and v
    its degrees of freedom.
"""

from __future__ import annotations

import numpy as np

from campaign.statistics.likelihood import Point
from campaign.statistics.sums import Array, Data

_CHUNK = 65_536


def weights(data: Data, point: Point) -> Array:
    """Return 1/Var(e) of every reading (n,)."""
    variance = np.full(data.n, point.theta[0])
    if data.known is not None:
        variance = variance + data.known
    return 1.0 / variance


def conditional(data: Data, point: Point) -> Array:
    """Return the residuals y - F beta - Z u (n,) [1]."""
    p = data.p
    left = data.columns[:, p] - data.columns[:, :p] @ point.beta[:p]
    if data.s:
        left = left - point.beta[p:][data.stratum]
    effects = point.zpy * point.theta[1:]
    rest: Array = left - (data.z * effects[data.specimen]).sum(axis=1)
    return rest


def studentised_readings(data: Data, point: Point, df: int) -> Array:
    """Return the externally studentised conditional residuals (n,) [2], df = n - rank(F)."""
    weight = weights(data, point)
    spare = np.empty(data.n)
    for start in range(0, data.n, _CHUNK):
        part = slice(start, start + _CHUNK)
        spare[part] = _leftover(data, point, part, weight[part])
    # e = D P y has variance D P D, so e / sd(e) = (P y)_j / sqrt(P_jj)
    return _external(conditional(data, point) * weight, spare, weight, df)


def studentised_specimens(data: Data, point: Point, df: int) -> Array:
    """Return the externally studentised intercepts (m,) [2], df between specimens.

    Z_i' P y / sqrt(Z_i' P Z_i), which is defined with sigma_between at zero too.
    """
    rz = point.ze1[:, 0, :-1]
    whole = point.zvz[:, 0, 0]
    spare = whole - ((rz @ point.cov) * rz).sum(axis=1)
    return _external(point.zpy[:, 0], spare, whole, df)


def _leftover(data: Data, point: Point, part: slice, weight: Array) -> Array:
    """Return the diagonal of P for the readings of `part`."""
    z = data.z[part]
    of = data.specimen[part]
    absorbed = np.einsum("ja,jab->jb", z, point.inner[of])
    # rows of V^-1 F = D^-1 (F - Z T Z' D^-1 F)
    f = point.beta.size
    rows = -np.einsum("ja,jaf->jf", absorbed, point.first.ze[of][:, :, :f])
    rows[:, : data.p] += data.columns[part, : data.p]
    if data.s:
        rows[np.arange(of.size), data.p + data.stratum[part]] += 1.0
    rows *= weight[:, None]
    own = weight - weight**2 * (absorbed * z).sum(axis=1)
    diagonal: Array = own - ((rows @ point.cov) * rows).sum(axis=1)
    return diagonal


def _external(score: Array, spare: Array, whole: Array, df: int) -> Array:
    """Return external from internal residuals score / sqrt(spare); 0 where none is left."""
    left = spare > 1e-8 * whole
    inner = np.zeros(score.size)
    inner[left] = score[left] / np.sqrt(spare[left])
    if df <= 1:
        return inner
    outer: Array = inner * np.sqrt((df - 1) / np.maximum(df - inner**2, 1e-6 * df))
    return outer
