"""The equations of a rule with a given structure, evaluated exactly, with bounds on their second derivatives.

Unknowns are the weight of each orbit and its free coordinates. The equations are

    F_e(x) = Σ_o w_o g_e(x_o) − E[g_e / #g_e] = 0,

for the full group with g_e = (size of the orbit) Π_k p_k^{m_k} over p_2 … p_N and all degrees Σ k m_k ≤ t, which span
the symmetric polynomials on the simplex; for any other group with g_e the sum of λ^a over the nodes of the orbit, one
exponent a with |a| = t from each orbit of the group. A rule with this symmetry that solves them has degree t.

Numbers are integers over one denominator, so that values and gradients are exact. Denominators are multiples of
lcm(1 … N): the dependent coordinate (1 − Σ m_b v_b) / m then is an integer too.
"""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from collections.abc import Sequence
from fractions import Fraction
from functools import reduce
from operator import mul

import numpy as np
from numpy.typing import NDArray

from simplexcub.measures import Measure
from simplexcub.rule import Space
from simplexcub.verify.proof_orbits import Orbit, Structure
from simplexcub.verify.residuals import compositions, mean

FloatArray = NDArray[np.float64]
Exponents = tuple[int, ...]
Shares = tuple[Fraction, ...] | None

ROUNDING = 1 + 1e-9  # above what some thousand double operations on positive numbers can lose


