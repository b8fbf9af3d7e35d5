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
from collections import Counter
from collections.abc import Iterator, Mapping
from enum import Enum
from fractions import Fraction
from functools import lru_cache
from itertools import groupby

from simplexcub.errors import InputError
from simplexcub.moments.partitions import orderings
from simplexcub.moments.reach import check_strips
from simplexcub.moments.transitions import power_sums_in_schur

MOST_TERMS = 2_000_000
FEW_ROWS = 12
HIGH_DEGREE, MOST_WORK = 200, 1_000_000


class Kernel(Enum):
    """The pair kernel k(x, y)."""

    DIFFERENCE = "x - y"
    RATIO = "(x - y)/(x + y)"


@lru_cache(maxsize=256)
def homogeneity(n: int, c: Fraction, kernel: Kernel) -> Fraction:
    """T: the trace of the unconstrained ensemble is Gamma(T) distributed."""
    pairs = n * (n - 1)
    return n * (c + 1) + (pairs if kernel is Kernel.DIFFERENCE else Fraction(pairs, 2))


def alternant_terms(exponents: tuple[int, ...]) -> int:
    """Upper bound on the number of terms of the sum for these exponents; pruning usually leaves far fewer."""
    return orderings(exponents, min(len(exponents), max(sum(exponents), 1)))


@lru_cache(maxsize=256)
def _known_ratios(n: int, c: Fraction, kernel: Kernel) -> dict[tuple[int, ...], tuple[int, int]]:
    """Memory of :func:`_ratio` for one ensemble, so that no fraction is hashed for each term."""
    return {}


def _ratio(nu: tuple[int, ...], n: int, c: Fraction, kernel: Kernel) -> tuple[int, int]:
    """One term of M over M(0), not reduced: the set x_i = ν_i + N − i + c + 1 against x_i = N − i + c + 1, i from 1.

    Factors against the unmoved x_j telescope, so the cost is that of the degree and not of N.
    """
    q = c.denominator
    base = c.numerator  # every x below is q times its value, an integer
    if n <= FEW_ROWS:
        nu += (0,) * (n - len(nu))  # all differences then stand over one common denominator
    length = len(nu)
    unmoved = n - length
    old = [q * (n - i) + base for i in range(length)]
    new = [x + q * part for x, part in zip(old, nu, strict=True)]
    top, bottom = 1, q ** sum(nu)
    for i, part in enumerate(nu):
        top *= math.prod(range(old[i], new[i], q))
        if unmoved:
            top *= math.prod(range(n - i, n - i + part))
            bottom *= math.prod(range(length - i, length - i + part))
            if kernel is Kernel.RATIO:
                start = old[i] + base + q
                top *= math.prod(range(start, start + q * part, q))
                bottom *= math.prod(range(start + q * unmoved, start + q * (unmoved + part), q))
        others = range(i) if n <= FEW_ROWS else range(nu.index(part))
        for j in others:
            top *= new[j] - new[i]
            bottom *= old[j] - old[i]
        if kernel is Kernel.RATIO:
            for j in others:
                top *= old[j] + old[i]
                bottom *= new[j] + new[i]
    if kernel is Kernel.RATIO and n > FEW_ROWS:
        for both, power in _sums_in_runs(nu, n).items():
            if power > 0:
                top *= (q * both + 2 * base) ** power
            else:
                bottom *= (q * both + 2 * base) ** -power
    return top, bottom


