"""Information criteria for laws fitted by maximum likelihood."""

from __future__ import annotations

import math


def aicc(loglik: float, parameters: int, n: int) -> float:
    """Return the corrected Akaike criterion -2 l + 2 k + 2 k (k + 1)/(n - k - 1) [1, 2].

    n is the number of independent units: the specimens where readings of one specimen repeat
    each other. Infinite where n <= k + 1: such a fit is saturated and cannot be compared.

    [1] Hurvich & Tsai, Biometrika 76 (1989) 297.
    [2] Burnham & Anderson, Model Selection and Multimodel Inference (2002), sec. 2.4.
    """
    spare = n - parameters - 1
    if spare <= 0:
        return math.inf
    return -2 * loglik + 2 * parameters + 2 * parameters * (parameters + 1) / spare
