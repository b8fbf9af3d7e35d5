"""Exact moments of Hilbert–Schmidt and induced measures through Schur functions.

    E[s_ν] = s_ν(1^N) · Π_{(i,j) ∈ ν} (K + j − i) / (NK)_{|ν|},   s_ν(1^N) = Π_{(i,j) ∈ ν} (N + j − i) / hook(i, j)

A monomial symmetric function becomes Schur functions by multiplying with the Vandermonde alternant and straightening
exponents. The route shares nothing with the alternating sum and serves as its check.

Reference: I. G. Macdonald, *Symmetric Functions and Hall Polynomials* (1995), I.3 and VII.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from fractions import Fraction
from functools import lru_cache

from simplexcub.moments.dirichlet import rising


@lru_cache(maxsize=65536)
def schur_mean(nu: tuple[int, ...], n: int, k: int) -> Fraction:
    """E[s_ν] over the induced measure of N eigenvalues and environment size K; `nu` is a partition with no zeros."""
    columns = [sum(part > j for part in nu) for j in range(nu[0] if nu else 0)]
    value = Fraction(1)
    for i, part in enumerate(nu):
        for j in range(part):
            hook = part - j + columns[j] - i - 1
            value *= Fraction((n + j - i) * (k + j - i), hook)
    return value / rising(n * k, sum(nu))


def distinct_permutations(items: Sequence[int]) -> Iterator[tuple[int, ...]]:
    """Every different ordering of a multiset once, in lexicographic order."""
    order = sorted(items)
    while True:
        yield tuple(order)
        i = len(order) - 2
        while i >= 0 and order[i] >= order[i + 1]:
            i -= 1
        if i < 0:
            return
        j = len(order) - 1
        while order[j] <= order[i]:
            j -= 1
        order[i], order[j] = order[j], order[i]
        order[i + 1 :] = reversed(order[i + 1 :])


def _straighten(exponents: tuple[int, ...]) -> tuple[int, tuple[int, ...]]:
    """Sign and partition with s_exponents = sign · s_partition; sign 0 where the alternant vanishes."""
    n = len(exponents)
    shifted = [e + n - 1 - i for i, e in enumerate(exponents)]
    if len(set(shifted)) < n:
        return 0, ()
    inversions = sum(shifted[i] < shifted[j] for i in range(n) for j in range(i + 1, n))
    shifted.sort(reverse=True)
    parts = [s - (n - 1 - i) for i, s in enumerate(shifted)]
    return (-1 if inversions % 2 else 1), tuple(p for p in parts if p)


def schur_moment(exponents: Sequence[int], k: int) -> Fraction:
    """E[λ^a] over the induced measure, N = len(exponents), by expanding the symmetrised monomial in Schur functions."""
    n = len(exponents)
    total = Fraction(0)
    count = 0
    for order in distinct_permutations(exponents):
        count += 1
        sign, nu = _straighten(order)
        if sign:
            total += sign * schur_mean(nu, n, k)
    return total / count