def _mean(
    counts: Mapping[tuple[int, ...], int], share: int, degree: int, n: int, c: Fraction, kernel: Kernel
) -> Fraction:
    """Σ count · term of M over M(0), for a fixed trace and over one common denominator; divided by `share`."""
    known = _known_ratios(n, c, kernel)
    terms = []
    for nu, count in counts.items():
        ratio = known.get(nu)
        if ratio is None:
            ratio = known[nu] = _ratio(nu, n, c, kernel)
        terms.append((count * ratio[0], ratio[1]))
    common = math.lcm(*{bottom for _, bottom in terms})
    total = homogeneity(n, c, kernel)
    p, q = total.numerator, total.denominator
    trace = math.prod(range(p, p + q * degree, q))
    return Fraction(sum(top * (common // bottom) for top, bottom in terms) * q**degree, common * trace * share)


def _equal_runs(nu: tuple[int, ...]) -> Iterator[tuple[int, int, int]]:
    """First and last row of each run of equal parts, and the part."""
    first = 0
    for part, run in groupby(nu):
        last = first + sum(1 for _ in run) - 1
        yield first, last, part
        first = last + 1


def _sums_in_runs(nu: tuple[int, ...], n: int) -> Counter[int]:
    """Net power of each x_i + x_j − 2c over pairs in runs of equal parts: unmoved rows above, moved rows below.

    Equally shifted rows i < j with i + j = s share one sum, so nearly all cancel; their differences are unchanged.
    """
    powers: Counter[int] = Counter()
    for first, last, part in _equal_runs(nu):
        for s in range(2 * first + 1, 2 * last):
            pairs = (min(s - first, last) - max(s - last, first) + 1) // 2
            powers[2 * n - s] += pairs
            powers[2 * n - s + 2 * part] -= pairs
    return powers


@lru_cache(maxsize=65536)
def _surviving_sets(parts: tuple[int, ...], n: int) -> dict[tuple[int, ...], int]:
    """Signed number of permutations that lead to each set of distinct x_i, written as the partition ν of the shifts.

    The rows are placed from the largest σ down; row i with exponent a lands at a − i. Rows with exponent 0 stay where
    they are, so a later row can only land in a hole that an earlier one left, or above all: that ends the search early.
    """
    if not parts:
        return {(): 1}
    rows = min(n, sum(parts))  # no row further down can reach a free place
    found: dict[int, int] = {}

    def place(start: int, left: tuple[int, ...], taken: int, holes: int, sign: int) -> None:
        """A bit of `taken` is an occupied place, one of `holes` a deserted one; row i has its home at rows − 1 − i."""
        for i in range(start, rows):
            home = rows - 1 - i
            lowest = (holes & -holes).bit_length() - 1 if holes else rows
            if home + left[0] < lowest:
                return
            tried = 0
            for at, part in enumerate(left):
                bit = 1 << (home + part)
                if part == tried or taken & bit:
                    continue
                tried = part
                odd = (taken & (bit - 1)).bit_count() & 1
                rest = left[:at] + left[at + 1 :]
                if rest:
                    still = (holes & ~bit) | 1 << home
                    place(i + 1, rest, taken | bit, still, -sign if odd else sign)
                else:
                    settled = taken | bit | ((1 << home) - 1)
                    found[settled] = found.get(settled, 0) + (-sign if odd else sign)
            taken |= 1 << home

    place(0, parts, 0, 0, 1)
    return {_shape(taken, rows): count for taken, count in found.items() if count}


def _shape(taken: int, rows: int) -> tuple[int, ...]:
    """The partition whose shifted parts are the occupied places."""
    nu = []
    for i in range(rows):
        place = taken.bit_length() - 1
        if place == rows - 1 - i:
            break
        nu.append(place - (rows - 1 - i))
        taken ^= 1 << place
    return tuple(nu)


def _check_work(terms: int, degree: int, n: int) -> None:
    if degree > HIGH_DEGREE and terms * degree > MOST_WORK:
        raise InputError(f"the degree must be lower for N = {n} and this many terms", f"degree {degree}, {terms} terms")


@lru_cache(maxsize=65536)
def alternant_moment(exponents: tuple[int, ...], c: Fraction, kernel: Kernel) -> Fraction:
    """E[λ^a] of the fixed-trace ensemble with the given pair kernel; pass `exponents` sorted, so that the cache serves.

    Raises
    ------
    InputError
        More than two million terms could be needed.
    """
    n = len(exponents)
    terms = alternant_terms(exponents) if n > 7 else math.factorial(n)
    if terms > MOST_TERMS:
        raise InputError(
            f"the alternating sum must have at most {MOST_TERMS} terms", terms, "Leave the route to the package."
        )
    _check_work(terms, sum(exponents), n)
    sets = _surviving_sets(tuple(a for a in exponents if a), n)
    return _mean(sets, orderings(exponents), sum(exponents), n, c, kernel)


@lru_cache(maxsize=65536)
def alternant_power_sum(parts: tuple[int, ...], n: int, c: Fraction, kernel: Kernel) -> Fraction:
    """E[Π p_k over `parts`], p_k = Σ λ_i^k, with the characters of the symmetric group as coefficients."""
    check_strips(parts, n)
    characters = power_sums_in_schur(parts, n)
    _check_work(len(characters), sum(parts), n)
    return _mean(characters, 1, sum(parts), n, c, kernel)
