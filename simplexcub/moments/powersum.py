"""Exact means of products of power sums p_k = Σ λ_i^k, from the moments of sorted monomials.

E[p_μ] = Σ_a [λ^a] p_μ · #(orderings of a) · E[λ^a],   a over partitions of |μ| into at most N parts
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Mapping, Sequence
from fractions import Fraction
from functools import lru_cache


@lru_cache(maxsize=65536)
def monomial_coefficients(parts: tuple[int, ...], n: int) -> Mapping[tuple[int, ...], int]:
    """Coefficients of p_{parts} at the sorted monomials of n variables, {exponents in falling order: coefficient}."""
    if not parts:
        return {(0,) * n: 1}
    k, smaller = parts[0], monomial_coefficients(parts[1:], n)
    candidates = set()
    for a in smaller:
        for i in range(n):
            candidates.add(tuple(sorted((*a[:i], a[i] + k, *a[i + 1 :]), reverse=True)))
    found = {}
    for a in candidates:
        total = 0
        for i in range(n):
            if a[i] >= k:
                total += smaller.get(tuple(sorted((*a[:i], a[i] - k, *a[i + 1 :]), reverse=True)), 0)
        found[a] = total
    return found


def power_sum_moment(moment: Callable[[Sequence[int]], Fraction], n: int, parts: Sequence[int]) -> Fraction:
    """E[Π p_{parts}] over a symmetric measure of n components whose monomial means `moment` gives."""
    total = Fraction(0)
    for a, coefficient in monomial_coefficients(tuple(sorted(parts)), n).items():
        orderings = math.factorial(n)
        for repeated in Counter(a).values():
            orderings //= math.factorial(repeated)
        total += coefficient * orderings * moment(a)
    return total
