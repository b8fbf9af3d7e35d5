r"""Σ_k w_k p(λ^(k)) − E[p] for every monomial of one degree, in integer fixed point.

Spaces ``all`` and ``ordered``: p = λ^a with |a| = t. On the simplex Σ λ_i = 1, so these span every polynomial of
degree ≤ t.
Space ``symmetric``: p = m_ν / #ν, the mean of λ^a over the #ν different orderings a of the partition ν of t; these
span the symmetric polynomials of degree ≤ t for the same reason. The monomial symmetric functions come from adding one
variable at a time,

    m_ν(x_1 … x_i) = m_ν(x_1 … x_{i−1}) + Σ_{p ∈ ν} x_i^p m_{ν∖p}(x_1 … x_{i−1}),

p running over the different parts of ν, so the cost grows with N and not with N!.

Numbers are integers in units of 10^(−Q), products are cut off to that unit, and Q is taken so large that the cut-offs
are far below the tolerance; a bound on their sum is added to it. The tolerance of a monomial is what the last printed
digits can do to the sum, to first order:

    T(p) = Σ_k ( u(w_k) p(λ^(k)) + |w_k| Σ_i u(λ_i^(k)) ∂_i p(λ^(k)) ).

It is carried along the products as the second half of a dual number, in double precision.

References: I. G. Macdonald, *Symmetric Functions and Hall Polynomials* (1995), I.2.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction
from functools import lru_cache
from operator import mul

import numpy as np
from numpy.typing import NDArray

from simplexcub.measures import Measure
from simplexcub.rule import Space
from simplexcub.symmetry import distinct_permutations
from simplexcub.verify.printed import Printed

FloatArray = NDArray[np.float64]
Exponents = tuple[int, ...]

GUARD_DIGITS = 8


@dataclass(frozen=True)
class DegreeCheck:
    """The comparison of all monomials of one degree.

    Attributes
    ----------
    degree : int
    moments_checked : int
        Monomials covered, with those that follow by symmetry.
    max_residual : str
        Largest |Σ w p − E[p]|, two digits.
    worst_exponents : tuple of int
        The monomial it fell on.
    ratio : float
        Largest |Σ w p − E[p]| / T(p); at most 1 where the printed digits are consistent with this degree.
    offender : tuple of int
        The monomial on which the ratio is largest.
    offence : str
        |Σ w p − E[p]| of that monomial, two digits.
    """

    degree: int
    moments_checked: int
    max_residual: str
    worst_exponents: Exponents
    ratio: float
    offender: Exponents
    offence: str


@dataclass(frozen=True)
class _Terms:
    """One value per node, with its size and first-order uncertainty in units of 10^(−D)."""

    values: list[int]
    size: FloatArray
    slack: FloatArray

    def times(self, other: _Terms, one: int) -> _Terms:
        return _Terms(
            [p * q // one for p, q in zip(self.values, other.values, strict=True)],
            self.size * other.size,
            self.size * other.slack + self.slack * other.size,
        )

    def plus(self, other: _Terms) -> _Terms:
        return _Terms(
            [p + q for p, q in zip(self.values, other.values, strict=True)],
            self.size + other.size,
            self.slack + other.slack,
        )

    def inner(self, other: _Terms, one: int) -> tuple[int, float]:
        """Σ over the nodes of the product, cut off once, and its uncertainty."""
        slack = float(self.size @ other.slack + self.slack @ other.size)
        return sum(map(mul, self.values, other.values)) // one, slack


def check_degree(printed: Printed, measure: Measure, degree: int, space: Space, *, invariant: bool) -> DegreeCheck:
    """Compare the printed sums with the exact means over all monomials of one degree.

    Parameters
    ----------
    printed : Printed
    measure : Measure
        Its means are computed by the last of its routes.
    degree : int
    space : {"all", "symmetric", "ordered"}
        In the last `measure` must be the law of the ordered spectrum.
    invariant : bool
        The printed set and the measure are both invariant under all permutations: sorted exponents then stand for all.
    """
    n, nodes = measure.N, len(printed.nodes)
    means = _means(measure, degree, space, invariant)
    smallest = min(means.values())
    depth = len(str(smallest.denominator // smallest.numerator))
    orderings = {a: _orderings(a) for a in means}
    spread = max(orderings.values()) if space == "symmetric" else 1
    q = printed.places + GUARD_DIGITS + depth + len(str(nodes * (degree + n) * spread))
    if not printed.weight_units.any():
        q = printed.places * (degree + 1)  # every product is then an exact integer
    one = 10**q
    powers = _powers(printed, degree, q)
    weights = _terms(list(printed.weights), printed.weight_units, printed.places, q)
    if space != "symmetric":
        sums = _monomial_sums(weights, powers, degree, one, invariant)
    else:
        sums = _symmetric_sums(weights, powers, degree, one)
    cut_off = _cut_off(printed, degree, n, q) if printed.weight_units.any() else 0

    worst, offence, ratio = Fraction(-1), Fraction(-1), -1.0
    worst_exponents = offender = (0,) * n
    for exponents, (total, slack) in sums:
        count = orderings[exponents] if space == "symmetric" else 1
        residual = abs(Fraction(total, count * one) - means[exponents])
        tolerance = Fraction(slack / count) / 10**printed.digits + Fraction(cut_off, one)
        if residual > worst:
            worst, worst_exponents = residual, exponents
        relative = _quotient(residual, tolerance)
        if relative > ratio:
            ratio, offender, offence = relative, exponents, residual
    checked = sum(orderings.values()) if space != "symmetric" and invariant else len(means)
    return DegreeCheck(degree, checked, short(worst), worst_exponents, ratio, offender, short(offence))


def short(value: Fraction) -> str:
    """`value` to two digits, e.g. ``3.1e-52``; ``0`` where it is exactly zero."""
    if not value:
        return "0"
    return f"{Decimal(value.numerator) / Decimal(value.denominator):.1e}"


@lru_cache(maxsize=65536)
def _cached_mean(measure: Measure, exponents: Exponents) -> Fraction:
    return measure.moment(exponents, route=measure.routes[-1])


def mean(measure: Measure, exponents: Exponents) -> Fraction:
    if measure.is_symmetric:
        exponents = tuple(sorted(exponents, reverse=True))
    return _cached_mean(measure, exponents)


def _means(measure: Measure, degree: int, space: Space, invariant: bool) -> dict[Exponents, Fraction]:
    if space != "symmetric" and not invariant:
        return {a: mean(measure, a) for a in compositions(degree, measure.N)}
    sorted_exponents = partitions(degree, measure.N, degree)
    if measure.is_symmetric:
        return {a: mean(measure, a) for a in sorted_exponents}
    return {
        nu: sum((mean(measure, a) for a in distinct_permutations(nu)), Fraction(0)) / _orderings(nu)
        for nu in sorted_exponents
    }


def compositions(total: int, length: int) -> Iterator[Exponents]:
    """Every tuple of `length` non-negative integers with sum `total`."""
    if length == 1:
        yield (total,)
        return
    for a in range(total, -1, -1):
        for rest in compositions(total - a, length - 1):
            yield (a, *rest)


def partitions(total: int, length: int, largest: int) -> Iterator[Exponents]:
    """Every descending tuple of `length` non-negative integers, none above `largest`, with sum `total`."""
    if length == 1:
        if total <= largest:
            yield (total,)
        return
    for a in range(min(total, largest), -(-total // length) - 1, -1):
        for rest in partitions(total - a, length - 1, a):
            yield (a, *rest)


def _orderings(exponents: Exponents) -> int:
    count = math.factorial(len(exponents))
    for value in set(exponents):
        count //= math.factorial(exponents.count(value))
    return count


def _quotient(residual: Fraction, tolerance: Fraction) -> float:
    if not residual:
        return 0.0
    if residual > tolerance * 10**300:
        return math.inf
    return float(residual / tolerance)


def _terms(values: list[int], units: FloatArray, places: int, q: int, largest: float = math.inf) -> _Terms:
    lift = 10 ** (q - places)
    size = np.array([abs(v) / 10**places for v in values])
    return _Terms([v * lift for v in values], np.minimum(size, largest), units)


def _powers(printed: Printed, degree: int, q: int) -> list[list[_Terms]]:
    """``powers[i][a]``: λ_i^a at every node."""
    one, nodes = 10**q, len(printed.nodes)
    unity = _Terms([one] * nodes, np.ones(nodes), np.zeros(nodes))
    table = []
    for i in range(len(printed.nodes[0])):
        # A coordinate above 1 is refused elsewhere; its powers must not overflow here.
        x = _terms([node[i] for node in printed.nodes], printed.node_units[:, i], printed.places, q, 1.0)
        column = [unity]
        for _ in range(degree):
            column.append(column[-1].times(x, one))
        table.append(column)
    return table


def _monomial_sums(
    weights: _Terms, powers: list[list[_Terms]], degree: int, one: int, descending: bool
) -> Iterator[tuple[Exponents, tuple[int, float]]]:
    """(a, (Σ_k w_k λ^a, uncertainty)), products of leading factors shared between monomials."""
    last = len(powers) - 1

    def walk(
        i: int, left: int, largest: int, head: Exponents, product: _Terms
    ) -> Iterator[tuple[Exponents, tuple[int, float]]]:
        if i == last:
            yield (*head, left), product.inner(powers[i][left], one)
            return
        least = -(-left // (last + 1 - i)) if descending else 0
        for a in range(min(left, largest), least - 1, -1):
            longer = product.times(powers[i][a], one) if a else product
            yield from walk(i + 1, left - a, a if descending else left - a, (*head, a), longer)

    return walk(0, degree, degree, (), weights)


def _symmetric_sums(
    weights: _Terms, powers: list[list[_Terms]], degree: int, one: int
) -> Iterator[tuple[Exponents, tuple[int, float]]]:
    """(ν, (Σ_k w_k m_ν(λ^(k)), uncertainty)) for every partition ν of `degree` into at most N parts."""
    n = len(powers)
    known: dict[Exponents, _Terms] = {(): powers[0][0]}
    wanted = [tuple(p for p in nu if p) for total in range(degree, 0, -1) for nu in partitions(total, n, total)]
    # From the largest total down, so that each step still reads the functions of one variable fewer.
    for column in powers:
        for nu in wanted:
            for position, part in enumerate(nu):
                rest = nu[:position] + nu[position + 1 :]
                if part in nu[:position] or rest not in known:
                    continue
                step = column[part].times(known[rest], one)
                known[nu] = known[nu].plus(step) if nu in known else step
    for nu in partitions(degree, n, degree):
        yield nu, weights.inner(known[tuple(p for p in nu if p)], one)


def _cut_off(printed: Printed, degree: int, n: int, q: int) -> int:
    """Bound, in units of 10^(−q), on what cutting products off can add up to in one sum.

    A product of at most degree + n factors of size ≤ b loses at most one unit per factor, grown by the others.
    """
    b = max(1, -(-max(abs(x) for node in printed.nodes for x in node) // printed.one))
    mass = -(-sum(abs(w) for w in printed.weights) // printed.one)
    return 2 * (degree + n) * int(b**degree) * (mass + len(printed.nodes)) + 1
