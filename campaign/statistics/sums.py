"""Weighted cross products of a mixed model, summed per specimen and per stratum.

The likelihood of a linear mixed model needs the data only through E' D^-r E, Z_i' D^-r E
and Z_i' D^-r Z_i (r = 1, 2, 3), with E = [X W y], W the stratum indicators, Z_i the random
columns of specimen i and D the variances of single readings. They are summed with
`bincount`; no stratum indicator and no n x n matrix is ever formed. Where all readings have
one variance sigma^2 the sums are made once and only scaled by sigma^(-2r), so that an
iteration costs nothing that grows with the number of readings.

[1] Pinheiro & Bates, Mixed-Effects Models in S and S-PLUS (2000), ch. 2 (orthogonal
    reduction to per-group statistics; here as cross products on centred data).
[2] Woodbury, Inverting Modified Matrices, Memorandum Report 42, Princeton (1950).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]
Codes = npt.NDArray[np.intp]


@dataclass(frozen=True)
class Grams:
    """Cross products with weights D^-r.

    zz (m, q, q), ze (m, q, f + 1), ee (f + 1, f + 1), total = sum of the weights;
    f = p + S columns of the fixed part, the last column of E being y.
    """

    zz: Array
    ze: Array
    ee: Array
    total: float

    def scaled(self, factor: float) -> Grams:
        """Return the cross products with all weights multiplied by `factor`."""
        return Grams(self.zz * factor, self.ze * factor, self.ee * factor, self.total * factor)


@dataclass(frozen=True)
class Data:
    """The readings of one model, coded and centred.

    columns (n, p + 1): X and y; z (n, q): random columns, the first all ones;
    specimen (n,), stratum (n,): codes from 0 without gaps; known (n,) or None: the part of
    each reading's variance that is given; m specimens, s strata (0: no stratum effects).
    """

    columns: Array
    z: Array
    specimen: Codes
    stratum: Codes
    known: Array | None
    m: int
    s: int

    @property
    def n(self) -> int:
        """Number of readings."""
        return int(self.columns.shape[0])

    @property
    def p(self) -> int:
        """Number of columns of X."""
        return int(self.columns.shape[1]) - 1

    @property
    def q(self) -> int:
        """Number of random columns."""
        return int(self.z.shape[1])


def grams(data: Data, weight: Array | None) -> Grams:
    """Return the cross products of `data` with `weight` (n,), or with unit weights.

    Work grows as n (p + q)^2, memory as n + m q (p + S).
    """
    m, q, p, s = data.m, data.q, data.p, data.s
    weighted = data.columns if weight is None else data.columns * weight[:, None]
    zw = data.z if weight is None else data.z * weight[:, None]
    zz = np.empty((m, q, q))
    ze = np.empty((m, q, p + s + 1))
    where = [*range(p), p + s]  # y comes last, after the strata
    cell = data.specimen * s + data.stratum if s else data.specimen
    for k in range(q):
        for j in range(k, q):
            total = np.bincount(data.specimen, zw[:, k] * data.z[:, j], m)
            zz[:, k, j] = zz[:, j, k] = total
        for j, at in enumerate(where):
            ze[:, k, at] = np.bincount(data.specimen, zw[:, k] * data.columns[:, j], m)
        if s:
            ze[:, k, p : p + s] = np.bincount(cell, zw[:, k], m * s).reshape(m, s)
    ee = np.zeros((p + s + 1, p + s + 1))
    ee[np.ix_(where, where)] = data.columns.T @ weighted
    per_stratum = ze[:, 0, p : p + s].sum(axis=0)
    if s:
        ee[range(p, p + s), range(p, p + s)] = per_stratum
        for j, at in enumerate(where):
            column = np.bincount(data.stratum, weighted[:, j], s)
            ee[at, p : p + s] = ee[p : p + s, at] = column
    return Grams(zz, ze, ee, float(data.n if weight is None else weight.sum()))
