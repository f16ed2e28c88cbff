"""Speed of the mixed model beside statsmodels' MixedLM, and the agreement of both.

16 specimens x 60 readings x 15 strata, one seed, both timed in one run:

    python tests/benchmarks/mixed_model.py
"""

from __future__ import annotations

import os
import statistics
import time
import warnings
from collections.abc import Callable

# one thread for both: small matrices only lose time to a thread pool
for _variable in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(_variable, "1")

import numpy as np  # noqa: E402
from statsmodels.regression.mixed_linear_model import MixedLM  # noqa: E402

from campaign.statistics.mixed import fit_mixed  # noqa: E402

SEED = 20240611
SPECIMENS, READINGS, STRATA = 16, 60, 15


def campaign(seed: int):
    """Return y, x, specimen, stratum of one simulated campaign."""
    rng = np.random.default_rng(seed)
    n = SPECIMENS * READINGS
    specimen = np.repeat(np.arange(SPECIMENS), READINGS)
    stratum = np.tile(np.arange(STRATA), n // STRATA)
    x = np.log([0.25, 0.5, 1.0, 2.0])[specimen % 4]
    y = -0.5 * x + rng.normal(0, 0.15, SPECIMENS)[specimen] + rng.normal(0, 0.04, n)
    return y + rng.normal(0, 1, STRATA)[stratum], x, specimen, stratum, rng.uniform(0.02, 0.06, n)


def median_time(call: Callable[[], object], repeats: int) -> float:
    """Return the median time of one call [s], after one to warm up."""
    call()
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        call()
        times.append(time.perf_counter() - start)
    return statistics.median(times)


def main() -> None:
    """Print times, ratios and differences."""
    warnings.simplefilter("ignore")
    y, x, specimen, stratum, se = campaign(SEED)
    design = np.column_stack([x, stratum[:, None] == np.arange(STRATA)]).astype(float)

    def other(**more: object):
        return MixedLM(y, design, specimen).fit(reml=True, **more)

    own = median_time(lambda: fit_mixed(y, x, specimen, stratum).contrast([1.0]), 200)
    print(f"{SPECIMENS} specimens x {READINGS} readings x {STRATA} strata, seed {SEED}")
    print(f"{'fit':44s} {'time':>10s} {'ratio':>7s}")
    print(f"{'campaign, REML with Satterthwaite':44s} {1e3 * own:7.2f} ms {1:7.1f}")
    known = median_time(lambda: fit_mixed(y, x, specimen, stratum, se**2).contrast([1.0]), 50)
    print(
        f"{'campaign, with a known error a reading':44s} {1e3 * known:7.2f} ms {known / own:7.1f}"
    )
    for name, options in (
        ("statsmodels MixedLM, as it comes", {}),
        ("statsmodels MixedLM, Powell to 1e-14", {"method": "powell", "ftol": 1e-14}),
    ):
        taken = median_time(lambda options=options: other(**options), 11)
        print(f"{name:44s} {1e3 * taken:7.2f} ms {taken / own:7.1f}")
    fit, reference = fit_mixed(y, x, specimen, stratum), other(method="powell", ftol=1e-14)
    order = fit.contrast([1.0])
    pairs = {
        "slope": (order.value, reference.params[0]),
        "standard error": (order.se, reference.bse[0]),
        "sigma_between": (fit.sigma_between, float(np.asarray(reference.cov_re)[0, 0]) ** 0.5),
        "sigma_within": (fit.sigma_within, reference.scale**0.5),
    }
    print(f"\n{'':18s} {'campaign':>14s} {'statsmodels':>14s} {'relative':>10s}")
    for name, (a, b) in pairs.items():
        print(f"{name:18s} {a:14.9f} {b:14.9f} {abs(a - b) / abs(b):10.1e}")
    rng = np.random.default_rng(SEED)
    n = 1_000_000
    many = np.arange(n) % 40
    strata = rng.integers(0, 60, n)
    x = (many % 4).astype(float)
    y = 0.5 * x + rng.normal(0, 0.15, 40)[many] + rng.normal(0, 0.04, n)
    large = median_time(lambda: fit_mixed(y, x, many, strata), 3)
    heavy = median_time(lambda: fit_mixed(y, x, many, strata, np.full(n, 1e-3)), 1)
    print(
        f"\n{n} readings, 40 specimens, 60 strata: {large:.2f} s; with known errors {heavy:.2f} s"
    )


if __name__ == "__main__":
    main()
