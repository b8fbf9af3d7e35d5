"""Exact moments of ordered spectra λ_1 ≥ … ≥ λ_N, by two routes.

The density is ∝ Π λ_i^c Π |λ_i − λ_j|^β on the ordered chamber with integers c ≥ 0 and β ≥ 0 (β = 0: Dirichlet, β = 1:
real, β = 2: complex matrices). There every difference is non-negative, so the density is a polynomial.

- Chamber: the chamber is a simplex with vertices (1/k, …, 1/k, 0, …, 0), so λ_i = Σ_{k≥i} b_k/k with barycentric b;
  both the density and the monomial become polynomials in b, integrated over the flat simplex.
- Nested: on the unconstrained ensemble with weight e^{−Σλ}, integrate from the largest eigenvalue down,
  ∫_y^∞ x^m e^{−jx} dx = e^{−jy} Σ_{k≤m} (m!/k!) y^k / j^{m−k+1}, and divide by (T)_{|a|} for the fixed trace.

Reference: H. A. David, H. N. Nagaraja, *Order Statistics* (2003), section 2.5, for exponential spacings, which the
vertices generalise; both integrals are elementary.
"""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterable
from fractions import Fraction
from functools import lru_cache
from itertools import combinations

from simplexcub.moments.dirichlet import rising
from simplexcub.moments.expansion import check_size, multiply_by_linear, vandermonde_power

Sparse = dict[tuple[int, ...], int]


def _forms(n: int) -> tuple[int, list[list[int]]]:
    """A common multiple L, and L·λ_i as integer linear forms in b."""
    scale = math.lcm(*range(1, n + 1))
    return scale, [[scale // (k + 1) if k >= i else 0 for k in range(n)] for i in range(n)]


@lru_cache(maxsize=32)
def _chamber_density(n: int, beta: int, c: int) -> Sparse:
    check_size(n * c + beta * n * (n - 1) // 2, n, 20_000)
    _, forms = _forms(n)
    factors = [forms[i] for i in range(n) for _ in range(c)]
    for i, j in combinations(range(n), 2):
        factors += [[x - y for x, y in zip(forms[i], forms[j], strict=True)]] * beta
    return _product(n, factors)


def _product(n: int, factors: Iterable[list[int]]) -> Sparse:
    terms: Sparse = {(0,) * n: 1}
    for form in factors:
        terms = multiply_by_linear(terms, form)
    return terms


@lru_cache(maxsize=65536)
def _weighted(m: tuple[int, ...], beta: int, c: int) -> int:
    """∫ b^m · density e^{−Σb}, up to a constant."""
    factorial = math.factorial
    total = 0
    for p, d in _chamber_density(len(m), beta, c).items():
        value = d
        for x, y in zip(p, m, strict=True):
            value *= factorial(x + y)
        total += value
    return total


@lru_cache(maxsize=65536)
def _monomial_in_b(exponents: tuple[int, ...]) -> Sparse:
    n = len(exponents)
    last = next((i for i in range(n - 1, -1, -1) if exponents[i]), None)
    if last is None:
        return {(0,) * n: 1}
    lower = (*exponents[:last], exponents[last] - 1, *exponents[last + 1 :])
    return multiply_by_linear(_monomial_in_b(lower), _forms(n)[1][last])


@lru_cache(maxsize=65536)
def chamber_moment(exponents: tuple[int, ...], beta: int, c: int) -> Fraction:
    """E[Π λ_i^{a_i}] of the ordered spectrum, exponents for the largest eigenvalue first.

    Examples
    --------
    >>> chamber_moment((1, 0), beta=0, c=0)  # the longer piece of a stick broken at random
    Fraction(3, 4)
    """
    n, degree = len(exponents), sum(exponents)
    total = sum(x * _weighted(m, beta, c) for m, x in _monomial_in_b(exponents).items())
    scale, _ = _forms(n)
    trace = n * (c + 1) + beta * n * (n - 1) // 2
    return Fraction(total, _weighted((0,) * n, beta, c) * scale**degree) / rising(trace, degree)


def barycentric_moment(exponents: tuple[int, ...], beta: int, c: int) -> Fraction:
    """E[Π b_k^{a_k}] of the ordered spectrum's barycentric coordinates in the chamber, b_k = k (λ_k − λ_{k+1}).

    Examples
    --------
    >>> barycentric_moment((1, 0), beta=0, c=0)
    Fraction(1, 2)
    """
    n = len(exponents)
    trace = n * (c + 1) + beta * n * (n - 1) // 2
    return Fraction(_weighted(exponents, beta, c), _weighted((0,) * n, beta, c)) / rising(trace, sum(exponents))


def _nested_integral(exponents: tuple[int, ...], beta: int, c: int) -> Fraction:
    n = len(exponents)
    terms: dict[tuple[int, ...], Fraction] = {
        tuple(x + a + c for x, a in zip(b, exponents, strict=True)): Fraction(d)
        for b, d in vandermonde_power(n, beta).items()
    }
    for rate in range(1, n):
        outer: dict[tuple[int, ...], Fraction] = defaultdict(Fraction)
        for (m, second, *others), d in terms.items():
            value = d / rate
            for k in range(m, -1, -1):
                outer[(second + k, *others)] += value
                value *= Fraction(k, rate)
        terms = outer
    return sum((d * math.factorial(m) / n ** (m + 1) for (m,), d in terms.items()), Fraction(0))


@lru_cache(maxsize=256)
def _nested_mass(n: int, beta: int, c: int) -> Fraction:
    return _nested_integral((0,) * n, beta, c)


@lru_cache(maxsize=65536)
def nested_moment(exponents: tuple[int, ...], beta: int, c: int) -> Fraction:
    """The same mean by nested one-dimensional integrals."""
    n, degree = len(exponents), sum(exponents)
    trace = n * (c + 1) + beta * n * (n - 1) // 2
    return _nested_integral(exponents, beta, c) / _nested_mass(n, beta, c) / rising(trace, degree)
