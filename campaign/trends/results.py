"""The estimates of each axis, as plain frozen records that turn into JSON.

Numbers are unrounded; what is not finite becomes None; an interval is [low, high] or None.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, fields, is_dataclass
from typing import Any

from campaign.trends.findings import Finding

Interval = tuple[float, float] | None


def ratio_of(log_ratio: float) -> float:
    """Return exp(log_ratio), infinite instead of an overflow."""
    return math.exp(log_ratio) if log_ratio < 700.0 else math.inf


def ratios_of(interval: Interval) -> Interval:
    """Return the interval of a ratio from that of its logarithm."""
    return None if interval is None else (ratio_of(interval[0]), ratio_of(interval[1]))


_ATOMS = frozenset((int, str, bool, type(None)))


def plain(value: object) -> Any:
    """Return `value` as JSON-ready Python: records as dicts, NaN and infinity as None."""
    if is_dataclass(value) and not isinstance(value, type):
        return {
            column.name: _field(column.name, plain(getattr(value, column.name)))
            for column in fields(value)
            if column.metadata.get("json", True)
        }
    if isinstance(value, Mapping):
        return {str(key): plain(item) for key, item in value.items()}
    if isinstance(value, (tuple, list)):
        return [item if type(item) in _ATOMS else plain(item) for item in value]
    if hasattr(value, "tolist"):
        return plain(value.tolist())
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    return value


def _field(name: str, value: Any) -> Any:
    """Return an interval without a finite end as None, anything else as it is."""
    if name.endswith("ci") and isinstance(value, list) and None in value:
        return None
    return value


class Record:
    """A frozen record with the JSON keys of the fixed interface."""

    def as_dict(self) -> dict[str, Any]:
        """Return the record as JSON-ready keys and values."""
        converted: dict[str, Any] = plain(self)
        return converted


@dataclass(frozen=True)
class LeftOut(Record):
    """What was left out and why: `count` measurements, or a whole series."""

    reason: str
    count: int
    electrode: str = ""
    salt: str = ""
    solvents: str = ""
    additives: str = ""


@dataclass(frozen=True)
class Adjusted(Record):
    """The same estimate with age or date held, beside a confounding warning."""

    for_what: str
    value: float
    ci: Interval


@dataclass(frozen=True)
class Outlier(Record):
    """A studentised residual beyond the bound: shown, never dropped.

    kind: 'specimen' or 'reading'; measurement: record number of a reading, else None.
    """

    kind: str
    specimen: str
    measurement: int | None
    residual: float


@dataclass(frozen=True)
class LevelRatio(Record):
    """Ratio of the response at two levels [1], a over b, with its 95 % interval."""

    a: str
    b: str
    ratio: float
    ratio_ci: Interval


@dataclass(frozen=True, kw_only=True)
class SeriesEstimate(Record):
    """What every estimate of one series carries.

    rows: record numbers of the measurements used. flagged_se: values whose standard error
    was taken from the electrode's median. apparent: the same with R_ct of a porous electrode
    as it appears. sigma_between, sigma_within [1], of ln R.
    """

    electrode: str
    salt: str = ""
    solvents: str = ""
    additives: str = ""
    basis: str = ""
    df: float = math.nan
    n_specimens: int = 0
    n_measurements: int = 0
    sigma_between: float = math.nan
    sigma_within: float = math.nan
    decision: str | None = "open"
    warnings: tuple[str, ...] = ()
    flagged_se: int = 0
    left_out: tuple[LeftOut, ...] = ()
    rows: tuple[int, ...] = ()
    adjusted: Adjusted | None = None
    apparent: Adjusted | None = None
    outliers: tuple[Outlier, ...] = ()
    finding: Finding | None = field(default=None, metadata={"json": False})


@dataclass(frozen=True, kw_only=True)
class OrderEstimate(SeriesEstimate):
    """Reaction order m = -d ln R / d ln c [1] of one salt in one blend."""

    order: float
    order_ci: Interval
    levels: tuple[float, ...] = ()
    ratios: tuple[LevelRatio, ...] = ()
    in_activity: bool = False


@dataclass(frozen=True, kw_only=True)
class RatioEstimate(SeriesEstimate):
    """Ratio R(a)/R(b) [1] of two solvents or additives; interval simultaneous over pairs."""

    a: str
    b: str
    ratio: float
    ratio_ci: Interval


@dataclass(frozen=True, kw_only=True)
class DonorEstimate(SeriesEstimate):
    """Change of ln R per unit of donor number [mol/kcal] over the solvents."""

    slope: float
    slope_ci: Interval
    donor_numbers: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True, kw_only=True)
class BarrierEstimate(SeriesEstimate):
    """Arrhenius barriers [kJ/mol]: of ln R, and of ln(R/T), which is about RT higher.

    sigma_between here is the spread of barriers between specimens [kJ/mol].
    """

    Ea_kJ_mol: float
    Ea_ci: Interval
    Ea_lnRT_kJ_mol: float
    Ea_lnRT_ci: Interval


@dataclass(frozen=True, kw_only=True)
class BarrierDifference(Record):
    """Difference of barriers a - b [kJ/mol] (form ln R), interval simultaneous over the pairs.

    compared: the recipe column that differs (solvents or additives)."""

    electrode: str
    compared: str
    a: str
    b: str
    difference_kJ_mol: float
    difference_ci: Interval
    df: float
    n_specimens: int
    decision: str
    warnings: tuple[str, ...] = ()


@dataclass(frozen=True, kw_only=True)
class PotentialEstimate(SeriesEstimate):
    """Law over the potential; span is the largest ratio of two level means [1].

    E0_V [V against `reference`] and g [1] where the law is a valley.
    """

    law: str
    span: float
    span_ci: Interval
    E0_V: float | None = None
    E0_ci: Interval = None
    g: float | None = None
    g_ci: Interval = None
    slope_per_V: float | None = None
    slope_ci: Interval = None
    window_V: float = math.nan
    reference: str = ""
    aicc: Mapping[str, float] = field(default_factory=dict)
    levels: tuple[float, ...] = ()


@dataclass(frozen=True, kw_only=True)
class AgeEstimate(SeriesEstimate):
    """Drift of R over the campaign: ratio [1] of the response at the greatest age to new.

    law: 'log-linear' (ln R against age [d]) or 'square-root' (R_sl against sqrt age).
    """

    law: str
    drift: float
    drift_ci: Interval
    rate: float
    rate_ci: Interval
    rate_unit: str
    age_span_d: float


@dataclass(frozen=True)
class AxisResult(Record):
    """All estimates of one axis of one response."""

    axis: str
    response: str
    unit: str
    estimates: tuple[SeriesEstimate, ...] = ()
    differences: tuple[BarrierDifference, ...] = ()
    left_out: tuple[LeftOut, ...] = ()
    warnings: tuple[str, ...] = ()
    donor: tuple[DonorEstimate, ...] = ()


def decision_text(finding: Finding, alpha: float) -> str:
    """Return the decision of a finding with the reason that holds it open, if one does."""
    decision = finding.decision(alpha)
    if finding.open_because is not None:
        return f"open: {finding.open_because}"
    return str(decision)
