"""Exact moments of Bures measures as a mixture of Wishart matrices over a Cauchy ensemble.

Gaussian integration over a Hermitian matrix H turns the Bures pair factors into matrices,

    ∫ dH exp(−Tr X H²) ∝ Π_i λ_i^{−1/2} Π_{i<j} 1/(λ_i + λ_j),

so that X with density ∝ Π λ_i^c Π (λ_i − λ_j)²/(λ_i + λ_j) e^{−λ_i} is a Wishart matrix of scale (1 + H²)^{−1} and
κ = N + c + 1/2 degrees of freedom, where H has density ∝ det(1 + H²)^{−κ}. Means of Schur functions follow:

    E[s_ν(X) | H] = s_ν(y) Π_{(i,j)∈ν} (κ + j − i),      y the eigenvalues of (1 + H²)^{−1}.

The weight of H is even, so the y are the union of two independent Jacobi unitary ensembles, one from the even and one
from the odd orthogonal polynomials, with n = ⌈N/2⌉, a = κ − n + 1/2 and n = ⌊N/2⌋, a = κ − n − 1/2, and each has

    E[s_α] = s_α(1^n) Π_{(i,j)∈α} (a + j − i)/(κ + j − i).

No pair kernel occurs: the route shares nothing with the alternating sum.

References: V. A. Osipov, H.-J. Sommers, K. Życzkowski, J. Phys. A 43 (2010) 055302 for the mixture, there with
H = i(1 − U)/(1 + U); A. Edelman, M. La Croix, Random Matrices Theory Appl. 4 (2015) 1550021 for the even–odd split;
K. W. J. Kadell, Adv. Math. 130 (1997) 33 for the Jacobi means.
"""

from __future__ import annotations

from collections import Counter
from fractions import Fraction
from functools import lru_cache
from itertools import product

from simplexcub.moments.dirichlet import rising
from simplexcub.moments.partitions import orderings, partitions
from simplexcub.moments.reach import check_reach
from simplexcub.moments.schur import content_product, monomial_from_power_sums, schur_at_ones
from simplexcub.moments.transitions import kostka, power_sums_in_schur


@lru_cache(maxsize=65536)
def _jacobi_power_sum(parts: tuple[int, ...], n: int, a: Fraction, kappa: Fraction) -> Fraction:
    total = Fraction(0)
    for alpha, character in power_sums_in_schur(parts, n).items():
        mean = schur_at_ones(alpha, n) * content_product(alpha, a) / content_product(alpha, kappa)
        total += character * mean
    return total


@lru_cache(maxsize=65536)
def _jacobi_monomial(parts: tuple[int, ...], n: int, a: Fraction, kappa: Fraction) -> Fraction:
    """E[m_parts] over one Jacobi ensemble of n points; zero where there are more parts than points."""
    if len(parts) > n:
        return Fraction(0)
    one = monomial_from_power_sums(parts, lambda mu: _jacobi_power_sum(mu, n, a, kappa), n)
    return one * orderings(parts, n)


@lru_cache(maxsize=65536)
def _cauchy_monomial(mu: tuple[int, ...], n: int, kappa: Fraction) -> Fraction:
    """E[m_μ(y)] over the eigenvalues y of (1 + H²)^{−1}, split between the two Jacobi ensembles."""
    even, odd = (n + 1) // 2, n // 2
    half = Fraction(1, 2)
    counts = Counter(mu)
    total = Fraction(0)
    for share in product(*(range(m + 1) for m in counts.values())):
        first = tuple(p for p, s in zip(counts, share, strict=True) for _ in range(s))
        second = tuple(p for (p, m), s in zip(counts.items(), share, strict=True) for _ in range(m - s))
        if len(first) <= even and len(second) <= odd:
            total += _jacobi_monomial(first, even, kappa - even + half, kappa) * _jacobi_monomial(
                second, odd, kappa - odd - half, kappa
            )
    return total


@lru_cache(maxsize=65536)
def cauchy_schur_mean(nu: tuple[int, ...], n: int, c: Fraction) -> Fraction:
    """E[s_ν] over the fixed-trace Bures–Hall measure of N eigenvalues and exponent c."""
    degree = sum(nu)
    kappa = n + c + Fraction(1, 2)
    total = Fraction(0)
    for mu in partitions(degree, n):
        number = kostka(nu, mu)
        if number:
            total += number * _cauchy_monomial(mu, n, kappa)
    homogeneity = n * (c + 1) + Fraction(n * (n - 1), 2)
    return total * content_product(nu, kappa) / rising(homogeneity, degree)


@lru_cache(maxsize=65536)
def cauchy_power_sum(parts: tuple[int, ...], n: int, c: Fraction) -> Fraction:
    """E[Π p_k over `parts`] over the fixed-trace Bures–Hall measure."""
    check_reach(sum(parts), n, 700)
    total = Fraction(0)
    for nu, character in power_sums_in_schur(parts, n).items():
        total += character * cauchy_schur_mean(nu, n, c)
    return total


@lru_cache(maxsize=65536)
def cauchy_moment(exponents: tuple[int, ...], c: Fraction) -> Fraction:
    """E[λ^a] over the fixed-trace Bures–Hall measure, N = len(exponents)."""
    n = len(exponents)
    return monomial_from_power_sums(exponents, lambda mu: cauchy_power_sum(mu, n, c))
