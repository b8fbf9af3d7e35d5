"""Exact means of power sums by loop equations, for every β.

Over the unconstrained ensemble with density ∝ Π λ_i^c e^{−λ_i} Π |λ_i − λ_j|^β, integrating Σ_i ∂_i (λ_i^k F) times the
density gives zero. With F a product of power sums p_m = Σ λ_i^m and p_0 = N that reads

    E[p_k F] = (c + k − kβ/2) E[p_{k−1} F] + β/2 Σ_{m=0}^{k−1} E[p_m p_{k−1−m} F] + Σ_j m_j E[p_{m_j+k−1} F / p_{m_j}],

which lowers the degree by one each time. Divide by (T)_{degree} for a fixed trace, T = N(c + 1) + βN(N−1)/2.
No determinant, symmetric function or expansion of the density enters.

References: I. Dumitriu, A. Edelman, J. Math. Phys. 47 (2006) 063302; P. J. Forrester, *Log-Gases and Random Matrices*
(2010), section 4.6.
"""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache

from simplexcub.errors import InputError
from simplexcub.moments.dirichlet import rising
from simplexcub.moments.schur import monomial_from_power_sums

HIGHEST_LOOP_DEGREE = 60


@lru_cache(maxsize=262144)
def _free_power_sum(parts: tuple[int, ...], n: int, beta: Fraction, c: Fraction) -> Fraction:
    if not parts:
        return Fraction(1)
    rest, k = parts[:-1], parts[-1]
    if k == 1:
        total = n * (c + 1) + beta * Fraction(n * (n - 1), 2) + sum(rest)
        return total * _free_power_sum(rest, n, beta, c)

    def mean(*more: int) -> Fraction:
        return _mean_with(rest, more, n, beta, c)

    value = (c + k - k * beta / 2) * mean(k - 1)
    for m in range(k):
        value += beta / 2 * mean(m, k - 1 - m)
    for j, part in enumerate(rest):
        value += part * _mean_with(rest[:j] + rest[j + 1 :], (part + k - 1,), n, beta, c)
    return value


def _mean_with(rest: tuple[int, ...], more: tuple[int, ...], n: int, beta: Fraction, c: Fraction) -> Fraction:
    factor = Fraction(n) ** more.count(0)
    parts = tuple(sorted((*rest, *(m for m in more if m)), reverse=True))
    return factor * _free_power_sum(parts, n, beta, c)


def loop_power_sum(parts: tuple[int, ...], n: int, beta: Fraction, c: Fraction) -> Fraction:
    """E[Π p_k over `parts`] over the fixed-trace β-ensemble; `parts` is a partition.

    Raises
    ------
    InputError
        Degree above 60.
    """
    degree = sum(parts)
    if degree > HIGHEST_LOOP_DEGREE:
        raise InputError(f"the degree of a loop equation must be at most {HIGHEST_LOOP_DEGREE}", degree)
    trace = n * (c + 1) + beta * Fraction(n * (n - 1), 2)
    return _free_power_sum(parts, n, beta, c) / rising(trace, degree)


@lru_cache(maxsize=65536)
def loop_moment(exponents: tuple[int, ...], beta: Fraction, c: Fraction) -> Fraction:
    """E[λ^a] over the fixed-trace β-ensemble, N = len(exponents)."""
    n = len(exponents)
    return monomial_from_power_sums(exponents, lambda mu: loop_power_sum(mu, n, beta, c))
