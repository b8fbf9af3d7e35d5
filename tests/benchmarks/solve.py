"""Converged inside rules per second: the batched solver against scipy's least squares from the same random starts.

Then the yield per start with and without the scaling of steps, and how the time of a whole search grows with degree.
Same equations, same starts, one process, one thread. Run by hand, all of it or some of its parts:

    OMP_NUM_THREADS=1 python tests/benchmarks/solve.py [speed] [yield] [growth]
"""

from __future__ import annotations

import sys
import time
from unittest import mock

import numpy as np
from scipy.optimize import least_squares

import simplexcub as sc
from simplexcub.search.levenberg import solve_batch
from simplexcub.search.system import Problem, System
from simplexcub.symmetry import named_group

# Measure, symmetry, degree, and orbits by (nodes of the orbit, how many).
CASES = [
    (sc.flat(3), "full", 7, {3: 3, 6: 1}),
    (sc.hilbert_schmidt(3), "full", 8, {3: 2, 6: 2}),
    (sc.flat(3), "full", 12, {3: 5, 6: 3}),
    (sc.flat(4), "full", 6, {4: 3, 12: 1}),
    (sc.flat(4), "full", 8, {4: 4, 6: 1, 12: 2}),
    (sc.flat(3), "cyclic", 7, {3: 4}),
    (sc.flat(3), "none", 6, {1: 11}),
    (sc.flat(4), "none", 4, {1: 11}),
]
BATCHED_STARTS, PLAIN_STARTS = 2000, 100
DEGREES = range(1, 21)
BUDGET = 60.0  # seconds for each degree


def system_of(measure, symmetry, degree, orbits):
    group = named_group(symmetry, measure.N)
    counts = tuple((t, orbits[t.size]) for t in group.types if t.size in orbits)
    return System(Problem(measure, degree, group), counts)


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


def heading(measure, symmetry, degree):
    return f"{measure!s:26s} {symmetry:6s} t={degree:2d}"


def speed():
    print("inside rules found / starts, and found per second: batched, then scipy")
    for case in CASES:
        system = system_of(*case)
        starts = system.starts(np.random.default_rng(0), BATCHED_STARTS)
        a, s = batched(system, starts)
        b, r = plain(system, starts[:PLAIN_STARTS])
        ratio = f"{(a / s) / (b / r):6.0f}x" if b else "  (scipy found none)"
        ours, theirs = f"{a:5d}/{len(starts)} {a / s:9.1f}/s", f"{b:4d}/{PLAIN_STARTS} {b / r:7.2f}/s"
        print(f"{heading(*case[:3])}  {ours}  {theirs}  {ratio}")


def yields():
    print("inside rules per 1000 starts, and per second: steps scaled by the room each unknown has, then not scaled")
    for case in CASES:
        system = system_of(*case)
        starts = system.starts(np.random.default_rng(0), BATCHED_STARTS)
        a, s = batched(system, starts)
        with mock.patch.object(System, "scale", lambda self, u: np.ones_like(u)):
            b, r = batched(system, starts)
        per_start = f"{1000 * a / len(starts):7.1f} {1000 * b / len(starts):7.1f}"
        print(f"{heading(*case[:3])}  {per_start}   {a / s:8.1f}/s {b / r:8.1f}/s")


def growth():
    print(
        f"flat(N=3), full symmetry: seconds until the rule of fewest nodes was met, and of the search (≤ {BUDGET:g} s)"
    )
    spent = []
    for degree in DEGREES:
        best, met = None, 0.0

        def note(progress):
            nonlocal best, met
            found = progress.text.partition(";")[0]
            if found != best:
                best, met = found, progress.elapsed

        begin = time.perf_counter()
        rule = sc.solve(sc.flat(3), degree, digits=20, budget=BUDGET, progress=note)
        spent.append((degree, met, time.perf_counter() - begin))
        print(f"  t={degree:2d}  {len(rule):3d} nodes  {spent[-1][1]:7.2f} s  {spent[-1][2]:7.2f} s", flush=True)
    print(f"all {len(spent)}: {sum(s for _, _, s in spent):.0f} s")
    for name, column in (("met", 1), ("search", 2)):
        rows = np.array([(t, row) for t, row in ((r[0], r[column]) for r in spent) if t >= 5 and row > 0])
        power, constant = np.polyfit(np.log(rows[:, 0]), np.log(rows[:, 1]), 1)
        print(f"fit for t ≥ 5, {name}: seconds ≈ {np.exp(constant):.2g} · t^{power:.1f}")


PARTS = {"speed": speed, "yield": yields, "growth": growth}


def main(names):
    for name in names or PARTS:
        PARTS[name]()
        print()


if __name__ == "__main__":
    main(sys.argv[1:])
