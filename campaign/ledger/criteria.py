"""The stated thresholds a decision uses, with their defaults and allowed ranges."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Criteria:
    """Thresholds of one campaign.

    order_margin [1]; ratio_margin [factor]; barrier_margin_kJ_mol [kJ/mol];
    error_probability: two-sided, of a decision; potential_window_V [V]: the least window a
    potential decision needs; temperature_tolerance_K [K] and potential_tolerance_V [V] match
    conditions; working_time_s [s] of the budget; confounding_r [1];
    heterogeneity_p: below it strata on different sides of a margin leave a decision open.
    """

    order_margin: float = 0.15
    ratio_margin: float = 1.5
    barrier_margin_kJ_mol: float = 8.0
    error_probability: float = 0.05
    potential_window_V: float = 0.1
    temperature_tolerance_K: float = 1.0
    potential_tolerance_V: float = 0.005
    content_tolerance: float = 0.02
    working_time_s: float = 10.0
    confounding_r: float = 0.7
    heterogeneity_p: float = 0.01


LIMITS: dict[str, tuple[float, float]] = {
    "order_margin": (0.0, 2.0),
    "ratio_margin": (1.0, 100.0),
    "barrier_margin_kJ_mol": (0.0, 200.0),
    "error_probability": (0.0001, 0.5),
    "potential_window_V": (0.0, 10.0),
    "temperature_tolerance_K": (0.0, 50.0),
    "potential_tolerance_V": (0.0, 1.0),
    "content_tolerance": (0.0, 1.0),
    "working_time_s": (1e-6, 1e9),
    "confounding_r": (0.0, 1.0),
    "heterogeneity_p": (0.0, 1.0),
}
