"""The exact interval of a proportion, for measured coverages."""

from __future__ import annotations


def exact_interval(hits: int, trials: int, level: float = 0.95) -> tuple[float, float]:
    """Return the exact interval of the probability behind `hits` of `trials` [1, 2].

    Beta quantiles: low = B(a/2; h, n - h + 1), high = B(1 - a/2; h + 1, n - h), a = 1 - level.
    Raises ValueError unless 0 <= hits <= trials and trials > 0.

    [1] Clopper & Pearson, Biometrika 26 (1934) 404.
    [2] NIST/SEMATECH e-Handbook of Statistical Methods, sec. 7.2.4.1 (confidence intervals of a
        proportion).
    """
    from scipy.special import betaincinv

    if not 0 <= hits <= trials or trials <= 0:
        raise ValueError(f"{hits} of {trials} is no proportion")
    tail = (1 - level) / 2
    low = 0.0 if hits == 0 else float(betaincinv(hits, trials - hits + 1, tail))
    high = 1.0 if hits == trials else float(betaincinv(hits + 1, trials - hits, 1 - tail))
    return low, high
