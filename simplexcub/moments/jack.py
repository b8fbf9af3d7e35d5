"""Exact moments of β-ensembles through Jack polynomials.

For the density ∝ Π λ_i^c e^{−λ_i} Π |λ_i − λ_j|^β, with α = 2/β and the Jack polynomials P_κ normalised to leading
coefficient 1,

    E[P_κ] = P_κ(1^N) Π_{(i,j)∈κ} (c + 1 + (N − i)/α + j − 1),
    P_κ(1^N) = Π_{(i,j)∈κ} (N + (j − 1)α − (i − 1)) / (α·arm(i, j) + leg(i, j) + 1),

divided by (T)_{|κ|} for a fixed trace. The coefficients of P_κ in monomials come from its being an eigenfunction of the
Laplace–Beltrami operator; solving the triangular system gives the means of the monomials.

The table for a degree grows with the square of the number of its partitions into N parts or fewer; up to 250 of them
are taken: degree 16 for any N, 21 for N = 5, 28 for N = 4, 51 for N = 3, 499 for N = 2.

References: R. J. Muirhead, *Aspects of Multivariate Statistical Theory* (1982), section 7.2; I. G. Macdonald,
*Symmetric Functions and Hall Polynomials* (1995), VI.10; K. W. J. Kadell, Adv. Math. 130 (1997) 33.
"""

from __future__ import annotations

from collections import defaultdict
from fractions import Fraction
from functools import lru_cache

from simplexcub.moments.dirichlet import rising
from simplexcub.moments.partitions import orderings, partitions
from simplexcub.moments.reach import check_reach
from simplexcub.moments.transitions import power_sums_in_augmented

MOST_JACK_SHAPES = 250


@lru_cache(maxsize=256)
def jack_in_monomials(degree: int, n: int, alpha: Fraction) -> dict[tuple[int, ...], dict[tuple[int, ...], Fraction]]:
    """Every P_κ of a degree in monomials m_μ of at most `n` variables.

    Examples
    --------
    >>> jack_in_monomials(2, 2, Fraction(2))
    {(2,): {(2,): Fraction(1, 1), (1, 1): Fraction(2, 3)}, (1, 1): {(1, 1): Fraction(1, 1)}}
    """
    shapes = list(partitions(degree, n))
    energy = {mu: sum(m * (m - 1 - Fraction(2 * i) / alpha) for i, m in enumerate(mu)) for mu in shapes}
    raisings = {mu: _raisings(mu) for mu in shapes}
    rows = {}
    for at, kappa in enumerate(shapes):
        row = {kappa: Fraction(1)}
        for mu in shapes[at + 1 :]:
            total = sum((weight * row[up] for up, weight in raisings[mu].items() if up in row), Fraction(0))
            if total:
                row[mu] = 2 / alpha * total / (energy[kappa] - energy[mu])
        rows[kappa] = row
    return rows


def _raisings(mu: tuple[int, ...]) -> dict[tuple[int, ...], int]:
    """Partitions reached by moving t boxes from a later part to an earlier one, with the operator's factor."""
    found: dict[tuple[int, ...], int] = defaultdict(int)
    for j in range(len(mu)):
        for i in range(j):
            for t in range(1, mu[j] + 1):
                moved = list(mu)
                moved[i] += t
                moved[j] -= t
                found[tuple(sorted((m for m in moved if m), reverse=True))] += mu[i] - mu[j] + 2 * t
    return found


def _jack_mean(kappa: tuple[int, ...], n: int, alpha: Fraction, c: Fraction) -> Fraction:
    columns = [sum(part > j for part in kappa) for j in range(kappa[0] if kappa else 0)]
    value = Fraction(1)
    for i, part in enumerate(kappa):
        value *= rising(c + 1 + (n - 1 - i) / alpha, part)
        for j in range(part):
            value *= (n + j * alpha - i) / (alpha * (part - j - 1) + columns[j] - i)
    return value


@lru_cache(maxsize=256)
def jack_monomial_means(degree: int, n: int, beta: Fraction, c: Fraction) -> dict[tuple[int, ...], Fraction]:
    """E[m_μ] over the fixed-trace β-ensemble for every partition μ of `degree` into at most N parts.

    Raises
    ------
    InputError
        More than 250 such partitions.
    """
    check_reach(degree, n, MOST_JACK_SHAPES)
    alpha = 2 / beta
    trace = rising(n * (c + 1) + beta * Fraction(n * (n - 1), 2), degree)
    rows = jack_in_monomials(degree, n, alpha)
    means: dict[tuple[int, ...], Fraction] = {}
    for kappa in reversed(rows):
        below = sum((x * means[mu] for mu, x in rows[kappa].items() if mu != kappa), Fraction(0))
        means[kappa] = _jack_mean(kappa, n, alpha, c) / trace - below
    return means


def jack_moment(exponents: tuple[int, ...], beta: Fraction, c: Fraction) -> Fraction:
    """E[λ^a] over the fixed-trace β-ensemble, N = len(exponents)."""
    mu = tuple(sorted((a for a in exponents if a), reverse=True))
    return jack_monomial_means(sum(mu), len(exponents), beta, c)[mu] / orderings(exponents)


def jack_power_sum(parts: tuple[int, ...], n: int, beta: Fraction, c: Fraction) -> Fraction:
    """E[Π p_k over `parts`] over the fixed-trace β-ensemble; `parts` is a partition."""
    means = jack_monomial_means(sum(parts), n, beta, c)
    total = Fraction(0)
    for mu, coefficient in power_sums_in_augmented(parts).items():
        if len(mu) <= n:
            total += coefficient * means[mu] * rising(n - len(mu) + 1, len(mu)) / orderings(mu, n)
    return total
