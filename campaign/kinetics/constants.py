"""Physical constants.

[1] E. Tiesinga, P. J. Mohr, D. B. Newell, B. N. Taylor, CODATA recommended values of the
    fundamental physical constants: 2018, Rev. Mod. Phys. 93 (2021) 025010. Both values are
    exact products of defining constants of the SI.
"""

from __future__ import annotations

from typing import Final

GAS_CONSTANT: Final = 8.31446261815324
"""Molar gas constant R [J mol^-1 K^-1], [1]."""

FARADAY_CONSTANT: Final = 96485.33212331001
"""Faraday constant F [C mol^-1], [1]."""

ZERO_CELSIUS_K: Final = 273.15
"""The ice point [K], by definition of the degree Celsius."""


def thermal_voltage(temperature_K: float, charge: int = 1) -> float:
    """Return RT/zF [V] at `temperature_K` [K] for charge number `charge`."""
    return GAS_CONSTANT * temperature_K / (charge * FARADAY_CONSTANT)
