"""REML and ML log-likelihood of a linear mixed model, its score and its information.

Model: y = X beta + W alpha + Z u + e, u_ik ~ N(0, g_k) independent, Var(e_j) = sigma^2 + known_j,
so V = D + sum_k g_k Z_k Z_k'. Parameters theta = (sigma^2, g_1 .. g_q).

With F = [X W], C = (F' V^-1 F)^-1 and P = V^-1 - V^-1 F C F' V^-1:

    REML  l = -1/2 [ (n - f) ln 2 pi + ln|V| + ln|F' V^-1 F| + y' P y ]                    [1]
    dl/dtheta_k = 1/2 [ y' P V_k P y - tr(P V_k) ]                                         [1]
    expected information I_kl = 1/2 tr(P V_k P V_l)                                        [1]

(ML: V^-1 for P in the traces and no determinant of F' V^-1 F.) Every trace is reduced to the
per-specimen sums of `sums` by V_i^-1 = D^-1 - D^-1 Z L (1 + L A L)^-1 L Z' D^-1, L = diag(g)^1/2,
A = Z' D^-1 Z, which holds with variances at exactly zero [2].

[1] Patterson & Thompson, Biometrika 58 (1971) 545; Harville, J. Am. Stat. Assoc. 72 (1977) 320;
    Pinheiro & Bates, Mixed-Effects Models in S and S-PLUS (2000), ch. 2.
[2] Woodbury, Memorandum Report 42, Princeton (1950).
[3] Gilmour, Thompson & Cullis, Biometrics 51 (1995) 1440: average information.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from campaign.statistics.sums import Array, Data, Grams, grams


@dataclass(frozen=True)
class Point:
    """The likelihood at one theta, with what later steps reuse.

    loglik; beta (f,) and cov (f, f) of all fixed effects (X, then strata);
    score (1 + q,) and information (1 + q, 1 + q), expected;
    with E = [F y]: ev2e, ev3e (f + 1, f + 1) = E' V^-2 E, E' V^-3 E; ze1, ze2 (m, q, f + 1) =
    Z' V^-1 E, Z' V^-2 E; zpy (m, q) = Z' P y; zvz (m, q, q) = Z' V^-1 Z;
    inner (m, q, q) = the T of V^-1 = D^-1 - D^-1 Z T Z' D^-1;
    first: the sums with weights D^-1.
    """

    theta: Array
    loglik: float
    beta: Array
    cov: Array
    score: Array
    information: Array
    ev2e: Array
    ev3e: Array
    ze1: Array
    ze2: Array
    zpy: Array
    zvz: Array
    inner: Array
    first: Grams

    @property
    def average(self) -> Array:
        """Return the average information 1/2 y' P V_k P V_l P y, (1 + q, 1 + q) [3]."""
        return 0.5 * self.forms(np.append(-self.beta, 1.0))

    def forms(self, r: Array) -> Array:
        """Return a' V_k P V_l a, (1 + q, 1 + q), for a = V^-1 E r."""
        f = self.beta.size
        seen = self.ze1 @ r  # Z_k' a, so that V_k a = Z_k seen_k
        q = seen.shape[1]
        back = np.einsum("ik,ikf->kf", seen, self.ze1[..., :f])
        second = self.ev2e[:f] @ r
        found = np.empty((1 + q, 1 + q))
        found[0, 0] = r @ self.ev3e @ r - second @ self.cov @ second
        across = (seen * (self.ze2 @ r)).sum(axis=0)
        found[0, 1:] = found[1:, 0] = across - back @ self.cov @ second
        found[1:, 1:] = np.einsum("ik,ikl,il->kl", seen, self.zvz, seen)
        found[1:, 1:] -= back @ self.cov @ back.T
        return found


@dataclass(frozen=True)
class Likelihood:
    """The log-likelihood of `data` as a function of theta; `reml` or plain ML."""

    data: Data
    base: Grams | None
    reml: bool

    @classmethod
    def of(cls, data: Data, reml: bool) -> Likelihood:
        """Prepare the sums once where they do not depend on theta."""
        return cls(data, grams(data, None) if data.known is None else None, reml)

    def sums(self, variance: float) -> tuple[tuple[Grams, Grams, Grams], float]:
        """Return the sums with weights D^-1, D^-2, D^-3 and ln|D| at sigma^2 = `variance`."""
        if self.base is not None:
            powers = [self.base.scaled(variance**-r) for r in (1, 2, 3)]
            return (powers[0], powers[1], powers[2]), self.data.n * math.log(variance)
        assert self.data.known is not None
        weight = 1.0 / (variance + self.data.known)
        powers = [grams(self.data, weight**r) for r in (1, 2, 3)]
        return (powers[0], powers[1], powers[2]), -float(np.log(weight).sum())

    def at(self, theta: Array) -> Point:
        """Evaluate at theta = (sigma^2 > 0, g_k >= 0). Raises LinAlgError if F is deficient."""
        (one, two, three), logdet = self.sums(float(theta[0]))
        m, q = self.data.m, self.data.q
        f = one.ee.shape[0] - 1
        root = np.sqrt(theta[1:])
        inverse, logdet_z = _inverse(np.eye(q) + root[:, None] * one.zz * root)
        inner = root[:, None] * inverse * root
        tr = inner @ one.ze
        rz_all = one.ze - one.zz @ tr
        flat = m * q
        eve = one.ee - one.ze.reshape(flat, f + 1).T @ tr.reshape(flat, f + 1)
        cov, logdet_f = _spd_inverse(eve[:f, :f])
        beta = cov @ eve[:f, f]
        quadratic = float(eve[f, f] - beta @ eve[:f, f])
        residual = np.append(-beta, 1.0)
        zpy = rz_all @ residual
        spread_all = _second(one, two, inner, tr)
        n = self.data.n
        value = n * math.log(2 * math.pi) + logdet + logdet_z + quadratic
        if self.reml:
            value += logdet_f - f * math.log(2 * math.pi)
        zvz = one.zz - one.zz @ inner @ one.zz
        left = np.eye(q) - one.zz @ inner
        zb = two.ze - two.zz @ tr
        third_all = _third(three, inner, tr, zb)
        pieces = _Pieces(
            inner, rz_all[..., :f], (left @ zb)[..., :f], zvz, spread_all[:f, :f],
            third_all[:f, :f], cov,
        )  # fmt: skip
        traces, information = pieces.moments(one, two, three, left, self.reml)
        squares = np.empty(1 + q)
        squares[0] = residual @ spread_all @ residual
        squares[1:] = (zpy**2).sum(axis=0)
        return Point(
            theta, -0.5 * value, beta, cov, 0.5 * (squares - traces), information,
            spread_all, third_all, rz_all, left @ zb, zpy, zvz, inner, one,
        )  # fmt: skip


