"""Preparing a mixed model: codes, centring, and what the design can tell.

Strata are centred out of y and X, everything is scaled to order one, and columns that do not
vary within strata are found before any fit.

[1] Frisch & Waugh, Econometrica 1 (1933) 387: centring within strata leaves beta unchanged.
[2] Henderson, Biometrics 9 (1953) 226, method 3: rank([F Z]) - rank(F) degrees of freedom
    between specimens.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from campaign.statistics.sums import Array, Codes, Data, Grams

_ALIASED = 1e-8
_NULL = 1e-9


class NoContrast(ValueError):
    """What was asked for does not vary within any stratum; there is nothing to estimate."""


@dataclass(frozen=True)
class Term:
    """What the design says about one random column, whatever the readings are.

    df: degrees of freedom between specimens left by the fixed effects [2]; 0: the variance
    cannot be estimated. null (f, r): directions of the fixed effects that do not vary within
    specimens in this column.
    """

    df: int
    null: Array

    def holds(self, direction: Array) -> bool:
        """Whether the contrast cannot be seen within specimens alone."""
        seen = np.abs(self.null.T @ direction).max(initial=0.0)
        return bool(seen > 1e-6 * np.abs(direction).max(initial=0.0))


@dataclass(frozen=True)
class Design:
    """Coded, centred, scaled readings and the way back.

    coefficients of the fit (X columns, then strata) become those of the user by
    offset + jacobian @ coefficients; scale: unit of y; slope_units (q - 1,).
    """

    data: Data
    offset: Array
    jacobian: Array
    scale: float
    slope_units: Array


def prepare(
    y: npt.ArrayLike,
    x: npt.ArrayLike,
    specimen: npt.ArrayLike,
    stratum: npt.ArrayLike | None,
    known: npt.ArrayLike | None,
    slopes: npt.ArrayLike | None,
) -> Design:
    """Check and code the readings. Raises NoContrast for aliased columns, ValueError else."""
    response = _finite("y", y, None)
    n = response.size
    columns = _finite("X", x, n)
    of_specimen = _codes("specimen", specimen, n)
    if n == 0:
        raise NoContrast("no readings")
    if not columns.shape[1]:
        raise NoContrast("no column to estimate")
    s = 0
    of_stratum = np.zeros(n, dtype=np.intp)
    if stratum is not None:
        of_stratum = _codes("stratum", stratum, n)
        s = int(of_stratum.max()) + 1
    centred, means = _centre(columns, of_stratum, s)
    _refuse_aliased(columns, centred)
    y_centred, y_means = _centre(response[:, None], of_stratum, s)
    first = np.linalg.lstsq(centred, y_centred[:, 0], rcond=None)[0]
    rest = y_centred[:, 0] - centred @ first
    spread = float(np.sqrt(np.mean(rest**2)))
    size = float(np.abs(response).max())
    scale = max(spread, 1e-12 * size) or 1.0
    units = np.sqrt(np.mean(centred**2, axis=0))
    z, slope_units = _random_columns(slopes, n)
    data = Data(
        np.column_stack([centred / units, rest / scale]), z, of_specimen, of_stratum,
        _known(known, n, scale), int(of_specimen.max()) + 1, s,
    )  # fmt: skip
    p = columns.shape[1]
    jacobian = np.zeros((p + s, p + s))
    jacobian[:p, :p] = np.diag(scale / units)
    jacobian[p:, :p] = -means * (scale / units)
    jacobian[p:, p:] = scale * np.eye(s)
    offset = np.concatenate([first, y_means[:, 0] - means @ first])
    return Design(data, offset, jacobian, scale, slope_units)


def terms(data: Data, unit: Grams) -> tuple[Term, ...]:
    """Return one `Term` per random column, then one for all of them together.

    unit: the cross products with unit weights.
    """
    f = unit.ee.shape[0] - 1
    fixed = unit.ee[:f, :f]
    found = []
    for columns in [[k] for k in range(data.q)] + [list(range(data.q))]:
        zz = unit.zz[:, columns][:, :, columns]
        ze = unit.ze[:, columns, :f]
        inverse = np.linalg.pinv(zz, rcond=1e-10, hermitian=True)
        inside = fixed - ze.reshape(-1, f).T @ (inverse @ ze).reshape(-1, f)
        unit_f = 1.0 / np.sqrt(fixed.diagonal())
        values, vectors = np.linalg.eigh(inside * unit_f[:, None] * unit_f)
        lost = values < _NULL * max(float(values[-1]), 1.0)
        rank = int(np.linalg.matrix_rank(zz, tol=1e-10, hermitian=True).sum())
        null = unit_f[:, None] * vectors[:, lost]
        found.append(Term(rank - int(lost.sum()), null))
    return tuple(found)


def _finite(name: str, values: npt.ArrayLike, n: int | None) -> Array:
    array = np.asarray(values, dtype=float)
    if name == "X" and array.ndim == 1:
        array = array[:, None]
    if array.ndim != (2 if name in ("X", "slopes") else 1) or (n is not None and len(array) != n):
        raise ValueError(f"{name} has shape {array.shape}; expected {n} rows")
    if not np.isfinite(array).all():
        raise ValueError(f"{name} holds values that are not finite")
    return array


def _codes(name: str, values: npt.ArrayLike, n: int) -> Codes:
    array = np.asarray(values)
    if array.shape != (n,):
        raise ValueError(f"{name} has shape {array.shape}; expected ({n},)")
    return np.unique(array, return_inverse=True)[1].astype(np.intp)


def _centre(columns: Array, stratum: Codes, s: int) -> tuple[Array, Array]:
    """Return the columns less their stratum means, and the means (s, k)."""
    if not s:
        return columns, np.zeros((0, columns.shape[1]))
    count = np.bincount(stratum, minlength=s)
    means = np.column_stack([np.bincount(stratum, column, s) / count for column in columns.T])
    return columns - means[stratum], means


def _refuse_aliased(columns: Array, centred: Array) -> None:
    p = columns.shape[1]
    left = np.sqrt(np.sum(centred**2, axis=0))
    flat = left <= _ALIASED * np.sqrt(np.sum(columns**2, axis=0))
    if flat.any():
        at = int(np.flatnonzero(flat)[0])
        raise NoContrast(f"column {at + 1} of X does not vary within any stratum")
    triangle: Array = np.linalg.qr(centred / left, mode="r")  # type: ignore[assignment]
    if triangle.shape[0] < p or np.abs(np.diag(triangle)).min() < _ALIASED:
        raise NoContrast("the columns of X cannot be told apart within the strata")


def _random_columns(slopes: npt.ArrayLike | None, n: int) -> tuple[Array, Array]:
    if slopes is None:
        return np.ones((n, 1)), np.ones(0)
    array = np.asarray(slopes, dtype=float)
    array = _finite("slopes", array[:, None] if array.ndim == 1 else array, n)
    units = np.sqrt(np.mean(array**2, axis=0))
    if (units == 0).any():
        raise NoContrast("a column of random slopes is zero throughout")
    return np.column_stack([np.ones(n), array / units]), units


def _known(known: npt.ArrayLike | None, n: int, scale: float) -> Array | None:
    if known is None:
        return None
    array = _finite("known", known, n)
    if (array < 0).any():
        raise ValueError("known variances hold a negative value")
    return array / scale**2 if (array > 0).any() else None
