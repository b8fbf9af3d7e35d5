"""Exact moments of Hilbert–Schmidt and induced measures through Schur functions and content products.

    E[s_ν] = s_ν(1^N) · Π_{(i,j) ∈ ν} (K + j − i) / (NK)_{|ν|},   s_ν(1^N) = Π_{(i,j) ∈ ν} (N + j − i) / hook(i, j)

Power sums follow by E[p_μ] = Σ_ν χ^ν_μ E[s_ν], monomials from power sums. The cost depends on the degree alone: this is
the route for large N. It shares nothing with the alternating sum and serves as its check.

Reference: I. G. Macdonald, *Symmetric Functions and Hall Polynomials* (1995), I.3, I.7 and VII.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import lru_cache

from simplexcub.moments.dirichlet import rising
from simplexcub.moments.partitions import distinct_permutations
from simplexcub.moments.reach import check_reach, check_strips
from simplexcub.moments.transitions import augmented_in_power_sums, power_sums_in_schur

__all__ = [
    "content_product",
    "distinct_permutations",
    "monomial_from_power_sums",
    "schur_at_ones",
    "schur_mean",
    "schur_moment",
    "schur_power_sum",
]

FEW_PARTS, MOST_JOINED = 8, 1_000  # eight parts join in 4140 ways at most, which is always quick


def content_product(nu: tuple[int, ...], x: Fraction | int) -> Fraction:
    """Π (x + j − i) over the boxes (i, j) of ν."""
    value = Fraction(1)
    for i, part in enumerate(nu):
        value *= rising(x - i, part)
    return value


@lru_cache(maxsize=65536)
def schur_at_ones(nu: tuple[int, ...], n: int) -> Fraction:
    """s_ν(1^n): the number of semistandard tableaux of shape ν with entries up to n."""
    columns = [sum(part > j for part in nu) for j in range(nu[0] if nu else 0)]
    hooks = 1
    for i, part in enumerate(nu):
        for j in range(part):
            hooks *= part - j + columns[j] - i - 1
    return content_product(nu, n) / hooks


@lru_cache(maxsize=65536)
def schur_mean(nu: tuple[int, ...], n: int, k: int) -> Fraction:
    """E[s_ν] over the induced measure of N eigenvalues and environment size K; `nu` is a partition with no zeros."""
    return schur_at_ones(nu, n) * content_product(nu, k) / rising(n * k, sum(nu))


def monomial_from_power_sums(
    exponents: Sequence[int], power_sum: Callable[[tuple[int, ...]], Fraction], n: int | None = None
) -> Fraction:
    """E[λ^a] of a symmetric measure from its means of power-sum products; with `n`, zeros may be left out.

    Raises
    ------
    InputError
        Too many ways to join the exponents.
    """
    parts = tuple(sorted((a for a in exponents if a), reverse=True))
    n = len(exponents) if n is None else n
    if len(parts) > FEW_PARTS:
        check_reach(sum(parts), len(parts), MOST_JOINED)
    total = Fraction(0)
    for mu, coefficient in augmented_in_power_sums(parts).items():
        total += coefficient * power_sum(mu)
    return total / math.perm(n, len(parts))


@lru_cache(maxsize=65536)
def schur_power_sum(parts: tuple[int, ...], n: int, k: int) -> Fraction:
    """E[Π p_k over `parts`] over the induced measure, by characters and content products."""
    check_strips(parts, n)
    total = Fraction(0)
    for nu, character in power_sums_in_schur(parts, n).items():
        total += character * schur_mean(nu, n, k)
    return total


@lru_cache(maxsize=65536)
def schur_moment(exponents: tuple[int, ...], k: int) -> Fraction:
    """E[λ^a] over the induced measure, N = len(exponents), through power sums."""
    n = len(exponents)
    return monomial_from_power_sums(exponents, lambda mu: schur_power_sum(mu, n, k))
