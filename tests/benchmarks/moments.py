"""Speed of the exact moments as ratios inside one process, and how the cost grows.

Run with ``python tests/benchmarks/moments.py``.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from fractions import Fraction
from functools import _lru_cache_wrapper
from itertools import pairwise

import mpmath
from mpmath import mp

from simplexcub.measures import bures, hilbert_schmidt, induced
from simplexcub.moments import alternant, cauchy, dirichlet, expansion, loop, schur, transitions
from simplexcub.moments.partitions import partitions


def forget() -> None:
    """Empty every cache, so that each measurement starts cold."""
    for module in (alternant, cauchy, expansion, loop, schur, transitions):
        for value in vars(module).values():
            if isinstance(value, _lru_cache_wrapper):
                value.cache_clear()


def seconds(work: Callable[[], object], repeats: int = 1) -> float:
    best = math.inf
    for _ in range(repeats):
        forget()
        start = time.perf_counter()
        work()
        best = min(best, time.perf_counter() - start)
    return best


def padded(parts: tuple[int, ...], n: int) -> tuple[int, ...]:
    return parts + (0,) * (n - len(parts))


def symmetric_exponents(n: int, degree: int) -> list[tuple[int, ...]]:
    return [padded(mu, n) for d in range(degree + 1) for mu in partitions(d, n)]


def term_by_term(n: int, exponents: tuple[int, ...]) -> Fraction:
    """The plain way: expand Π (λ_i − λ_j)² and add one Dirichlet moment after the other."""
    alpha = (Fraction(1),) * n
    total = Fraction(0)
    for b, d in expansion.vandermonde_power(n, 2).items():
        total += d * dirichlet.rising_factorial_moment(alpha, [x + y for x, y in zip(b, exponents, strict=True)])
    return total


def slope(sizes: list[int], times: list[float]) -> float:
    """Exponent p of time ∝ size^p, by least squares on logarithms."""
    xs, ys = [math.log(s) for s in sizes], [math.log(t) for t in times]
    mx, my = sum(xs) / len(xs), sum(ys) / len(ys)
    return sum((x - mx) * (y - my) for x, y in zip(xs, ys, strict=True)) / sum((x - mx) ** 2 for x in xs)


def against_expansion() -> None:
    wanted = symmetric_exponents(4, 20)
    sample = wanted[:: len(wanted) // 20]
    plain = seconds(lambda: [term_by_term(4, a) for a in sample]) / len(sample) * len(wanted)
    for measure in (hilbert_schmidt(4), bures(4)):
        cold = seconds(lambda m=measure: [m.moment(a) for a in wanted], 3)  # type: ignore[misc]
        alternant.alternant_moment.cache_clear()
        alternant._known_ratios.cache_clear()
        start = time.perf_counter()
        for a in wanted:
            measure.moment(a)
        shared = time.perf_counter() - start
        print(
            f"{len(wanted)} moments of degree <= 20, N = 4, {measure.family}: {cold * 1e3:.0f} ms cold, "
            f"{plain / cold:.0f} times faster than expanding Hilbert-Schmidt term by term; "
            f"{plain / shared:.0f} times after another measure of this N"
        )


def against_quadrature() -> None:
    exponents = (3, 2, 1)

    def by_quadrature() -> object:
        with mp.workdps(30):

            def weight(x: mpmath.mpf, s: mpmath.mpf) -> mpmath.mpf:
                y = (1 - x) * s
                z = 1 - x - y
                return (1 - x) * ((x - y) * (x - z) * (y - z)) ** 2

            def f(x: mpmath.mpf, s: mpmath.mpf) -> mpmath.mpf:
                y = (1 - x) * s
                return weight(x, s) * x**3 * y**2 * (1 - x - y)

            rule = {"method": "gauss-legendre", "maxdegree": 4}
            return mpmath.quad(f, [0, 1], [0, 1], **rule) / mpmath.quad(weight, [0, 1], [0, 1], **rule)

    slow = seconds(by_quadrature)
    fast = seconds(lambda: hilbert_schmidt(3).moment(exponents), 5)
    with mp.workdps(30):
        exact = hilbert_schmidt(3).moment(exponents)
        error = abs(by_quadrature() - mpmath.mpf(exact.numerator) / exact.denominator)
    print(
        f"one moment, N = 3, cold: {slow / fast:.0f} times faster than quadrature to 30 digits, "
        f"whose error is {mp.nstr(error, 2)}"
    )


def growth() -> None:
    degrees = [10, 14, 20, 28, 40]
    for measure in (hilbert_schmidt(4), bures(4)):
        times = [seconds(lambda m=measure, d=d: [m.moment(padded(a, 4)) for a in partitions(d, 4)]) for d in degrees]  # type: ignore[misc]
        print(f"all moments of one degree t, N = 4, {measure.family}: time grows as t^{slope(degrees, times):.1f}")
    sizes = [10, 100, 1000]
    times = [seconds(lambda n=n: bures(n).power_sum_moment((4, 3, 3, 2)), 3) for n in sizes]  # type: ignore[misc]
    print(f"E[p_4 p_3 p_3 p_2], Bures: time grows as N^{slope(sizes, times):.2f}")
    sizes = [4, 5, 6, 7, 8]
    times = [seconds(lambda n=n: hilbert_schmidt(n).moment(tuple(range(n)))) for n in sizes]  # type: ignore[misc]
    steps = ", ".join(f"{b / a:.0f}" for a, b in pairwise(times))
    print(f"one moment with N different exponents, N = 4 … 8: each step takes {steps} times longer (N! terms)")
    degrees = [8, 12, 16, 20, 24]
    times = [seconds(lambda d=d: induced(1000, 2000).power_sum_moment((2,) * (d // 2))) for d in degrees]  # type: ignore[misc]
    print(f"E[p_2^(t/2)], N = 1000: time grows as t^{slope(degrees, times):.1f}")
    print(
        f"E[p_3 p_2 p_2 p_5], N = 1000, K = 2000, cold: "
        f"{seconds(lambda: induced(1000, 2000).power_sum_moment((3, 2, 2, 5)), 3) * 1e3:.1f} ms"
    )


def routes() -> None:
    wanted = symmetric_exponents(4, 12)
    for measure in (hilbert_schmidt(4), bures(4)):
        times = {r: seconds(lambda m=measure, r=r: [m.moment(a, route=r) for a in wanted]) for r in measure.routes}  # type: ignore[misc]
        base = times[measure.routes[0]]
        print(
            f"routes, {measure.family}, N = 4, degree <= 12: "
            + ", ".join(f"{r} {t / base:.1f}" for r, t in times.items())
        )


if __name__ == "__main__":
    against_expansion()
    against_quadrature()
    growth()
    routes()
