"""Exact moments where the density is a polynomial times a Dirichlet density: a finite sum of Dirichlet moments.

    E[λ^a] = Σ_b d_b D(a + b) / Σ_b d_b D(b),      D(m) = Π (α_i)_{m_i} / (Σα)_{|m|}

It serves polynomial densities of the user's own and, with Π (λ_i − λ_j)^β expanded, is a slow route for even β.
"""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Mapping, Sequence
from fractions import Fraction
from functools import lru_cache
from itertools import combinations

from simplexcub.errors import InputError
from simplexcub.moments.dirichlet import rising, stick_breaking_moment

Terms = tuple[tuple[tuple[int, ...], Fraction], ...]
MOST_MONOMIALS = 12_000


def _scaled_risings(alpha: Fraction, scale: int, most: int) -> list[int]:
    """(α)_k · scale^k for k = 0 … most; `scale` clears the denominator of α."""
    values = [1]
    for k in range(most):
        values.append(values[-1] * int((alpha + k) * scale))
    return values


def polynomial_integral(alpha: Sequence[Fraction], terms: Terms, exponents: Sequence[int]) -> Fraction:
    """Mean of λ^a times the polynomial over Dirichlet(α), not normalised; `terms` hold (exponents, coefficient)."""
    scale = math.lcm(*(a.denominator for a in alpha))
    most = [max(b[i] for b, _ in terms) + a for i, a in enumerate(exponents)]
    tables = [_scaled_risings(a, scale, m) for a, m in zip(alpha, most, strict=True)]
    common = math.lcm(*(d.denominator for _, d in terms))
    by_degree: dict[int, int] = defaultdict(int)
    for b, d in terms:
        value = d.numerator * (common // d.denominator)
        for table, bi, ai in zip(tables, b, exponents, strict=True):
            value *= table[bi + ai]
        by_degree[sum(b)] += value
    whole, more = sum(alpha, Fraction(0)), sum(exponents)
    total = Fraction(0)
    for degree, value in by_degree.items():
        total += Fraction(value, scale ** (degree + more)) / rising(whole, degree + more)
    return total / common


def stick_integral(alpha: Sequence[Fraction], terms: Terms, exponents: Sequence[int]) -> Fraction:
    """The same mean with each Dirichlet moment taken along the broken stick."""
    total = Fraction(0)
    for b, d in terms:
        total += d * stick_breaking_moment(alpha, tuple(x + y for x, y in zip(b, exponents, strict=True)))
    return total


def multiply_by_linear(terms: Mapping[tuple[int, ...], int], form: Sequence[int]) -> dict[tuple[int, ...], int]:
    """Product of a polynomial and a linear form Σ form_i x_i, both with integer coefficients."""
    total: dict[tuple[int, ...], int] = defaultdict(int)
    steps = [(i, x) for i, x in enumerate(form) if x]
    for exponents, coefficient in terms.items():
        for i, x in steps:
            total[(*exponents[:i], exponents[i] + 1, *exponents[i + 1 :])] += coefficient * x
    return {exponents: coefficient for exponents, coefficient in total.items() if coefficient}


def check_size(degree: int, n: int, most: int = MOST_MONOMIALS) -> None:
    """Refuse an expansion with too many monomials.

    Raises
    ------
    InputError
        More than `most` monomials of this degree in N variables.
    """
    monomials = math.comb(degree + n - 1, n - 1)
    if monomials > most:
        raise InputError(
            f"the expanded density must have at most {most} monomials",
            f"{monomials} (degree {degree}, N = {n})",
            "Take a smaller N or another route.",
        )


@lru_cache(maxsize=32)
def vandermonde_power(n: int, beta: int) -> dict[tuple[int, ...], int]:
    """Π_{i<j} (x_i − x_j)^β, expanded.

    Examples
    --------
    >>> vandermonde_power(2, 2)
    {(2, 0): 1, (1, 1): -2, (0, 2): 1}
    """
    check_size(beta * n * (n - 1) // 2, n)
    terms = {(0,) * n: 1}
    for i, j in combinations(range(n), 2):
        form = [0] * n
        form[i], form[j] = 1, -1
        for _ in range(beta):
            terms = multiply_by_linear(terms, form)
    return terms


@lru_cache(maxsize=256)
def _vandermonde_terms(n: int, beta: int) -> Terms:
    return tuple((b, Fraction(d)) for b, d in vandermonde_power(n, beta).items())


@lru_cache(maxsize=256)
def _mass(n: int, beta: int, c: Fraction) -> Fraction:
    return polynomial_integral((c + 1,) * n, _vandermonde_terms(n, beta), (0,) * n)


@lru_cache(maxsize=65536)
def expansion_moment(exponents: tuple[int, ...], beta: int, c: Fraction) -> Fraction:
    """E[λ^a] for the density ∝ Π λ_i^c Π (λ_i − λ_j)^β with an even β, N = len(exponents).

    Raises
    ------
    InputError
        More than 12000 monomials could stand in the expanded density.
    """
    n = len(exponents)
    terms = _vandermonde_terms(n, beta)
    return polynomial_integral((c + 1,) * n, terms, exponents) / _mass(n, beta, c)
