"""Means of Σ λ_i^q for real q, and of Σ λ_i^k ln λ_i, in closed form.

The alternating sum holds for real exponents. With one exponent q its N! permutations are N different terms,

    E[Σ λ_i^q] = Γ(T)/Γ(T + q) Σ_{s=0}^{N−1} (y_s)_q D_s(q) S_s(q),       y_s = s + c + 1,  (y)_q = Γ(y + q)/Γ(y)
    D_s(q) = Π_{j≠s} (q + s − j)/(s − j),     S_s(q) = 1 or, for Bures, Π_{j≠s} (y_s + y_j)/(q + y_s + y_j).

The term s = 0 has a pole at q = −(c + 1): the mean is finite for larger q alone, and integer q give rational means. The
derivative at an integer k is a rational number plus E[p_k] (ψ(c + 1) − ψ(T)). For Dirichlet measures each component is
a Beta variable, E[λ_i^q] = (α_i)_q/(Σα)_q.

References: D. N. Page, Phys. Rev. Lett. 71 (1993) 1291; S. K. Foong, S. Kanno, Phys. Rev. Lett. 72 (1994) 1148;
A. Sarkar, S. Kumar, J. Phys. A 52 (2019) 295203; L. Wei, J. Phys. A 53 (2020) 235203.
"""

from __future__ import annotations

import math
from collections import Counter, defaultdict
from collections.abc import Callable, Iterable, Sequence
from fractions import Fraction
from typing import TypeAlias

from mpmath import mp, mpf

from simplexcub.moments.alternant import Kernel, homogeneity
from simplexcub.moments.digamma import DigammaSum
from simplexcub.moments.dirichlet import rising

Power: TypeAlias = Fraction | mpf


def _mp(x: Power) -> mpf:
    return mpf(x.numerator) / x.denominator if isinstance(x, Fraction) else mpf(x)


def stable_sum(terms: Callable[[], Iterable[mpf]], dps: int) -> mpf:
    """Σ terms() to `dps` digits; repeated with more working digits where the terms cancel."""
    extra = 15
    while True:
        with mp.workdps(dps + extra):
            values = list(terms())
            total = mp.fsum(values)
            largest = max(mp.mag(v) for v in values if v)
            lost = int((largest - mp.mag(total)) * 0.302) + 1 if total else 2 * (dps + extra)
        if lost < extra - 5:
            with mp.workdps(dps):
                return +total
        extra = lost + 15


def dirichlet_component_power(a: Fraction, whole: Fraction, q: Power) -> mpf:
    """E[λ_i^q] = (α_i)_q/(Σα)_q at the working precision."""
    low, total, x = _mp(a), _mp(whole), _mp(q)
    return mp.gammaprod([low + x, total], [low, total + x])


def dirichlet_power_mean(alpha: Sequence[Fraction], q: Power, dps: int) -> mpf:
    """E[Σ λ_i^q] over Dirichlet(α), q > −min α."""
    whole = sum(alpha, Fraction(0))
    counts = Counter(alpha)
    return stable_sum(lambda: [m * dirichlet_component_power(a, whole, q) for a, m in counts.items()], dps)


def dirichlet_log_mean(alpha: Sequence[Fraction], k: int) -> DigammaSum:
    """E[Σ λ_i^k ln λ_i] over Dirichlet(α), k ≥ 1 an integer."""
    whole = sum(alpha, Fraction(0))
    mass = rising(whole, k)
    digammas: dict[Fraction, Fraction] = defaultdict(Fraction)
    for a in alpha:
        mean = rising(a, k) / mass
        digammas[a + k] += mean
        digammas[whole + k] -= mean
    return DigammaSum.of(0, digammas)


def eigenvalue_power_mean(q: Power, n: int, c: Fraction, kernel: Kernel, dps: int) -> mpf:
    """E[Σ λ_i^q] of the fixed-trace ensemble for q > −(c + 1), q not an integer."""

    def terms() -> Iterable[mpf]:
        x, low, trace = _mp(q), _mp(c) + 1, _mp(homogeneity(n, c, kernel))
        weight = mp.gammaprod([trace, low + x], [trace + x, low])
        # D_0(q) = Π_{j≥1} (1 − q/j); each next s changes one factor at either end
        for j in range(1, n):
            weight *= 1 - x / j
        for s in range(n):
            y = low + s
            term = weight
            if kernel is Kernel.RATIO:
                z = y + low
                term *= mp.gammaprod([z + n, z + x], [z, z + n + x]) * (2 * y + x) / (2 * y)
            yield term
            weight *= (y + x) / y * (x + s + 1) / (x + s + 1 - n) * (s + 1 - n) / (s + 1)

    return stable_sum(terms, dps)


def _shift_product(s: int, k: int, n: int) -> Fraction:
    """Π_{j≠s, j≠s+k} (k + s − j) / Π_{j≠s} (s − j) over 0 ≤ j < n."""
    top = math.prod(k + s - j for j in range(n) if j not in (s, s + k))
    return Fraction(top, math.prod(s - j for j in range(n) if j != s))


def eigenvalue_inverse_mean(k: int, n: int, c: Fraction, kernel: Kernel) -> Fraction:
    """E[Σ λ_i^{−k}] of the fixed-trace ensemble for integers 1 ≤ k < c + 1."""
    total = Fraction(0)
    for s in range(n):
        if s - k >= 0:
            continue  # D_s(−k) has the factor −k + s − j with j = s − k
        y = s + c + 1
        term = _shift_product(s, -k, n) / rising(y - k, k)
        if kernel is Kernel.RATIO:
            z = y + c + 1
            term *= rising(z + n - k, k) / rising(z - k, k) * (2 * y - k) / (2 * y)
        total += term
    return total * rising(homogeneity(n, c, kernel) - k, k)


def eigenvalue_log_mean(k: int, n: int, c: Fraction, kernel: Kernel) -> DigammaSum:
    """E[Σ λ_i^k ln λ_i] of the fixed-trace ensemble, k ≥ 1 an integer: the derivative of the closed form at q = k."""
    trace = homogeneity(n, c, kernel)
    mass = rising(trace, k)
    rational = Fraction(0)
    digammas: dict[Fraction, Fraction] = defaultdict(Fraction)
    for s in range(n):
        y = s + c + 1
        z = y + c + 1
        weight = rising(y, k) / mass
        if kernel is Kernel.RATIO:
            weight *= rising(z, k) / rising(z + n, k) * (2 * y + k) / (2 * y)
        if s + k < n:
            # D_s(k) = 0 because of its factor j = s + k; only the derivative of that factor remains
            falls = Fraction(math.prod(range(s + 1, s + k + 1)), math.prod(range(n - s - k, n - s)))
            rational += weight * falls * (-1) ** k / k
            continue
        weight *= Fraction((-1) ** (n - 1 - s) * math.prod(range(s + 1, s + k + 1)), k)
        weight /= math.factorial(k + s - n) * math.factorial(n - 1 - s)
        one = Fraction(1)
        digammas[y + k] += weight
        digammas[trace + k] -= weight
        digammas[k + s + one] += weight
        digammas[k + s - n + one] -= weight
        rational -= weight / k
        if kernel is Kernel.RATIO:
            digammas[z + n + k] -= weight
            digammas[z + k] += weight
            rational += weight / (2 * y + k)
    return DigammaSum.of(rational, digammas)
