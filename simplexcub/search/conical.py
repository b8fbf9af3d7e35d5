"""Conical-product rules: Gauss rules along each break of a stick, for every measure with a polynomial density.

With λ_1 = x_1, λ_2 = (1 − x_1) x_2, … a Dirichlet measure is a product of Beta measures in x, and a polynomial of
degree d in λ has degree ≤ d in each x. A density Π (λ_i − λ_j)² on top multiplies the weights and costs its own degree
N (N − 1) in exactness. Such a rule always exists, is positive and inside, and is the one a searched rule must beat.

Reference: A. H. Stroud, *Approximate Calculation of Multiple Integrals* (1971), 2.3.
"""

from __future__ import annotations

from itertools import combinations, product

from mpmath import mp, mpf

from simplexcub.errors import NothingFound
from simplexcub.measures import Measure
from simplexcub.rounded import rule_from_nodes
from simplexcub.rule import Provenance, Rule
from simplexcub.search.gauss import beta_gauss

MOST_NODES = 50_000
_TOLD_IN_FULL = 10**12


def conical_count(measure: Measure, degree: int) -> int:
    """Number of product nodes before those of zero weight are dropped."""
    alpha, vandermonde = measure.over_dirichlet()
    extra = len(alpha) * (len(alpha) - 1) if vandermonde else 0
    return int(((degree + extra) // 2 + 1) ** (len(alpha) - 1))


def conical_rule(measure: Measure, degree: int, *, digits: int, provenance: Provenance) -> Rule:
    """The conical-product rule of the given degree.

    Raises
    ------
    NothingFound
        The product would have more than ``MOST_NODES`` nodes.
    """
    count = conical_count(measure, degree)
    if count > MOST_NODES:
        told = str(count) if count < _TOLD_IN_FULL else f"some 10^{len(str(count)) - 1}"
        raise NothingFound(
            f"rule of degree {degree} for {measure}",
            f"the search found none, and the conical product would need {told} nodes",
            "Give the search a larger budget, or ask a lower degree.",
        )
    alpha, vandermonde = measure.over_dirichlet()
    n = len(alpha)
    per_axis = round(count ** (1 / (n - 1)))
    axes = [beta_gauss(alpha[i], sum(alpha[i + 1 :]), per_axis, digits) for i in range(n - 1)]
    nodes, weights = [], []
    with mp.workdps(digits + 15):
        for picks in product(range(per_axis), repeat=n - 1):
            left, weight, node = mpf(1), mpf(1), []
            for (x, w), pick in zip(axes, picks, strict=True):
                node.append(left * x[pick])
                left *= 1 - x[pick]
                weight *= w[pick]
            node.append(left)
            for a, b in combinations(node, 2) if vandermonde else ():
                weight *= (a - b) ** 2
            nodes.append(node)
            weights.append(weight)
        total = mp.fsum(weights)
        negligible = mpf(10) ** (-digits - 5)  # where two coordinates agree the density vanishes
        kept = [(node, w / total) for node, w in zip(nodes, weights, strict=True) if w > negligible * total]
        nodes, weights = [node for node, _ in kept], [w for _, w in kept]
    return rule_from_nodes(measure, degree, nodes, weights, digits=digits, provenance=provenance)
