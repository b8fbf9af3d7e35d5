"""Orthonormal polynomials of the flat measure on the simplex, as products of homogeneous Jacobi polynomials.

With s_j = λ_j + … + λ_N and multi-index α = (α_1 … α_{N−1}),

    Φ_α(λ) = Π_j Q_{α_j}(λ_j, s_{j+1}; a_j),       a_j = 2 (α_{j+1} + … + α_{N−1}) + N − j − 1
    Q_n(u, v; a) = (u + v)^n P_n^{(a, 0)}((u − v)/(u + v)) = Σ_k C(n + a, n − k) C(n, k) (−v)^k u^{n−k}
    E[Φ_α²] = (N − 1)! / Π_j (2 α_j + a_j + 1)

The three-term recurrence of P_n^{(a, 0)} made homogeneous gives values and derivatives in a few operations each.

References: T. Koornwinder, in *Theory and Application of Special Functions* (1975) 435; M. Dubiner, J. Sci. Comput. 6
(1991) 345; the recurrence is Abramowitz & Stegun 22.7.1.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from fractions import Fraction
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from simplexcub.measures import Measure

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.object_]  # Python integers of any length

_CACHED_POINTS = 256  # worked on at once, so that all tables of a point stay in the processor's cache


class JacobiBasis:
    """All polynomials of degree ≤ `degree` on the simplex of `n` components.

    Attributes
    ----------
    indices : ndarray of int, shape (E, n − 1)
        Multi-indices, by rising total degree.
    norms : ndarray, shape (E,)
        Factors that make Φ_α orthonormal.
    """

    def __init__(self, n: int, degree: int) -> None:
        self.n = n
        self.degree = degree
        found = sorted(_multi_indices(n - 1, degree), key=lambda a: (sum(a), a))
        self.indices = np.array(found, dtype=np.int64)
        self.degrees = self.indices.sum(axis=1)
        # tails[:, j] = α_{j+1} + … + α_{N−1}
        self.tails = self.indices[:, ::-1].cumsum(axis=1)[:, ::-1] - self.indices
        squares = np.full(len(found), float(math.factorial(n - 1)))
        for j in range(n - 1):
            squares /= 2 * self.indices[:, j] + 2 * self.tails[:, j] + (n - j - 2) + 1
        self.norms = squares**-0.5

    def __len__(self) -> int:
        return len(self.indices)

    def values(self, x: FloatArray) -> FloatArray:
        """All functions at points `x`, shape (P, n); returns shape (E, P)."""
        out = np.repeat(self.norms[:, None], len(x), axis=1)
        s = x[:, ::-1].cumsum(axis=1)[:, ::-1].T
        for j in range(self.n - 1):
            out *= self._axis(j, x[:, j], s[j + 1], derivatives=False)[0][self.indices[:, j], self.tails[:, j]]
        return out

    def jet(self, x: FloatArray, directions: FloatArray) -> FloatArray:
        """Values and directional derivatives.

        Parameters
        ----------
        x : ndarray, shape (P, n)
        directions : ndarray, shape (k − 1, n)
            Rows are directions in λ, each summing to 0.

        Returns
        -------
        ndarray, shape (E, k, P)
            Functions first; entry 0 of the second axis the value, then one derivative per direction.
        """
        out = np.empty((len(self), len(directions) + 1, len(x)))
        for start in range(0, len(x), _CACHED_POINTS):
            part = slice(start, start + _CACHED_POINTS)
            out[:, :, part] = self._jet(x[part], directions)
        return out

    def _jet(self, x: FloatArray, directions: FloatArray) -> FloatArray:
        s = x[:, ::-1].cumsum(axis=1)[:, ::-1].T
        ahead = directions[:, ::-1].cumsum(axis=1)[:, ::-1]
        axes = []
        for j in range(self.n - 1):
            tables = self._axis(j, x[:, j], s[j + 1], derivatives=True)
            axes.append([table[self.indices[:, j], self.tails[:, j]] for table in tables])
        k = len(directions) + 1
        out = np.empty((len(self), k, len(x)))
        left = np.repeat(self.norms[:, None], len(x), axis=1)
        products = []  # of all axes but j
        for axis in axes:
            products.append(left)
            left = left * axis[0]
        out[:, 0] = left
        right = None
        for j in range(self.n - 2, -1, -1):
            others = products[j] if right is None else products[j] * right
            by_u, by_v = others * axes[j][1], others * axes[j][2]
            for d in range(k - 1):
                part = directions[d, j] * by_u + ahead[d, j + 1] * by_v
                if right is None:
                    out[:, 1 + d] = part
                else:
                    out[:, 1 + d] += part
            right = axes[j][0] if right is None else right * axes[j][0]
        return out

    def _axis(self, j: int, u: FloatArray, v: FloatArray, *, derivatives: bool) -> list[FloatArray]:
        """Tables Q[n, m] over points, with ∂/∂u and ∂/∂v where asked; each of shape (t + 1, t + 1, P)."""
        t = self.degree
        count = 3 if derivatives else 1
        tables = [np.zeros((t + 1, t + 1, len(u))) for _ in range(count)]
        q = tables[0]
        q[0] = 1.0
        a = 2.0 * np.arange(t + 1)[:, None] + (self.n - j - 2)
        s, difference = u + v, u - v
        if t:
            q[1, :t] = ((a + 1) * u - v)[:t]
        if t and derivatives:
            tables[1][1, :t] = (a + 1)[:t]
            tables[2][1, :t] = -1.0
        for n, by_difference, by_sum, back, c1 in _coefficients(self.n, j, t):
            linear, constant, last = (np.array(c / c1, dtype=float)[:, None] for c in (by_difference, by_sum, back))
            rows = slice(0, t + 1 - n)
            one, two = q[n - 1, rows], q[n - 2, rows]
            factor = linear * difference + constant * s
            q[n, rows] = factor * one - last * s * s * two
            for d, sign in ((1, 1.0), (2, -1.0)) if derivatives else ():
                dq = tables[d]
                dq[n, rows] = (sign * linear + constant) * one + factor * dq[n - 1, rows]
                dq[n, rows] -= last * s * (2.0 * two + s * dq[n - 2, rows])
        return tables

    def values_fixed(self, x: IntArray, bits: int) -> IntArray:
        """Φ_α / norms at points `x`, shape (P, n), in integers scaled by 2^bits; returns shape (E, P)."""
        out = np.full((len(self), len(x)), 1 << bits, dtype=object)
        s = x[:, ::-1].cumsum(axis=1)[:, ::-1].T
        for j in range(self.n - 1):
            table = self._axis_fixed(j, x[:, j], s[j + 1], bits)
            for i, (a, m) in enumerate(zip(self.indices[:, j], self.tails[:, j], strict=True)):
                if a:
                    out[i] = (out[i] * table[a, m]) >> bits
        return out

    def _axis_fixed(self, j: int, u: IntArray, v: IntArray, bits: int) -> IntArray:
        t = self.degree
        q = np.zeros((t + 1, t + 1, len(u)), dtype=object)
        q[0] = 1 << bits
        a = 2 * np.arange(t + 1, dtype=object)[:, None] + (self.n - j - 2)
        s, difference = u + v, u - v
        square = (s * s) >> bits
        if t:
            q[1, :t] = ((a + 1) * u - v)[:t]
        for n, by_difference, by_sum, back, c1 in _coefficients(self.n, j, t):
            rows = slice(0, t + 1 - n)
            factor = by_difference[:, None] * difference + by_sum[:, None] * s
            new = factor * q[n - 1, rows] - back[:, None] * square * q[n - 2, rows]
            q[n, rows] = (new >> bits) // c1[:, None]
        return q

    def means_fixed(self, measure: Measure, bits: int) -> IntArray:
        """E[Φ_α] / norms over any measure with exact moments, in integers scaled by 2^bits; shape (E,)."""
        tails: dict[tuple[int, ...], list[Fraction]] = {}
        out = []
        for index in self.indices:
            head, tail = int(index[0]), tuple(int(a) for a in index[1:])
            if tail not in tails:
                r = sum(tail)
                inner = _homogeneous(tail, self.n - 1)
                tails[tail] = [
                    sum((c * _moment(measure, (q, *b)) for b, c in inner.items()), Fraction(0))
                    for q in range(self.degree - r + 1)
                ]
            # On the simplex s_2 = 1 − λ_1, so the first factor is a polynomial in λ_1 alone.
            means = tails[tail]
            first = _first_factor(head, 2 * sum(tail) + self.n - 2)
            total = sum((c * means[q] for q, c in enumerate(first)), Fraction(0))
            out.append((total.numerator << bits) // total.denominator)
        return np.array(out, dtype=object)


@lru_cache(maxsize=32)
def jacobi_basis(n: int, degree: int) -> JacobiBasis:
    """The basis for `n` components and `degree`, built once per process."""
    return JacobiBasis(n, degree)


@lru_cache(maxsize=1_000_000)
def _moment(measure: Measure, exponents: tuple[int, ...]) -> Fraction:
    if measure.is_symmetric:
        ordered = tuple(sorted(exponents, reverse=True))
        if ordered != exponents:
            return _moment(measure, ordered)
    return measure.moment(exponents)


def _coefficients(components: int, j: int, t: int) -> Iterator[tuple[int, IntArray, IntArray, IntArray, IntArray]]:
    """Rows (n, c_d, c_s, c_b, c_1) of c_1 Q_n = (c_d (u − v) + c_s s) Q_{n−1} − c_b s² Q_{n−2}, over all tails."""
    for n in range(2, t + 1):
        a = 2 * np.arange(t + 1 - n, dtype=object) + (components - j - 2)
        top = 2 * n + a
        by_difference, by_sum, back = (top - 1) * top * (top - 2), (top - 1) * a * a, 2 * (n + a - 1) * (n - 1) * top
        yield n, by_difference, by_sum, back, 2 * n * (n + a) * (top - 2)


@lru_cache(maxsize=4096)
def _factor(n: int, a: int) -> list[int]:
    """Coefficients of u^{n−k} v^k in Q_n(u, v; a)."""
    return [(-1) ** k * math.comb(n + a, n - k) * math.comb(n, k) for k in range(n + 1)]


@lru_cache(maxsize=4096)
def _first_factor(n: int, a: int) -> list[int]:
    """Coefficients of λ^q in Q_n(λ, 1 − λ; a)."""
    out = [0] * (n + 1)
    for k, c in enumerate(_factor(n, a)):
        for i in range(k + 1):
            out[n - k + i] += c * (-1) ** i * math.comb(k, i)
    return out


@lru_cache(maxsize=65536)
def _homogeneous(tail: tuple[int, ...], n: int) -> dict[tuple[int, ...], int]:
    """Π_j Q_{α_j}(λ_j, s_{j+1}) over the last n components, as {exponents: coefficient}."""
    if not tail:
        return {(0,): 1}
    inner = _homogeneous(tail[1:], n - 1)
    head = tail[0]
    out: dict[tuple[int, ...], int] = {}
    by_sum = inner  # s_{j+1}^k · inner
    for k, c in enumerate(_factor(head, 2 * sum(tail[1:]) + n - 2)):
        if k:
            grown: dict[tuple[int, ...], int] = {}
            for b, value in by_sum.items():
                for i in range(n - 1):
                    key = (*b[:i], b[i] + 1, *b[i + 1 :])
                    grown[key] = grown.get(key, 0) + value
            by_sum = grown
        for b, value in by_sum.items():
            key = (head - k, *b)
            out[key] = out.get(key, 0) + c * value
    return out


def _multi_indices(axes: int, total: int) -> Iterator[tuple[int, ...]]:
    if axes == 0:
        yield ()
        return
    for first in range(total + 1):
        for rest in _multi_indices(axes - 1, total - first):
            yield (first, *rest)
