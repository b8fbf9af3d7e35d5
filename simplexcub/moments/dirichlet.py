"""Exact moments of Dirichlet measures, by two routes.

Convention: Dirichlet(α) has density ∝ Π λ_i^(α_i − 1) on the simplex; α_i = 1 is the flat measure.

- rising factorials: E[λ^a] = Π (α_i)_{a_i} / (Σα)_{|a|};
- stick breaking: λ_1 is Beta(α_1, α_2 + …), the rest is an independent Dirichlet scaled by 1 − λ_1, so the mean is
  a product of one-dimensional Beta integrals.

Reference: N. Balakrishnan, V. B. Nevzorov, *A Primer on Statistical Distributions* (2003), chapter 27.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction


def rising(x: Fraction | int, k: int) -> Fraction:
    """Rising factorial (x)_k = x (x+1) … (x+k−1)."""
    p, q = x.numerator, x.denominator
    return Fraction(math.prod(range(p, p + k * q, q)), q**k)


def rising_factorial_moment(alpha: Sequence[Fraction], exponents: Sequence[int]) -> Fraction:
    """E[λ^a] for Dirichlet(α), from rising factorials."""
    numerator = Fraction(1)
    for a, k in zip(alpha, exponents, strict=True):
        numerator *= rising(a, k)
    return numerator / rising(sum(alpha, Fraction(0)), sum(exponents))


def _beta_moment(a: Fraction, b: Fraction, p: int, q: int) -> Fraction:
    """E[x^p (1−x)^q] for x ~ Beta(a, b), by the two recurrences of the Beta function, one factor at a time."""
    value = Fraction(1)
    for i in range(p):
        value *= (a + i) / (a + b + i)
    for j in range(q):
        value *= (b + j) / (a + b + p + j)
    return value


def stick_breaking_moment(alpha: Sequence[Fraction], exponents: Sequence[int]) -> Fraction:
    """E[λ^a] for Dirichlet(α), as a product of Beta integrals along the broken stick."""
    rest = sum(alpha, Fraction(0))
    left = sum(exponents)
    value = Fraction(1)
    for a, k in zip(alpha[:-1], exponents[:-1], strict=True):
        rest -= a
        left -= k
        value *= _beta_moment(a, rest, k, left)
    return value
