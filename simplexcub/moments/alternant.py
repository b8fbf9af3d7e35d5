"""Exact moments of eigenvalue measures, as one alternating sum with a pair kernel.

With c the exponent of Π λ_i^c, the mean over the fixed-trace ensemble is

    M(a) = Σ_{σ ∈ S_N} sgn(σ) Π_i Γ(x_i) Π_{i>j} k(x_i, x_j),      x_i = a_i + σ_i + c + 1,  σ_i ∈ {0, …, N−1}
    E[λ^a] = M(a)/M(0) · Γ(T)/Γ(T + |a|)

where T is the degree of homogeneity of the unnormalised density. Hilbert–Schmidt and induced measures have the
kernel x − y (two Vandermonde determinants over the Laguerre weight, row by row) and T = N(N + c). Bures measures have
(x − y)/(x + y) (Schur's Pfaffian, once for the density and once for the integrated pairs) and T = N(c + 1) + N(N−1)/2.

A term depends on the *set* of the x_i alone, up to sign, and vanishes where two coincide. So each set is evaluated
once, as a ratio to the set of M(0), and the sum runs over the few permutations that keep all x_i apart.

References: K. Życzkowski, H.-J. Sommers, J. Phys. A 34 (2001) 7111; H.-J. Sommers, K. Życzkowski, J. Phys. A 36
(2003) 10083; M. L. Mehta, *Random Matrices* (2004), chapter 17; I. G. Macdonald, *Symmetric Functions and Hall
Polynomials* (1995), III.8 for Schur's Pfaffian.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from enum import Enum
from fractions import Fraction
from functools import lru_cache
from itertools import groupby

from simplexcub.errors import InputError
from simplexcub.moments.partitions import orderings
from simplexcub.moments.reach import check_strips
from simplexcub.moments.transitions import power_sums_in_schur

MOST_TERMS = 2_000_000
HIGH_DEGREE, MOST_WORK = 200, 5_000_000


class Kernel(Enum):
    """The pair kernel k(x, y)."""

    DIFFERENCE = "x - y"
    RATIO = "(x - y)/(x + y)"


def homogeneity(n: int, c: Fraction, kernel: Kernel) -> Fraction:
    """T: the trace of the unconstrained ensemble is Gamma(T) distributed."""
    pairs = n * (n - 1)
    return n * (c + 1) + (pairs if kernel is Kernel.DIFFERENCE else Fraction(pairs, 2))


def alternant_terms(exponents: tuple[int, ...]) -> int:
    """Upper bound on the number of terms of the sum for these exponents; pruning usually leaves far fewer."""
    return orderings(exponents, min(len(exponents), max(sum(exponents), 1)))


@lru_cache(maxsize=65536)
def shape_mean(nu: tuple[int, ...], n: int, c: Fraction, kernel: Kernel) -> Fraction:
    """One term over M(0) with Γ(T)/Γ(T + |ν|): the set x_i = ν_i + N − i + c + 1 against x_i = N − i + c + 1, i from 1.

    It is also the mean of the Schur function s_ν. Factors against the unmoved x_j telescope, so the cost is that of
    the degree and not of N.
    """
    q = c.denominator
    base = c.numerator  # every x below is q times its value, an integer
    length = len(nu)
    unmoved = n - length
    old = [q * (n - i) + base for i in range(length)]
    new = [x + q * part for x, part in zip(old, nu, strict=True)]
    top, bottom = 1, q ** sum(nu)
    for i, part in enumerate(nu):
        for u in range(part):
            x = old[i] + q * u
            top *= x * (x - base)
            bottom *= x - base - q * unmoved
            if kernel is Kernel.RATIO:
                top *= x + base + q
                bottom *= x + base + q + q * unmoved
        for j in range(nu.index(part)):
            top *= new[j] - new[i]
            bottom *= old[j] - old[i]
            if kernel is Kernel.RATIO:
                top *= old[j] + old[i]
                bottom *= new[j] + new[i]
    if kernel is Kernel.RATIO:
        for first, last, part in _equal_runs(nu):
            for s in range(2 * first + 1, 2 * last):
                # equally shifted rows i < j with i + j = s share one sum, and their differences are unchanged
                pairs = (min(s - first, last) - max(s - last, first) + 1) // 2
                both = q * (2 * n - s) + 2 * base
                top *= both**pairs
                bottom *= (both + 2 * q * part) ** pairs
    total = homogeneity(n, c, kernel)
    for u in range(sum(nu)):
        top *= total.denominator
        bottom *= total.numerator + u * total.denominator
    return Fraction(top, bottom)


def _equal_runs(nu: tuple[int, ...]) -> Iterator[tuple[int, int, int]]:
    """First and last row of each run of equal parts, and the part."""
    first = 0
    for part, run in groupby(nu):
        last = first + sum(1 for _ in run) - 1
        yield first, last, part
        first = last + 1


@lru_cache(maxsize=65536)
def _surviving_sets(parts: tuple[int, ...], n: int) -> dict[tuple[int, ...], int]:
    """Signed number of permutations that lead to each set of distinct x_i, written as the partition ν of the shifts.

    The rows are placed from the largest σ down; row i with exponent a lands at a − i. Rows with exponent 0 stay where
    they are, so a later row can only land in a hole that an earlier one left, or above all: that ends the search early.
    """
    found: dict[tuple[int, ...], int] = {}

    def place(start: int, left: tuple[int, ...], taken: tuple[int, ...], holes: tuple[int, ...], sign: int) -> None:
        if not left:
            nu = tuple(x + k for k, x in enumerate(sorted(taken, reverse=True)) if x + k)
            found[nu] = found.get(nu, 0) + sign
            return
        for i in range(start, min(n, left[0] + 1 + (holes[-1] if holes else -1))):
            for at, part in enumerate(left):
                position = part - i
                if position in taken or (at and left[at - 1] == part):
                    continue
                jumped = sum(x < position for x in taken)
                still = (*(h for h in holes if h != -position), i)
                rest = left[:at] + left[at + 1 :]
                place(i + 1, rest, (*taken, position), still, -sign if jumped % 2 else sign)
            taken = (*taken, -i)

    place(0, parts, (), (), 1)
    return {nu: count for nu, count in found.items() if count}


def _check_work(terms: int, degree: int, n: int) -> None:
    if degree > HIGH_DEGREE and terms * degree > MOST_WORK:
        raise InputError(f"the degree must be lower for N = {n} and this many terms", f"degree {degree}, {terms} terms")


def _total(terms: Iterable[tuple[int, Fraction]]) -> Fraction:
    """Σ count · value over one common denominator, which is quicker than adding fractions one by one."""
    pairs = list(terms)
    common = math.lcm(*(value.denominator for _, value in pairs))
    return Fraction(sum(k * value.numerator * (common // value.denominator) for k, value in pairs), common)


@lru_cache(maxsize=65536)
def alternant_moment(exponents: tuple[int, ...], c: Fraction, kernel: Kernel) -> Fraction:
    """E[λ^a] of the fixed-trace ensemble with the given pair kernel; pass `exponents` sorted, so that the cache serves.

    Raises
    ------
    InputError
        More than two million terms could be needed.
    """
    n = len(exponents)
    terms = alternant_terms(exponents)
    if terms > MOST_TERMS:
        raise InputError(
            f"the alternating sum must have at most {MOST_TERMS} terms", terms, "Leave the route to the package."
        )
    _check_work(terms, sum(exponents), n)
    sets = _surviving_sets(tuple(a for a in exponents if a), n)
    return _total((count, shape_mean(nu, n, c, kernel)) for nu, count in sets.items()) / orderings(exponents)


@lru_cache(maxsize=65536)
def alternant_power_sum(parts: tuple[int, ...], n: int, c: Fraction, kernel: Kernel) -> Fraction:
    """E[Π p_k over `parts`], p_k = Σ λ_i^k, with the characters of the symmetric group as coefficients."""
    check_strips(parts, n)
    characters = power_sums_in_schur(parts, n)
    _check_work(len(characters), sum(parts), n)
    return _total((character, shape_mean(nu, n, c, kernel)) for nu, character in characters.items())
