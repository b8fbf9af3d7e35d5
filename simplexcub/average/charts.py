"""Coordinates on the unit cube in which every singularity of a spectral mean lies on a face of its own.

The chamber λ_1 ≥ … ≥ λ_N is a simplex with vertices (1/k, …, 1/k, 0, …, 0). Cut it like a broken stick, from the first
vertex on: with y_1 … y_{N−1} in [0, 1], s_k = y_1 ⋯ y_k and barycentric b_k = s_{k−1} (1 − y_k), b_N = s_{N−1},

    λ_i = s_{i−1} g_i,            g_i = (1 − y_i)/i + y_i g_{i+1}
    λ_i − λ_j = s_{i−1} h_ij,     h_ij = (1 − y_i)/i + y_i h_{i+1,j}

with g_i ≥ 1/N. So λ_i ln λ_i, λ_i^q and Π λ_i^c have their singularities at the faces y_k = 0 alone, and kinks where
two eigenvalues meet lie on the faces y_k = 1; inside, the integrand is as smooth as f. The density is y_k^m (1 − y_k)^β
times a smooth remainder, without cancellation since every term of g and h is positive.

The whole simplex is cut in the same way from its own vertices, λ_i = s_{i−1} (1 − y_i), for functions of the components
as they stand. There both ends of each axis can be singular.

A power y = t^p (chamber), or the step y ∝ ∫ t^{p−1} (1 − t)^{p−1} (whole simplex), makes t^{pq} out of y^q. The powers
of t and 1 − t that the density is left with go into the weight of a Gauss–Jacobi rule. p is 1 where the density itself
vanishes at the face to high order. Measured on entropies, Σ λ^{1/2}, Σ λ^{0.1}, largest eigenvalue, Rényi-2, for flat,
Hilbert–Schmidt and Bures, N = 2 … 4, 3 to 12 nodes per axis and p up to 6: `STRONGEST` = 4 and `ORDER` = 6 need the
fewest points for 1e-9. With p = 1, 2 the same number of nodes leaves 10 to 1000 times the error for all but analytic f,
and p = 2 alone, which takes λ^{−1/2} of Bures away, leaves λ ln λ with an error like n^{−6}.
"""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from dataclasses import dataclass
from functools import lru_cache
from itertools import combinations

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import eigh_tridiagonal
from scipy.special import betaln, logsumexp

from simplexcub.measures import BetaEnsemble, BuresHall, Dirichlet, Induced, Measure, Ordered, PolynomialDensity

FloatArray = NDArray[np.float64]
STRONGEST = 4
HIGHEST = 60  # power for a bounded density
STEP = 2  # highest p on the simplex
_NEAREST = 1e-17  # to a face, so that a point that rounding put onto it has a finite density
ORDER = 6.0  # p (m + 1) at which a face counts as smooth enough without a power


@dataclass(frozen=True)
class Density:
    """Π λ_i^{α_i − 1} Π |λ_i − λ_j|^β, over Π (λ_i + λ_j) where `ratio` is true, times `factor` where there is one."""

    alpha: tuple[float, ...]
    beta: float = 0.0
    ratio: bool = False
    factor: PolynomialDensity | None = None

    @property
    def has_smooth_differences(self) -> bool:
        return self.beta % 2 == 0 and not self.ratio


def density_of(measure: Measure) -> Density | None:
    """The density of a measure in the form that the charts need; None for a measure of another kind."""
    if isinstance(measure, Ordered):
        return density_of(measure.base)
    if isinstance(measure, PolynomialDensity):
        return Density(tuple(float(a) for a in measure.alpha), factor=measure)
    if isinstance(measure, Dirichlet):
        return Density(tuple(float(a) for a in measure.alpha))
    if isinstance(measure, BetaEnsemble):
        return Density((float(measure.c) + 1,) * measure.N, float(measure.beta))
    if isinstance(measure, Induced | BuresHall):
        return Density((float(measure.exponent) + 1,) * measure.N, 2.0, isinstance(measure, BuresHall))
    return None


