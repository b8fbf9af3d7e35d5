"""Exact means of products of power sums p_k = Σ λ_i^k, where a measure has no shorter way than its monomials.

Symmetric measures go through augmented monomials, E[p_μ] = Σ_a c_a · N(N−1)…(N−ℓ(a)+1) · E[λ^a]; others through every
monomial of the product. Dirichlet measures have a quicker rule: with independent Gamma variables g_i of shapes α_i,

    E[Π p_k] = E[Π Σ_i g_i^k] / (Σα)_{|μ|},

and the mean on the right is a coefficient of the product over i of Σ_T (α_i)_{|T|} z^T/T!, T running over the multisets
inside μ; equal α_i make it a power, taken by repeated squaring.
"""

from __future__ import annotations

import math
from collections import Counter, defaultdict
from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import lru_cache
from itertools import product

from simplexcub.errors import InputError
from simplexcub.moments.dirichlet import rising
from simplexcub.moments.transitions import power_sums_in_augmented

MOST_SPLITS = 2_000
Series = dict[tuple[int, ...], Fraction]


def power_sum_moment(
    moment: Callable[[Sequence[int]], Fraction], n: int, parts: Sequence[int], *, symmetric: bool = True
) -> Fraction:
    """E[Π p_k over `parts`] over a measure of n components whose monomial means `moment` gives."""
    if not symmetric:
        return sum((count * moment(a) for a, count in _every_monomial(tuple(sorted(parts)), n).items()), Fraction(0))
    total = Fraction(0)
    for a, coefficient in power_sums_in_augmented(tuple(sorted(parts, reverse=True))).items():
        if len(a) <= n:
            total += coefficient * math.perm(n, len(a)) * moment(a + (0,) * (n - len(a)))
    return total


@lru_cache(maxsize=1024)
def _every_monomial(parts: tuple[int, ...], n: int) -> Counter[tuple[int, ...]]:
    if not parts:
        return Counter({(0,) * n: 1})
    found: Counter[tuple[int, ...]] = Counter()
    for a, count in _every_monomial(parts[:-1], n).items():
        for i in range(n):
            found[(*a[:i], a[i] + parts[-1], *a[i + 1 :])] += count
    return found


def _multiply(a: Series, b: Series, most: tuple[int, ...]) -> Series:
    total: Series = defaultdict(Fraction)
    for (x, p), (y, q) in product(a.items(), b.items()):
        joined = tuple(i + j for i, j in zip(x, y, strict=True))
        if all(i <= m for i, m in zip(joined, most, strict=True)):
            total[joined] += p * q
    return total


def _power(base: Series, exponent: int, most: tuple[int, ...]) -> Series:
    result: Series = {(0,) * len(most): Fraction(1)}
    while exponent:
        if exponent % 2:
            result = _multiply(result, base, most)
        exponent //= 2
        if exponent:
            base = _multiply(base, base, most)
    return result


@lru_cache(maxsize=65536)
def dirichlet_power_sum(parts: tuple[int, ...], alpha: tuple[Fraction, ...]) -> Fraction:
    """E[Π p_k over `parts`] over Dirichlet(α).

    Raises
    ------
    InputError
        More than 2000 ways to take a multiset out of `parts`.

    Examples
    --------
    >>> dirichlet_power_sum((2,), (Fraction(1), Fraction(1)))
    Fraction(2, 3)
    """
    counts = Counter(parts)
    most = tuple(counts.values())
    splits = math.prod(m + 1 for m in most)
    if splits > MOST_SPLITS:
        raise InputError(f"the power sums must split in at most {MOST_SPLITS} ways", splits, "Ask for fewer of them.")
    total: Series = {(0,) * len(most): Fraction(1)}
    for a, places in Counter(alpha).items():
        one: Series = {}
        for taken in product(*(range(m + 1) for m in most)):
            weight = sum(k * t for k, t in zip(counts, taken, strict=True))
            one[taken] = rising(a, weight) / math.prod(math.factorial(t) for t in taken)
        total = _multiply(total, _power(one, places, most), most)
    orders = math.prod(math.factorial(m) for m in most)
    return total[most] * orders / rising(sum(alpha, Fraction(0)), sum(parts))
