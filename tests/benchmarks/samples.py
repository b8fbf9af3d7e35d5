"""The mean largest eigenvalue over Bures, N = 3, by `average` to 1e-6 and by 10^7 samples.

Run with ``python tests/benchmarks/samples.py [SAMPLES]``; the exit status is 1 where they differ by more than four
standard errors and the stated error.
"""

from __future__ import annotations

import math
import sys
import time

import numpy as np

from simplexcub.average.expression import parse_expression
from simplexcub.average.mean import average
from simplexcub.measures import bures

BATCH = 100_000


def main(samples: int) -> int:
    measure = bures(3)
    f = parse_expression("max(x)", measure)
    start = time.perf_counter()
    found = average(f, measure, tol=1e-6)
    quick = time.perf_counter() - start
    rng = np.random.default_rng(2026)
    start = time.perf_counter()
    values = np.concatenate([f(measure.sample(rng, BATCH)) for _ in range(samples // BATCH)])
    slow = time.perf_counter() - start
    error = float(values.std() / math.sqrt(len(values)))
    gap = abs(found.value - float(values.mean()))
    print(f"average {found.value:.9f}, stated error {found.error:.1e}, {found.evaluations} evaluations")
    print(f"samples {values.mean():.9f}, standard error {error:.1e}, {len(values)} samples")
    print(f"the samples took {slow / quick:.3g} times longer")
    print(f"they differ by {gap / error:.2f} standard errors")
    return int(gap > 4 * error + found.error)


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]) if len(sys.argv) > 1 else 10_000_000))