class Chart(ABC):
    """A map from the cube [0, 1]^{N−1} to points and the density there.

    Parameters
    ----------
    density : Density
    bounded : bool
        Take powers so high that the density in t is bounded, for rules that have no weight of their own.

    Attributes
    ----------
    at_zero, at_one : tuple of float
        Exponents of t and of 1 − t that the density has on each axis.
    powers : tuple of int
        The p of each axis.
    """

    def __init__(self, density: Density, bounded: bool = False) -> None:
        self.density = density
        self.N = len(density.alpha)
        self.axes = self.N - 1

    at_zero: tuple[float, ...]
    at_one: tuple[float, ...]
    powers: tuple[int, ...]

    @abstractmethod
    def points(self, t: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Points λ, shape (M, N), and the logarithm of the density in t without its powers of t and 1 − t, (M,)."""

    @property
    def is_bounded(self) -> bool:
        """Whether the density in t is."""
        return min(*self.at_zero, *self.at_one) >= 0

    def log_density(self, t: FloatArray, remainder: FloatArray) -> FloatArray:
        """Logarithm of the density in t, with its powers of t and 1 − t as probability densities."""
        low, high = np.log(np.maximum(t, _NEAREST)), np.log(np.maximum(1 - t, _NEAREST))
        a, b = np.array(self.at_zero), np.array(self.at_one)
        return np.asarray(remainder + (low * a + high * b - betaln(a + 1, b + 1)).sum(axis=1))

    def product(self, sizes: tuple[int, ...]) -> tuple[FloatArray, FloatArray]:
        """Points and weights, summing to 1, of the product of Gauss–Jacobi rules with `sizes` nodes."""
        points, logs = self._product(sizes)
        weights = np.exp(logs - logs.max())
        return points, weights / weights.sum()

    def log_mass(self, size: int) -> float:
        """Logarithm of ∫ of the density over the cube, by such a product of `size` nodes per axis."""
        return float(logsumexp(self._product((size,) * self.axes)[1]))

    def _product(self, sizes: tuple[int, ...]) -> tuple[FloatArray, FloatArray]:
        axes = [_jacobi(n, a, b) for n, a, b in zip(sizes, self.at_zero, self.at_one, strict=True)]
        grids = np.meshgrid(*(x for x, _ in axes), indexing="ij")
        logs = np.zeros(())
        for _, w in axes:
            logs = np.add.outer(logs, _log(w))
        points, remainder = self.points(np.stack([g.ravel() for g in grids], axis=1))
        return points, logs.ravel() + remainder


class Chamber(Chart):
    """The ordered chamber, largest component first, for symmetric densities."""

    def __init__(self, density: Density, bounded: bool = False) -> None:
        super().__init__(density)
        at_zero, powers = [], []
        for k in range(1, self.N):
            tail = self.N - k
            m = tail * density.alpha[0] + (density.beta - density.ratio) * tail * (tail - 1) / 2 - 1
            p = _bounding(m) if bounded else _power(m)
            powers.append(p)
            at_zero.append(p * (m + 1) - 1)
        self.at_zero, self.powers = tuple(at_zero), tuple(powers)
        self.at_one = (density.beta,) * self.axes

    def points(self, t: FloatArray) -> tuple[FloatArray, FloatArray]:
        n, density = self.N, self.density
        y = t ** np.array(self.powers)
        # (1 − t^p)/(1 − t), which no power of 1 − t is to contain
        slope = [sum(t[:, k] ** j for j in range(p)) for k, p in enumerate(self.powers)]
        short = [(1 - t[:, k]) * slope[k] / (k + 1) for k in range(self.axes)]
        s = np.concatenate([np.ones((len(t), 1)), np.cumprod(y, axis=1)], axis=1)
        g = np.empty((n, len(t)))
        g[n - 1] = 1 / n
        for i in range(n - 2, -1, -1):
            g[i] = short[i] + y[:, i] * g[i + 1]
        points = s * g.T
        remainder = (density.alpha[0] - 1) * np.log(g).sum(axis=0)
        if density.beta:
            for k in range(self.axes):
                remainder += density.beta * np.log(slope[k])
            for j in range(2, n):
                h = short[j - 1]
                for i in range(j - 2, -1, -1):
                    h = short[i] + y[:, i] * h
                    remainder += density.beta * _log(h)
        if density.ratio:
            for i, j in combinations(range(n), 2):
                remainder -= np.log(g[i] + np.prod(y[:, i:j], axis=1) * g[j])
        if density.factor is not None:
            remainder += _log(density.factor.factor(points))
        return points, remainder


class Simplex(Chart):
    """The whole simplex, components in their order, for densities whose differences are squared."""

    def __init__(self, density: Density, bounded: bool = False) -> None:
        super().__init__(density)
        at_zero, at_one, powers = [], [], []
        for k in range(1, self.N):
            tail = self.N - k
            low = density.alpha[k - 1] - 1
            high = sum(density.alpha[k:]) + density.beta * tail * (tail - 1) / 2 - 1
            p = min(STEP, max(_power(low), _power(high)))
            if bounded:
                p = max(p, _bounding(min(low, high)))
            powers.append(p)
            at_zero.append(p * (high + 1) - 1)
            at_one.append(p * (low + 1) - 1)
        self.at_zero, self.at_one, self.powers = tuple(at_zero), tuple(at_one), tuple(powers)

    def points(self, t: FloatArray) -> tuple[FloatArray, FloatArray]:
        n, density = self.N, self.density
        remainder = np.zeros(len(t))
        rest, s = [], [np.ones(len(t))]
        for k, p in enumerate(self.powers):
            u = 1 - t[:, k]
            up, down = (sum(math.comb(p - 1 + j, j) * v**j for j in range(p)) for v in (u, t[:, k]))
            rest.append(u**p * down)
            s.append(s[-1] * t[:, k] ** p * up)
            tail = n - 1 - k
            high = sum(density.alpha[k + 1 :]) + density.beta * tail * (tail - 1) / 2 - 1
            remainder += high * np.log(up) + (density.alpha[k] - 1) * np.log(down)
        points = np.stack([*(a * b for a, b in zip(s, rest, strict=False)), s[-1]], axis=1)
        if density.beta:
            for i, j in combinations(range(n), 2):
                remainder += density.beta * _log(np.abs(rest[i] - points[:, j] / s[i]))
        if density.factor is not None:
            remainder += _log(density.factor.factor(points))
        return points, remainder


def _bounding(m: float) -> int:
    """The power of an axis whose density begins with y^m, at least so large that in t it begins with t^1."""
    return min(HIGHEST, max(_power(m), math.ceil(2 / (m + 1))))


def _power(m: float) -> int:
    """The power of an axis whose density begins with y^m."""
    return min(STRONGEST, max(1, math.ceil(ORDER / (m + 1))))


def _log(values: FloatArray) -> FloatArray:
    """The logarithm, −inf where a density or a weight vanishes."""
    with np.errstate(divide="ignore"):
        return np.asarray(np.log(np.maximum(values, 0.0)))


@lru_cache(maxsize=512)
def _jacobi(n: int, a: float, b: float) -> tuple[FloatArray, FloatArray]:
    """Gauss rule for the weight t^a (1 − t)^b on [0, 1], weights summing to 1, for exponents of any size.

    Nodes are eigenvalues of the Jacobi matrix, weights squared first components (Golub & Welsch 1969); the recurrence
    is Abramowitz & Stegun 22.7.1.
    """
    k = np.arange(1, n, dtype=np.float64)
    whole = 2 * k + a + b
    diagonal = np.empty(n)
    diagonal[0] = (a - b) / (a + b + 2)
    diagonal[1:] = (a * a - b * b) / (whole * (whole + 2))
    factor = np.append(1.0, (k[1:] + a + b) / (whole[1:] - 1))[: n - 1]  # at k = 1 it is 1, or 0/0
    squares = 4 * k * (k + a) * (k + b) * factor / (whole**2 * (whole + 1))
    nodes, vectors = eigh_tridiagonal(diagonal, np.sqrt(squares))
    return (nodes + 1) / 2, np.asarray(vectors[0] ** 2)
