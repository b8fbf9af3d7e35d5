"""Stable bases of symmetric polynomials on the simplex, evaluated by recurrence with their derivatives.

Symmetric polynomials are polynomials in the centred power sums g_k = Σ_i (N λ_i − 1)^k / N, k = 2 … N. Each basis
function is an earlier one times one generator, made orthonormal against a discrete flat measure; the coefficients of
that orthogonalisation are the recurrence ("Vandermonde with Arnoldi": Brubeck, Nakatsukasa & Trefethen, SIAM Rev. 63
(2021) 405). The stored doubles *define* the polynomials, so the same recurrence run in long integers gives their
values and means to any number of digits.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from itertools import product
from math import comb
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.special import roots_jacobi

from simplexcub.measures import Measure

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.object_]  # Python integers of any length

_POINT_LIMIT = 60_000  # discrete inner product: more points cost memory and add no accuracy
_NEGLIGIBLE = 1e-12  # recurrence coefficients below this are zero but for rounding


@dataclass(frozen=True)
class _Level:
    """The basis functions of one degree: (generator × earlier function − earlier functions · shift) · scale."""

    start: int
    stop: int
    low: int
    sources: NDArray[np.int64]
    generators: NDArray[np.int64]
    shift: FloatArray
    scale: FloatArray


class SymmetricBasis:
    """Orthonormal symmetric polynomials of degree ≤ `degree` in `n` components.

    Attributes
    ----------
    exponents : list of tuple of int
        The monomials in g_2 … g_N that span the space, by degree.
    degrees : list of int
        Total degree of each function in λ, rising.
    """

    def __init__(self, n: int, degree: int) -> None:
        self.n = n
        self.degree = degree
        weights = range(2, n + 1)
        found = [e for e in product(*(range(degree // k + 1) for k in weights)) if _weight(e) <= degree]
        self.exponents: list[tuple[int, ...]] = sorted(found, key=lambda e: (_weight(e), e))
        self.degrees = [_weight(e) for e in self.exponents]
        self._levels = self._orthogonalise(flat_points(n, degree))

    def __len__(self) -> int:
        return len(self.exponents)

    def _plan(self) -> list[tuple[int, int, NDArray[np.int64], NDArray[np.int64]]]:
        """For each degree: its range of functions, and every (earlier function, generator) whose product reaches it."""
        plan = []
        for d in sorted(set(self.degrees) - {0}):
            start, stop = self.degrees.index(d), self.degrees.index(d) + self.degrees.count(d)
            pairs = [(i, j) for j in range(self.n - 1) for i in range(start) if self.degrees[i] == d - j - 2]
            sources, generators = np.array(pairs).T
            plan.append((start, stop, sources, generators))
        return plan

    def _orthogonalise(self, points: tuple[FloatArray, FloatArray]) -> list[_Level]:
        nodes, weights = points
        g = _generators(nodes, np.ones(self.n), self.n)
        values = np.empty((len(nodes), len(self)))
        values[:, 0] = 1.0
        levels = []
        for start, stop, sources, generators in self._plan():
            new = g[:, generators] * values[:, sources]
            shift = np.zeros((start, len(sources)))
            for _ in range(2):  # once is not enough in floating point, twice is
                part = (values[:, :start] * weights[:, None]).T @ new
                new -= values[:, :start] @ part
                shift += part
            # All products together keep the recurrence stable where a single generator would lose digits.
            _, s, vt = np.linalg.svd(new * np.sqrt(weights)[:, None], full_matrices=False)
            scale = vt[: stop - start].T / s[: stop - start]
            kept = np.flatnonzero(np.abs(shift).max(axis=1) > _NEGLIGIBLE)
            low = int(kept[0]) if len(kept) else start
            level = _Level(start, stop, low, sources, generators, shift[low:], scale)
            values[:, start:stop] = (g[:, generators] * values[:, sources] - values[:, low:start] @ level.shift) @ scale
            levels.append(level)
        return levels

    def jet(self, values: FloatArray, multiplicities: tuple[int, ...]) -> FloatArray:
        """Values and derivatives of all functions at nodes given by their distinct coordinates.

        Parameters
        ----------
        values : ndarray, shape (P, k)
            Distinct coordinates, Σ_j multiplicities[j] · values[:, j] = 1.

        Returns
        -------
        ndarray, shape (P, k, E)
            Row 0 holds the functions; row 1 + j the derivative by values[:, j], j < k − 1, with the last
            coordinate following from the sum.
        """
        k, count = len(multiplicities), len(values)
        m = np.array(multiplicities, dtype=float)
        g = _generators(values, m, self.n).T
        y = (self.n * values - 1.0).T
        dg = np.empty((self.n - 1, k - 1, count))
        for e in range(2, self.n + 1):
            dg[e - 2] = e * m[:-1, None] * (y[:-1] ** (e - 1) - y[-1] ** (e - 1))
        out = np.empty((len(self), k, count))  # functions first, so that every level is one matrix product
        out[0] = 0.0
        out[0, 0] = 1.0
        for level in self._levels:
            generators, earlier = level.generators, out[level.sources]
            new = g[generators][:, None] * earlier
            new[:, 1:] += dg[generators] * earlier[:, :1]
            new = new.reshape(len(new), -1)
            new -= level.shift.T @ out[level.low : level.start].reshape(level.start - level.low, -1)
            out[level.start : level.stop] = (level.scale.T @ new).reshape(-1, k, count)
        return out.transpose(2, 1, 0)

    def _run_fixed(self, out: IntArray, times: Callable[[IntArray, int], IntArray], bits: int) -> IntArray:
        """The recurrence in integers scaled by 2^bits; `times` multiplies one column by one generator."""
        for level in self._levels:
            earlier = out[:, level.low : level.start]
            columns = [times(out[:, s], j) for s, j in zip(level.sources, level.generators, strict=True)]
            new = np.stack(columns, axis=1)
            if earlier.size:
                new = new - (earlier.dot(fixed_point(level.shift, bits)) >> bits)
            out[:, level.start : level.stop] = new.dot(fixed_point(level.scale, bits)) >> bits
        return out

    def values_fixed(self, values: IntArray, multiplicities: tuple[int, ...], bits: int) -> IntArray:
        """As :meth:`jet` row 0, in integers scaled by 2^bits; shape (P, E)."""
        one = 1 << bits
        y = self.n * values - one
        powers, g = y, []
        for _ in range(2, self.n + 1):
            powers = (powers * y) >> bits
            g.append(powers.dot(np.array(multiplicities, dtype=object)) // self.n)
        out = np.zeros((len(values), len(self)), dtype=object)
        out[:, 0] = one
        return self._run_fixed(out, lambda column, j: (column * g[j]) >> bits, bits)

    def means_fixed(self, measure: Measure, bits: int) -> list[int]:
        """E[φ_i] over a symmetric measure, in integers scaled by 2^bits, from exact power-sum moments."""
        work = bits + 32 + 5 * self.degree  # coefficients of degree t grow like 2^(4t) and cancel again
        index = {e: i for i, e in enumerate(self.exponents)}
        rows = [[index.get((*e[:j], e[j] + 1, *e[j + 1 :]), -1) for e in self.exponents] for j in range(self.n - 1)]

        def times(column: IntArray, j: int) -> IntArray:
            shifted = np.zeros(len(self), dtype=object)
            for i, target in enumerate(rows[j]):
                if column[i]:
                    shifted[target] = column[i]
            return shifted

        coefficients = np.zeros((len(self), len(self)), dtype=object)
        coefficients[0, 0] = 1 << work
        self._run_fixed(coefficients, times, work)
        means = centred_means(measure, tuple(self.exponents))
        scaled = np.array([(m.numerator << work) // m.denominator for m in means], dtype=object)
        return [int(v) >> (2 * work - bits) for v in scaled.dot(coefficients)]


@lru_cache(maxsize=64)
def symmetric_basis(n: int, degree: int) -> SymmetricBasis:
    """The basis for `n` components and `degree`, built once per process."""
    return SymmetricBasis(n, degree)


@lru_cache(maxsize=64)
def centred_means(measure: Measure, exponents: tuple[tuple[int, ...], ...]) -> list[Fraction]:
    """Exact E[Π_k g_k^{e_k}] for each tuple of exponents of the centred power sums g_2, g_3, …"""
    n, top = measure.N, len(exponents[0]) + 1
    generators = []
    for k in range(2, top + 1):
        # g_k = (1/N) Σ_j C(k, j) N^j (−1)^(k−j) p_j with p_0 = N and p_1 = 1, as {exponents of p_2 … p_N: coefficient}
        terms: dict[tuple[int, ...], Fraction] = {}
        for j in range(k + 1):
            key = tuple(int(i == j) for i in range(2, top + 1))
            factor = n if j == 0 else 1
            terms[key] = terms.get(key, Fraction(0)) + Fraction(comb(k, j) * n**j * (-1) ** (k - j) * factor, n)
        generators.append(terms)
    zero = (0,) * (top - 1)
    expansions: dict[tuple[int, ...], dict[tuple[int, ...], Fraction]] = {zero: {zero: Fraction(1)}}
    means: dict[tuple[int, ...], Fraction] = {}
    result = []
    for e in exponents:
        if e not in expansions:
            j = next(i for i, power in enumerate(e) if power)
            expansions[e] = _multiply(expansions[(*e[:j], e[j] - 1, *e[j + 1 :])], generators[j])
        total = Fraction(0)
        for powers, coefficient in expansions[e].items():
            if powers not in means:
                parts = [k for k, power in enumerate(powers, 2) for _ in range(power)]
                means[powers] = measure.power_sum_moment(parts)
            total += coefficient * means[powers]
        result.append(total)
    return result


def _multiply(
    a: dict[tuple[int, ...], Fraction], b: dict[tuple[int, ...], Fraction]
) -> dict[tuple[int, ...], Fraction]:
    result: dict[tuple[int, ...], Fraction] = {}
    for (x, p), (y, q) in product(a.items(), b.items()):
        key = tuple(i + j for i, j in zip(x, y, strict=True))
        result[key] = result.get(key, Fraction(0)) + p * q
    return result


def _weight(exponents: tuple[int, ...]) -> int:
    return sum(k * e for k, e in enumerate(exponents, 2))


def _generators(values: FloatArray, multiplicities: FloatArray, n: int) -> FloatArray:
    """g_2 … g_N at nodes given by distinct coordinates; shape (P, N − 1)."""
    y = n * values - 1.0
    power, found = y, []
    for _ in range(2, n + 1):
        power = power * y
        found.append(power @ multiplicities / n)
    return np.stack(found, axis=1)


def fixed_point(array: FloatArray, bits: int) -> Any:
    """Doubles as integers scaled by 2^bits, without rounding beyond that scale."""
    flat = [
        (int(m * 2.0**53) << bits) >> (53 - int(e)) if e <= 53 else int(m * 2.0**53) << (bits + int(e) - 53)
        for m, e in zip(*np.frexp(array.ravel()), strict=True)
    ]
    return np.array(flat, dtype=object).reshape(array.shape)


def flat_points(n: int, degree: int) -> tuple[FloatArray, FloatArray]:
    """Points and weights of a discrete flat measure, fine enough to tell all functions of the degree apart."""
    per_axis = min(degree + 1, int(_POINT_LIMIT ** (1 / (n - 1))))
    if per_axis > degree // 2 + 1:
        nodes, weights = np.ones((1, 1)), np.ones(1)
        for dimension in range(1, n):
            # The stick is broken at 1 − s, with s^(dimension − 1) the density of what is left.
            root, weight = roots_jacobi(per_axis, 0.0, dimension - 1.0)
            s = (root + 1.0) / 2.0
            left = (s[:, None, None] * nodes).reshape(-1, dimension)
            nodes = np.column_stack([np.repeat(1.0 - s, len(weights)), left])
            weights = (weight[:, None] * weights).ravel()
        return nodes, weights / weights.sum()
    nodes = np.random.default_rng(0).dirichlet(np.ones(n), _POINT_LIMIT)
    return nodes, np.full(_POINT_LIMIT, 1.0 / _POINT_LIMIT)
