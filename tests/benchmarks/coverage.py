"""How often the stated error of `average` covers the true one, over functions whose means are known otherwise.

Run with ``python tests/benchmarks/coverage.py [CASES] [--seed SEED]``; the exit status is 1 where fewer than 99 % are
covered. The error estimates were tuned on the family of the default seed; any other seed is a fresh one.

- Functions of a linear form h(a·x) over the flat measure, after the families of A. Genz (in *Numerical Integration*,
  Reidel 1987, 337; from memory): oscillatory, corner peak, exponential, |·| (C0), jump. Their means are divided
  differences, E[g^(N−1)(a·x)] = (N − 1)! g[a_1, …, a_N] (Hermite and Genocchi), here in 60 digits.
- Product peak and Gaussian over the flat measure: by Gauss–Legendre rules with 160 (N = 4: 90) nodes per axis on
  broken-stick coordinates, which share no code with the package.
- Real powers, logarithms, ordered polynomials and products of power sums over every family: by exact moments.
"""

from __future__ import annotations

import argparse
import math
import sys
import time
from collections import defaultdict
from collections.abc import Callable, Iterator
from typing import Any, NamedTuple

import numpy as np
from mpmath import mp, mpf
from numpy.typing import NDArray

from simplexcub.average.functions import spectral_function
from simplexcub.average.mean import average
from simplexcub.measures import Measure, bures, bures_hall, dirichlet, flat, hilbert_schmidt, induced, ordered

FloatArray = NDArray[np.float64]
TOLERANCES = (1e-3, 1e-5, 1e-8)
WANTED = 0.99
TUNED_ON = 20261201


class Case(NamedTuple):
    family: str
    measure: Measure
    f: Callable[[FloatArray], Any]
    mean: float
    space: str


def divided_difference(g: Callable[[mpf], mpf], knots: FloatArray) -> mpf:
    at = [mpf(float(a)) for a in knots]
    column = [g(a) for a in at]
    for k in range(1, len(at)):
        column = [(column[i + 1] - column[i]) / (at[i + k] - at[i]) for i in range(len(column) - 1)]
    return column[0]


def of_linear_form(rng: np.random.Generator, n: int) -> Iterator[Case]:
    """Functions h(a·x) with the (N − 1)-fold integral g of h."""
    a = rng.uniform(0.5, 3.0, n) * rng.choice([1.0, 4.0])
    a += np.arange(n) * 1e-3  # knots that are told apart
    shift = float(rng.uniform(0, 2 * math.pi))
    at = float(rng.uniform(a.min(), a.max()))
    d = n - 1
    factorial = math.factorial(d)
    forms: dict[str, tuple[Callable[[FloatArray], FloatArray], Callable[[mpf], mpf]]] = {
        "oscillatory": (lambda z: np.cos(shift + z), lambda z: mp.cos(shift + z - d * mp.pi / 2)),
        "exponential": (lambda z: np.exp(-z), lambda z: (-1) ** d * mp.exp(-z)),
        "corner peak": (
            lambda z: (1 + z) ** -(n + 1.0),
            lambda z: (-1) ** d * (1 + z) ** -2 / mp.fprod(range(2, n + 1)),
        ),
        "kink": (lambda z: np.maximum(z - at, 0), lambda z: max(z - at, mpf(0)) ** n / math.factorial(n)),
        "jump": (lambda z: (z > at) * 1.0, lambda z: max(z - at, mpf(0)) ** d / factorial),
    }
    for name, (h, g) in forms.items():
        with mp.workdps(60):
            mean = float(factorial * divided_difference(g, a))
        yield Case(name, flat(n), lambda x, h=h: h(x @ a), mean, "all")


def flat_grid(n: int) -> tuple[FloatArray, FloatArray]:
    t, w = np.polynomial.legendre.leggauss(160 if n < 4 else 90)
    axes = np.meshgrid(*[(t + 1) / 2] * (n - 1), indexing="ij")
    weights = np.ones(())
    left = np.ones(axes[0].size)
    points = []
    for k, axis in enumerate(axes):
        y = axis.ravel()
        points.append(left * y)
        weights = np.multiply.outer(weights, w / 2 * (1 - (t + 1) / 2) ** (n - 2 - k) * (n - 1 - k))
        left = left * (1 - y)
    return np.stack([*points, left], axis=1), weights.ravel()