class System(ABC):
    """F(x) = 0 for one structure, measure and degree.

    Attributes
    ----------
    structure : Structure
    degree : int
    means : list of Fraction
        E[g_e] per unit of weight, one for each equation.
    factor : int
        lcm(1 … N), or a multiple: what denominators must be divisible by.
    shares : tuple of Fraction or None
        The weight of a node of each orbit where all weights are fixed, else None.
    unknowns : list of (orbit, block)
        What each unknown is; block −1 stands for the weight.
    """

    means: list[Fraction]

    def __init__(self, structure: Structure, measure: Measure, degree: int, space: Space, shares: Shares):
        self.structure = structure
        self.degree = degree
        self.n = measure.N
        self.whole = space == "symmetric"
        self.descending = space == "ordered"
        self.shares = shares
        self.factor = math.lcm(*range(1, measure.N + 1)) * math.lcm(*(s.denominator for s in shares or ()))
        self.unknowns = [
            (o, b) for o, orbit in enumerate(structure.orbits) for b in (*(() if shares else (-1,)), *orbit.free)
        ]

    def point(self, x: Sequence[int], one: int) -> list[tuple[int, list[int]]]:
        """(weight, value of every block) of each orbit, from the unknowns, as integers over `one`."""
        known = dict(zip(self.unknowns, x, strict=True))
        result = []
        for o, orbit in enumerate(self.structure.orbits):
            values = [known.get((o, b), 0) for b in range(len(orbit.values))]
            rest = one - sum(orbit.multiplicities[b] * values[b] for b in orbit.free)
            values[orbit.dependent] = rest // orbit.multiplicities[orbit.dependent]
            weight = known[o, -1] if self.shares is None else int(self.shares[o] * one)
            result.append((weight, values))
        return result

    def residuals(self, x: Sequence[int], one: int) -> list[Fraction]:
        """F(x), exactly; `one` must be divisible by `factor` and x be such that dependent coordinates are integers."""
        total = [0] * len(self.means)
        for orbit, (weight, values) in zip(self.structure.orbits, self.point(x, one), strict=True):
            for e, g in enumerate(self._values(orbit, values, one)):
                total[e] += weight * g
        scale = int(one ** (self.degree + 1))
        return [Fraction(s * m.denominator - m.numerator * scale, scale) / m.denominator for s, m in self._pairs(total)]

    def scaled(self, x: Sequence[int], one: int, bits: int) -> list[int]:
        """F(x)·2^bits rounded down; less than one unit is lost."""
        total = [0] * len(self.means)
        for orbit, (weight, values) in zip(self.structure.orbits, self.point(x, one), strict=True):
            for e, g in enumerate(self._values(orbit, values, one)):
                total[e] += weight * g
        scale = int(one ** (self.degree + 1))
        return [
            ((s * m.denominator - m.numerator * scale) << bits) // (scale * m.denominator)
            for s, m in self._pairs(total)
        ]

    def _pairs(self, total: list[int]) -> list[tuple[int, Fraction]]:
        return list(zip(total, self.means, strict=True))

    def jacobian(self, x: Sequence[int], one: int, bits: int) -> list[list[int]]:
        """∂F_e/∂x_j·2^bits rounded down, one list for each unknown j."""
        scale = int(one**self.degree)
        columns: list[list[int]] = []
        for orbit, (weight, values) in zip(self.structure.orbits, self.point(x, one), strict=True):
            if self.shares is None:
                columns.append([(g << bits) // scale for g in self._values(orbit, values, one)])
            if not orbit.free:
                continue
            slopes = self._slopes(orbit, values, one)
            m = orbit.multiplicities[orbit.dependent]
            for b in orbit.free:
                pairs = zip(slopes[b], slopes[orbit.dependent], strict=True)
                columns.append(
                    [(weight * (m * s - orbit.multiplicities[b] * d) << bits) // (m * scale) for s, d in pairs]
                )
        return columns

    def curvature(self, x: Sequence[int], one: int, radius: float) -> FloatArray:
        """Upper bounds on Σ_jk |∂²F_e/∂x_j ∂x_k| over the box of this radius around x."""
        # No power of a coordinate raised to this floor can underflow.
        floor = 10.0 ** (-200.0 / max(self.degree, 1))
        total = np.zeros(len(self.means))
        for orbit, (weight, values) in zip(self.structure.orbits, self.point(x, one), strict=True):
            speeds = self.speeds(orbit)
            upper = np.array([abs(v) / one for v in values]) * ROUNDING + speeds * radius * ROUNDING
            upper = np.where(speeds > 0, np.maximum(upper, floor), upper)
            first, second = self._bounds(orbit, upper, speeds)
            total += 2 * first + (abs(weight) / one * ROUNDING + radius) * second
        return total * ROUNDING

    def speeds(self, orbit: Orbit) -> FloatArray:
        """Σ_j |∂(block)/∂x_j|: 1 for free blocks, Σ m_b / m for the dependent one, 0 for zeros."""
        speeds = np.zeros(len(orbit.values))
        speeds[list(orbit.free)] = 1.0
        moved = sum(orbit.multiplicities[b] for b in orbit.free)
        speeds[orbit.dependent] = moved / orbit.multiplicities[orbit.dependent] * ROUNDING
        return speeds

    @abstractmethod
    def _values(self, orbit: Orbit, values: Sequence[int], one: int) -> list[int]:
        """g_e times one^degree."""

    @abstractmethod
    def _slopes(self, orbit: Orbit, values: Sequence[int], one: int) -> list[list[int]]:
        """∂g_e/∂(block) times one^(degree − 1), all equal coordinates of a block moving together."""

    @abstractmethod
    def _bounds(self, orbit: Orbit, upper: FloatArray, speeds: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Σ c_b |∂_b g_e| and Σ c_b c_d |∂_b ∂_d g_e| at the upper corner of the box, c the speeds."""


class PowerSumSystem(System):
    """The full group: products of power sums, at a cost that does not grow with the size of the orbits."""

    def __init__(self, structure: Structure, measure: Measure, degree: int, space: Space, shares: Shares):
        super().__init__(structure, measure, degree, space, shares)
        self.powers = range(2, min(measure.N, degree) + 1)
        self.products = [
            powers
            for powers in _products(degree, self.powers)
            if any(powers) or not shares  # fixed weights sum to 1 by themselves
        ]
        route = measure.routes[-1]
        self.means = []
        for powers in self.products:
            parts = [k for k, m in zip(self.powers, powers, strict=True) for _ in range(m)]
            self.means.append(measure.power_sum_moment(parts, route=route))

    def _count(self, orbit: Orbit) -> int:
        return 1 if self.whole else orbit.size

    def _power_sums(self, orbit: Orbit, values: Sequence[int]) -> list[int]:
        pairs = list(zip(orbit.multiplicities, values, strict=True))
        return [sum(m * v**k for m, v in pairs) for k in self.powers]

    def _values(self, orbit: Orbit, values: Sequence[int], one: int) -> list[int]:
        sums, count = self._power_sums(orbit, values), self._count(orbit)
        return [count * self._product(powers, sums) * one ** self._missing(powers) for powers in self.products]

    def _slopes(self, orbit: Orbit, values: Sequence[int], one: int) -> list[list[int]]:
        sums, count = self._power_sums(orbit, values), self._count(orbit)
        slopes = [[0] * len(self.products) for _ in values]
        for e, powers in enumerate(self.products):
            lift = count * one ** self._missing(powers)
            for position, m in enumerate(powers):
                if m:
                    lowered = (*powers[:position], m - 1, *powers[position + 1 :])
                    outer = lift * m * self._product(lowered, sums)
                    k = position + 2
                    for b, v in enumerate(values):
                        slopes[b][e] += outer * k * orbit.multiplicities[b] * v ** (k - 1)
        return slopes

    def _bounds(self, orbit: Orbit, upper: FloatArray, speeds: FloatArray) -> tuple[FloatArray, FloatArray]:
        m = np.array(orbit.multiplicities, dtype=float)
        k = np.array(self.powers, dtype=int)[:, None]
        sums = (m * upper**k).sum(axis=1)
        first = (k * m * speeds * upper ** (k - 1)).sum(axis=1)
        second = (k * (k - 1) * m * speeds**2 * upper ** (k - 2)).sum(axis=1)
        powers = np.array(self.products)
        g = self._count(orbit) * np.prod(sums**powers, axis=1)
        slope = powers @ (first / sums)
        return g * slope, g * (slope**2 + powers @ (second / sums))

    def _missing(self, powers: Exponents) -> int:
        return self.degree - sum(k * m for k, m in enumerate(powers, 2))

    def _product(self, powers: Exponents, sums: Sequence[int]) -> int:
        return reduce(mul, (p**m for p, m in zip(sums, powers, strict=True) if m), 1)


class MonomialSystem(System):
    """Any other group: monomials of degree t, one for each of its orbits."""

    def __init__(self, structure: Structure, measure: Measure, degree: int, space: Space, shares: Shares):
        super().__init__(structure, measure, degree, space, shares)
        chosen: list[Exponents] = []
        seen: set[Exponents] = set()
        for a in compositions(degree, measure.N):
            if a not in seen:
                chosen.append(a)
                seen.update(tuple(a[i] for i in g) for g in structure.permutations)
        # Σ w = 1 is a combination of all of them, so with weights that sum to 1 by themselves one is to spare.
        self.exponents = chosen[:-1] if shares else chosen
        self.means = [mean(measure, a) for a in self.exponents]

    def _powers(self, values: Sequence[int]) -> list[list[int]]:
        return [[v**k for k in range(self.degree + 1)] for v in values]

    def _values(self, orbit: Orbit, values: Sequence[int], one: int) -> list[int]:
        powers = self._powers(values)
        total = [0] * len(self.exponents)
        for image in orbit.images:
            columns = [powers[b] for b in image]
            for e, a in enumerate(self.exponents):
                total[e] += reduce(mul, [c[k] for c, k in zip(columns, a, strict=True) if k], 1)
        return total

    def _slopes(self, orbit: Orbit, values: Sequence[int], one: int) -> list[list[int]]:
        powers = self._powers(values)
        slopes = [[0] * len(self.exponents) for _ in values]
        for image in orbit.images:
            columns = [powers[b] for b in image]
            for e, a in enumerate(self.exponents):
                for i, b in enumerate(image):
                    if a[i]:
                        rest = [c[k] for j, (c, k) in enumerate(zip(columns, a, strict=True)) if k and j != i]
                        slopes[b][e] += reduce(mul, rest, a[i] * columns[i][a[i] - 1])
        return slopes

    def _bounds(self, orbit: Orbit, upper: FloatArray, speeds: FloatArray) -> tuple[FloatArray, FloatArray]:
        exponents = np.array(self.exponents)
        first, second = np.zeros(len(exponents)), np.zeros(len(exponents))
        for image in orbit.images:
            x, c = upper[list(image)], speeds[list(image)]
            g = np.prod(x**exponents, axis=1)
            slope = exponents @ np.divide(c, x, out=np.zeros_like(c), where=c > 0)
            first += g * slope
            second += g * slope**2
        return first, second


def _products(degree: int, parts: Sequence[int]) -> list[Exponents]:
    """Every (m_k) over `parts` with Σ k m_k ≤ degree."""
    if not parts:
        return [()]
    k = parts[0]
    return [(m, *rest) for m in range(degree // k + 1) for rest in _products(degree - k * m, parts[1:])]
