"""Rules for functions of the spectrum, from rules that the search makes on a plain simplex."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from math import comb

from mpmath import mp, mpf

from simplexcub.measures import Measure
from simplexcub.measures.chamber import spectrum
from simplexcub.rounded import rule_from_nodes, rule_from_representatives
from simplexcub.rule import Provenance, Rule
from simplexcub.search.gauss import gauss_nodes, recurrence

Orbit = tuple[tuple[int, ...], list[mpf], mpf]


def gauss_pairs(measure: Measure, degree: int, *, digits: int, provenance: Provenance) -> Rule:
    """The rule with the fewest representatives for symmetric functions of N = 2 components.

    They are polynomials in u = (λ_1 − λ_2)², so a Gauss rule in u with m nodes reaches degree 4 m − 1.
    """
    m = degree // 4 + 1
    nodes, weights = gauss_nodes(*recurrence(lambda k: _even_moment(measure, k), m), digits)
    orbits: list[Orbit] = []
    with mp.workdps(digits + 15):
        for u, weight in zip(nodes, weights, strict=True):
            orbits.append(((1, 1), [(1 + mp.sqrt(u)) / 2, (1 - mp.sqrt(u)) / 2], weight))
    return rule_from_representatives(measure, 4 * m - 1, orbits, digits=digits, provenance=provenance)


def _even_moment(measure: Measure, k: int) -> Fraction:
    """E[(λ_1 − λ_2)^(2k)]."""
    terms = ((-1) ** j * comb(2 * k, j) * measure.moment((2 * k - j, j)) for j in range(2 * k + 1))
    return sum(terms, Fraction(0))


def folded(rule: Rule) -> Rule:
    """A rule for all polynomials as one for symmetric ones: coordinates sorted, copies of a node joined."""
    weights: dict[tuple[str, ...], mpf] = {}
    with mp.workdps(rule.digits + 10):
        for node, weight in zip(rule.node_decimals, rule.exact_weights(), strict=True):
            key = tuple(sorted(node, key=mpf, reverse=True))
            weights[key] = weights.get(key, mpf(0)) + weight
        orbits: list[Orbit] = []
        for key, weight in weights.items():
            values = list(dict.fromkeys(key))
            orbits.append((tuple(key.count(v) for v in values), [mpf(v) for v in values], weight))
    return rule_from_representatives(rule.measure, rule.degree, orbits, digits=rule.digits, provenance=rule.provenance)


def unfolded(rule: Rule, measure: Measure, digits: int) -> Rule:
    """A rule in coordinates of the chamber as one for the ordered spectrum of `measure`."""
    nodes = []
    with mp.workdps(rule.digits + 10):
        for node in rule.node_decimals:
            exact = spectrum([Fraction(x) for x in node])
            nodes.append([mpf(x.numerator) / x.denominator for x in exact])
        weights = rule.exact_weights()
    made_by = replace(rule.provenance, method=f"{rule.provenance.method} on the chamber")
    return rule_from_nodes(measure, rule.degree, nodes, weights, digits=digits, provenance=made_by, space="ordered")