def of_products(rng: np.random.Generator, n: int) -> Iterator[Case]:
    sharp, centre = rng.uniform(1.0, 6.0, n), rng.dirichlet(np.ones(n))
    points, weights = GRIDS[n]

    def peak(x: FloatArray) -> FloatArray:
        return np.prod(1 / (1 + sharp**2 * (x - centre) ** 2), axis=1)

    def gaussian(x: FloatArray) -> FloatArray:
        return np.exp(-((sharp * (x - centre)) ** 2).sum(axis=1))

    for name, f in (("product peak", peak), ("Gaussian", gaussian)):
        yield Case(name, flat(n), f, float(weights @ f(points)), "all")


def of_spectra(rng: np.random.Generator, n: int) -> Iterator[Case]:
    measures = [
        hilbert_schmidt(n),
        bures(n),
        induced(n, n + int(rng.integers(1, 4))),
        bures_hall(n, exponent=f"{rng.integers(1, 4)}/2"),
        flat(n),
        dirichlet([f"{rng.integers(1, 8)}/2"] * n),
    ]
    for measure in measures:
        q = str(round(float(rng.uniform(0.1, 5)), 3))
        power = spectral_function(f"power-sum-{q}")
        yield Case("real power", measure, power, float(measure.power_mean(q)), "auto")
        k = int(rng.integers(1, 4))
        yield Case(
            "logarithm",
            measure,
            lambda x, k=k: (x**k * np.log(np.where(x > 0, x, 1.0))).sum(axis=1),
            float(measure.log_mean(k).value(30)),
            "auto",
        )
        parts = tuple(int(p) for p in rng.integers(2, 5, 3))
        yield Case(
            "power sums",
            measure,
            lambda x, parts=parts: np.prod([(x**p).sum(axis=1) for p in parts], axis=0),
            float(measure.power_sum_moment(parts)),
            "auto",
        )
        exponents = tuple(int(p) for p in rng.integers(0, 5, n))
        yield Case(
            "monomial",
            measure,
            lambda x, e=exponents: np.prod(x ** np.array(e), axis=1),
            float(measure.moment(exponents)),
            "all",
        )
    for measure in (hilbert_schmidt(n), induced(n, n + 2), flat(n)):
        exponents = tuple(int(p) for p in rng.integers(0, 4, n))
        yield Case(
            "ordered",
            measure,
            lambda x, e=exponents: np.prod(x ** np.array(e), axis=1),
            float(ordered(measure).moment(exponents)),
            "ordered",
        )


def cases(count: int, seed: int) -> Iterator[Case]:
    rng = np.random.default_rng(seed)
    produced = 0
    while True:
        for n in (2, 3, 4):
            for make in (of_linear_form, of_products, of_spectra):
                for case in make(rng, n):
                    yield case
                    produced += 1
                    if produced == count:
                        return


def main(count: int, seed: int) -> int:
    rng = np.random.default_rng(1)
    covered: dict[str, list[bool]] = defaultdict(list)
    margins: dict[str, list[float]] = defaultdict(list)
    met: dict[str, list[bool]] = defaultdict(list)
    start = time.perf_counter()
    for case in cases(count, seed):
        tol = float(rng.choice(TOLERANCES))
        found = average(case.f, case.measure, tol=tol, space=case.space, max_evaluations=60_000)  # type: ignore[arg-type]
        error = abs(found.value - case.mean)
        covered[case.family].append(error <= found.error)
        met[case.family].append(found.met)
        margins[case.family].append(found.error / max(error, 1e-16))
        if error > found.error:
            print(f"missed: {case.family}, {case.measure}, tol {tol:g}: {error:.1e} > {found.error:.1e}, {found.how}")
    for family in covered:
        share, within, margin = np.mean(covered[family]), np.mean(met[family]), np.median(margins[family])
        print(
            f"{family:<13} {len(covered[family]):>5} means, {share:7.2%} covered, {within:4.0%} to the tolerance, "
            f"stated / true error {margin:.3g} (median)"
        )
    every = [flag for flags in covered.values() for flag in flags]
    print(f"{'all':<13} {len(every):>5} means, {np.mean(every):7.2%} covered, in {time.perf_counter() - start:.0f} s")
    return int(np.mean(every) < WANTED)


GRIDS = {n: flat_grid(n) for n in (2, 3, 4)}

if __name__ == "__main__":
    options = argparse.ArgumentParser(description="Share of means whose stated error covers the true one.")
    options.add_argument("count", metavar="CASES", type=int, nargs="?", default=3000)
    options.add_argument("--seed", type=int, default=TUNED_ON)
    given = options.parse_args()
    sys.exit(main(given.count, given.seed))