def _inverse(blocks: Array) -> tuple[Array, float]:
    """Return the inverses of (m, q, q) positive blocks and the sum of their ln determinants."""
    if blocks.shape[1] == 1:
        return 1.0 / blocks, float(np.log(blocks).sum())
    inverse = np.asarray(np.linalg.inv(blocks), dtype=np.float64)
    return inverse, float(np.linalg.slogdet(blocks)[1].sum())


def _spd_inverse(matrix: Array) -> tuple[Array, float]:
    """Return the inverse and ln determinant of a symmetric positive matrix, scaled first."""
    if not (matrix.diagonal() > 0).all():
        raise np.linalg.LinAlgError("not positive definite")
    scale: Array = 1.0 / np.sqrt(matrix.diagonal())
    factor = np.asarray(np.linalg.cholesky(scale[:, None] * matrix * scale), dtype=np.float64)
    half = np.asarray(np.linalg.inv(factor), dtype=np.float64) * scale
    return half.T @ half, float(2 * (np.log(factor.diagonal()) - np.log(scale)).sum())


def _second(one: Grams, two: Grams, inner: Array, tr: Array) -> Array:
    """Return E' V^-2 E from the sums."""
    flat = tr.shape[0] * tr.shape[1]
    t = tr.reshape(flat, -1)
    cross = t.T @ two.ze.reshape(flat, -1)
    return two.ee - cross - cross.T + t.T @ (two.zz @ tr).reshape(flat, -1)


def _third(three: Grams, inner: Array, tr: Array, zb: Array) -> Array:
    """Return E' V^-3 E; zb (m, q, f + 1) = Z' D^-1 V^-1 E."""
    f = tr.shape[2]
    t, b = tr.reshape(-1, f), zb.reshape(-1, f)
    cross = t.T @ three.ze.reshape(-1, f)
    whole = three.ee - cross - cross.T + t.T @ (three.zz @ tr).reshape(-1, f)
    third: Array = whole - b.T @ (inner @ zb).reshape(-1, f)
    return third


@dataclass(frozen=True)
class _Pieces:
    """Blocks shared by the traces, of the fixed effects F alone.

    rz, rz2 (m, q, f) = Z' V^-1 F, Z' V^-2 F; spread, third (f, f) = F' V^-2 F, F' V^-3 F.
    """

    inner: Array
    rz: Array
    rz2: Array
    zvz: Array
    spread: Array
    third: Array
    cov: Array

    def moments(
        self, one: Grams, two: Grams, three: Grams, left: Array, reml: bool
    ) -> tuple[Array, Array]:
        """Return tr(P V_k), (1 + q,), and 1/2 tr(P V_k P V_l); left = 1 - A T."""
        q = self.zvz.shape[1]
        traces = np.empty(1 + q)
        info = np.empty((1 + q, 1 + q))
        across = two.zz @ self.inner
        traces[0] = one.total - float(np.einsum("iab,iba->", two.zz, self.inner))
        traces[1:] = np.einsum("ikk->k", self.zvz)
        info[0, 0] = (
            two.total
            - 2 * float(np.einsum("iab,iba->", three.zz, self.inner))
            + float(np.einsum("iab,iba->", across, across))
        )
        info[0, 1:] = np.einsum("ikk->k", left @ two.zz @ left.transpose(0, 2, 1))
        info[1:, 1:] = (self.zvz**2).sum(axis=0)
        if reml:
            self._subtract(traces, info)
        info[1:, 0] = info[0, 1:]
        return traces, 0.5 * info

    def _subtract(self, traces: Array, info: Array) -> None:
        """Take the fixed effects out of the traces: V^-1 becomes P."""
        cs = self.cov @ self.spread
        traces[0] -= float(cs.trace())
        info[0, 0] += float((cs * cs.T).sum()) - 2 * float((self.cov * self.third).sum())
        cg = []
        for k in range(self.zvz.shape[1]):
            rk = self.rz[:, k, :]
            ck = rk @ self.cov
            cg.append(self.cov @ (rk.T @ rk))
            traces[1 + k] -= float((ck * rk).sum())
            info[0, 1 + k] += float((cs * cg[k].T).sum())
            info[0, 1 + k] -= 2 * float((self.rz2[:, k, :] * ck).sum())
            for j in range(k + 1):
                shared = (ck * self.rz[:, j, :]).sum(axis=1)
                change = float((cg[k] * cg[j].T).sum()) - 2 * float(self.zvz[:, k, j] @ shared)
                info[1 + k, 1 + j] += change
                if j != k:
                    info[1 + j, 1 + k] = info[1 + k, 1 + j]
