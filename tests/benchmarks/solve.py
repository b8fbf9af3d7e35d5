"""Converged inside rules per second: the batched solver against scipy's least squares from the same random starts.

Same equations, same starts, one process, one thread. Run by hand:

    OMP_NUM_THREADS=1 python tests/benchmarks/solve.py
"""

from __future__ import annotations

import time

import numpy as np
from scipy.optimize import least_squares

import simplexcub as sc
from simplexcub.search.levenberg import solve_batch
from simplexcub.search.orbits import system_for

CASES = [
    (sc.flat(3), 7, (((2, 1), 3), ((1, 1, 1), 1))),
    (sc.hilbert_schmidt(3), 8, (((2, 1), 2), ((1, 1, 1), 2))),
    (sc.flat(3), 12, (((2, 1), 5), ((1, 1, 1), 3))),
    (sc.flat(4), 6, (((3, 1), 3), ((2, 1, 1), 1))),
    (sc.flat(4), 8, (((3, 1), 4), ((2, 2), 1), ((2, 1, 1), 2))),
]
BATCHED_STARTS, PLAIN_STARTS = 2000, 100


def batched(system, starts):
    begin = time.perf_counter()
    found = sum(len(solve_batch(system, starts[i : i + 200].copy())) for i in range(0, len(starts), 200))
    return found, time.perf_counter() - begin


def plain(system, starts):
    begin = time.perf_counter()
    found = 0
    last = {}  # scipy asks for residual and Jacobian apart; both come from one evaluation

    def evaluate(v):
        if not np.array_equal(last.get("v"), v):
            residual, jacobian = system.evaluate(v[None])
            last.update(v=v.copy(), residual=residual[0], jacobian=jacobian[0])
        return last

    for u in starts:
        result = least_squares(
            lambda v: evaluate(v)["residual"],
            u,
            jac=lambda v: evaluate(v)["jacobian"],
            method="lm" if len(system.basis) >= system.size else "trf",
            xtol=1e-15,
            ftol=1e-15,
            gtol=1e-15,
            max_nfev=120,  # the batched solver's own limit
        )
        slack = system.slack_matrix @ result.x + system.slack_offset
        found += bool(np.linalg.norm(result.fun) < 1e-12 and slack.min() > 0)
    return found, time.perf_counter() - begin


def main():
    print("inside rules found / starts, and found per second: batched, then scipy")
    for measure, degree, counts in CASES:
        system = system_for(measure, degree, counts)
        starts = system.starts(np.random.default_rng(0), BATCHED_STARTS)
        a, s = batched(system, starts)
        b, r = plain(system, starts[:PLAIN_STARTS])
        ratio = f"{(a / s) / (b / r):6.0f}x" if b else "  (scipy found none)"
        ours, theirs = f"{a:5d}/{len(starts)} {a / s:9.1f}/s", f"{b:4d}/{PLAIN_STARTS} {b / r:7.2f}/s"
        print(f"{measure!s:28s} t={degree:2d}  {ours}  {theirs}  {ratio}")


if __name__ == "__main__":
    main()
