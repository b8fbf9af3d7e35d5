"""Gauss rules in one variable from exact moments, to any number of digits.

The Chebyshev algorithm turns moments into the recurrence x p_k = p_{k+1} + a_k p_k + b_k p_{k−1} in rational
arithmetic; the nodes are the eigenvalues of its Jacobi matrix, found in double precision and polished by Newton's
method on the recurrence in extended precision.

References: G. H. Golub, J. H. Welsch, Math. Comp. 23 (1969) 221; W. Gautschi, *Orthogonal Polynomials* (2004), 2.1.7.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import lru_cache

import numpy as np
from mpmath import mp, mpf

from simplexcub.errors import InputError
from simplexcub.measures import Dirichlet, Measure
from simplexcub.rounded import rule_from_nodes, rule_from_orbits
from simplexcub.rule import Provenance, Rule


def recurrence(moment: Callable[[int], Fraction], n: int) -> tuple[list[Fraction], list[Fraction]]:
    """Coefficients a_0 … a_{n−1} and b_0 … b_{n−1} (b_0 = 1) of the monic orthogonal polynomials of E[x^k]."""
    below = [Fraction(0)] * (2 * n)
    row = [moment(k) for k in range(2 * n)]
    a, b = [row[1] / row[0]], [row[0]]
    for k in range(1, n):
        new = [Fraction(0)] * (2 * n)
        for j in range(k, 2 * n - k):
            new[j] = row[j + 1] - a[-1] * row[j] - b[-1] * below[j]
        a.append(new[k + 1] / new[k] - row[k] / row[k - 1])
        b.append(new[k] / row[k - 1])
        below, row = row, new
    return a, b


def gauss_nodes(a: Sequence[Fraction], b: Sequence[Fraction], digits: int) -> tuple[list[mpf], list[mpf]]:
    """Nodes, rising, and weights, summing to 1, of the Gauss rule with these recurrence coefficients."""
    n = len(a)
    off = np.sqrt([float(x) for x in b[1:]])
    jacobi = np.diag([float(x) for x in a]) + np.diag(off, 1) + np.diag(off, -1)
    starts = np.linalg.eigvalsh(jacobi)
    with mp.workdps(digits + 15 + n // 2):
        alpha = [mpf(x.numerator) / x.denominator for x in a]
        beta = [mpf(x.numerator) / x.denominator for x in b]
        small = mpf(10) ** (-(digits + 10))
        nodes, weights = [], []
        for start in starts:
            x = mpf(float(start))
            for _ in range(60):
                p, dp, _ = _polynomials(alpha, beta, x)
                change = p / dp
                x -= change
                if abs(change) < small:
                    break
            *_, norm = _polynomials(alpha, beta, x)
            nodes.append(x)
            weights.append(1 / norm)
    return nodes, weights


def _polynomials(alpha: Sequence[mpf], beta: Sequence[mpf], x: mpf) -> tuple[mpf, mpf, mpf]:
    """p_n(x), p_n'(x), and Σ_{k<n} p_k(x)² / ‖p_k‖²."""
    before, p, dbefore, dp = mpf(0), mpf(1), mpf(0), mpf(0)
    norm, total = mpf(1), mpf(0)
    for a, b in zip(alpha, beta, strict=True):
        norm *= b
        total += p * p / norm
        before, p, dbefore, dp = p, (x - a) * p - b * before, dp, p + (x - a) * dp - b * dbefore
    return p, dp, total


@lru_cache(maxsize=256)
def beta_gauss(a: Fraction, b: Fraction, n: int, digits: int) -> tuple[list[mpf], list[mpf]]:
    """Gauss rule with n nodes for the Beta(a, b) measure on [0, 1]."""
    measure = Dirichlet((a, b))
    return gauss_nodes(*recurrence(lambda k: measure.moment((k, 0)), n), digits)


def gauss_rule(measure: Measure, degree: int, *, digits: int, provenance: Provenance) -> Rule:
    """The Gauss rule for a measure of N = 2 components; its degree is the smallest odd number ≥ `degree`."""
    if measure.N != 2:
        raise InputError("a Gauss rule needs N = 2", measure.N)
    n = degree // 2 + 1
    nodes, weights = gauss_nodes(*recurrence(lambda k: measure.moment((k, 0)), n), digits)
    with mp.workdps(digits + 15):
        if not measure.is_symmetric:
            pairs = [[x, 1 - x] for x in nodes]
            return rule_from_nodes(measure, 2 * n - 1, pairs, weights, digits=digits, provenance=provenance)
        orbits: list[tuple[tuple[int, ...], list[mpf], mpf]] = []
        for x, w in zip(nodes[n // 2 + n % 2 :], weights[n // 2 + n % 2 :], strict=True):
            orbits.append(((1, 1), [x, 1 - x], 2 * w))
        if n % 2:
            orbits.insert(0, ((2,), [mpf(1) / 2], weights[n // 2]))
    return rule_from_orbits(measure, 2 * n - 1, orbits, digits=digits, provenance=provenance)
