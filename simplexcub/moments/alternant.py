"""Exact moments of eigenvalue measures, as one alternating sum with a pair kernel.

With c the exponent of Π λ_i^c, the mean over the fixed-trace ensemble is

    M(a) = Σ_{σ ∈ S_N} sgn(σ) Π_i Γ(x_i) Π_{i>j} k(x_i, x_j),      x_i = a_i + σ_i + c + 1,  σ_i ∈ {0, …, N−1}
    E[λ^a] = M(a)/M(0) · Γ(T)/Γ(T + |a|)

where T is the degree of homogeneity of the unnormalised density. Hilbert–Schmidt and induced measures have the
kernel x − y (two Vandermonde determinants over the Laguerre weight, row by row) and T = N(N + c).

References: K. Życzkowski, H.-J. Sommers, J. Phys. A 34 (2001) 7111; M. L. Mehta, *Random Matrices* (2004), chapter 17.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import lru_cache
from itertools import permutations

from simplexcub.moments.dirichlet import rising

PairKernel = Callable[[Fraction, Fraction], Fraction]


def difference(x: Fraction, y: Fraction) -> Fraction:
    """Pair kernel of the Hilbert–Schmidt and induced measures."""
    return x - y


def _sign(order: Sequence[int]) -> int:
    inversions = sum(order[i] > order[j] for i in range(len(order)) for j in range(i + 1, len(order)))
    return -1 if inversions % 2 else 1


def _alternating_sum(exponents: tuple[int, ...], c: Fraction, kernel: PairKernel) -> Fraction:
    """M(a) / Γ(c + 1)^N, a rational number for every rational c."""
    total = Fraction(0)
    n = len(exponents)
    gammas = [[rising(c + 1, a + s) for s in range(n)] for a in exponents]
    for order in permutations(range(n)):
        x = [a + s + c + 1 for a, s in zip(exponents, order, strict=True)]
        term = Fraction(_sign(order))
        for i in range(n):
            term *= gammas[i][order[i]]
            for j in range(i):
                term *= kernel(x[i], x[j])
        total += term
    return total


@lru_cache(maxsize=65536)
def alternant_moment(exponents: tuple[int, ...], c: Fraction, kernel: PairKernel, homogeneity: Fraction) -> Fraction:
    """E[λ^a] of the fixed-trace ensemble with the given pair kernel; pass `exponents` sorted, so the cache serves."""
    zero = (0,) * len(exponents)
    if exponents == zero:
        return Fraction(1)
    mass = _normalisation(len(exponents), c, kernel)
    return _alternating_sum(exponents, c, kernel) / mass / rising(homogeneity, sum(exponents))


@lru_cache(maxsize=256)
def _normalisation(n: int, c: Fraction, kernel: PairKernel) -> Fraction:
    return _alternating_sum((0,) * n, c, kernel)
