"""Bases of the polynomials that a permutation group leaves unchanged, one interface for every group.

A basis answers four questions: how many functions it has, their values and derivatives at representatives of orbits,
their means over a measure, and the exact sums over whole orbits in long integers. For S_N the functions are those of
:mod:`simplexcub.basis`; for every other group they are orthonormal combinations U of the polynomials of
:mod:`simplexcub.jacobi`, degree by degree: the kernel of Σ_g (2 − D(g) − D(g)ᵀ) over the generators g, with D(g) the
orthogonal matrix of the substitution λ → g λ.
"""

from __future__ import annotations

import math
from functools import lru_cache
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from simplexcub.basis import fixed_point, flat_points, symmetric_basis
from simplexcub.jacobi import jacobi_basis
from simplexcub.measures import Measure
from simplexcub.spectral import spectral_basis
from simplexcub.symmetry import Group, OrbitType, Spectra

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.object_]  # Python integers of any length

_CHUNK_POINTS = 4096
_NOISIEST = (
    1e-10  # the recurrence in power sums loses digits with the degree; beyond, Jacobi polynomials are symmetrised
)
_NOISE_POINTS = 6
FEW_COMPONENTS = 3  # spectra of more take the basis of power sums


class Basis(Protocol):
    """What the search needs to know of the polynomials it works on."""

    noise: float  # error of the functions in double precision

    def __len__(self) -> int: ...

    def jet(self, values: FloatArray, type_: OrbitType) -> FloatArray:
        """Functions and derivatives at orbit representatives given by distinct coordinates; shape (P, k, E)."""
        ...

    def sums_fixed(self, values: IntArray, weights: IntArray, type_: OrbitType, bits: int) -> IntArray:
        """Σ over the orbits of weight · mean of each function over the orbit, scaled by 2^bits; shape (E,)."""
        ...

    def means_fixed(self, measure: Measure, bits: int) -> IntArray:
        """E[φ] of every function, scaled by 2^bits; shape (E,)."""
        ...


class FullInvariants:
    """Symmetric polynomials, in the interface of :class:`Basis`."""

    def __init__(self, n: int, degree: int) -> None:
        self._basis = symmetric_basis(n, degree)
        self.noise = self._measured_noise()

    def _measured_noise(self) -> float:
        """Largest difference between the recurrence in doubles and in long integers, at a few random points."""
        bits = 200
        values = np.random.default_rng(0).integers(1, 1 << 20, (_NOISE_POINTS, self._basis.n)).astype(object)
        exact = (values << bits) // values.sum(axis=1)[:, None]
        exact[:, -1] = (1 << bits) - exact[:, :-1].sum(axis=1)
        ones = (1,) * self._basis.n
        doubles = self._basis.jet(_to_doubles(exact, bits), ones)[:, 0]
        return float(np.abs(doubles - _to_doubles(self._basis.values_fixed(exact, ones, bits), bits)).max())

    def __len__(self) -> int:
        return len(self._basis)

    def jet(self, values: FloatArray, type_: OrbitType) -> FloatArray:
        return self._basis.jet(values, type_.multiplicities)

    def sums_fixed(self, values: IntArray, weights: IntArray, type_: OrbitType, bits: int) -> IntArray:
        sums: IntArray = weights.dot(self._basis.values_fixed(values, type_.multiplicities, bits)) >> bits
        return sums

    def means_fixed(self, measure: Measure, bits: int) -> IntArray:
        return np.array(self._basis.means_fixed(measure, bits), dtype=object)


class SubgroupInvariants:
    """Polynomials that a proper subgroup of S_N leaves unchanged."""

    noise = 1e-13  # the recurrence of Jacobi polynomials loses nothing with the degree

    def __init__(self, group: Group, degree: int) -> None:
        self._group = group
        self._basis = jacobi_basis(group.n, degree)
        self._trivial = not group.generators
        self._combine = np.eye(len(self._basis)) if self._trivial else self._kernel()

    def _kernel(self) -> FloatArray:
        basis, n = self._basis, self._group.n
        nodes, weights = flat_points(n, self._basis.degree)
        generators = self._group.generators
        moved = np.zeros((len(generators), len(basis), len(basis)))
        for start in range(0, len(nodes), _CHUNK_POINTS):
            part = slice(start, start + _CHUNK_POINTS)
            here = basis.values(nodes[part]) * weights[part]
            for i, g in enumerate(generators):
                moved[i] += here @ basis.values(nodes[part][:, g]).T
        total = 2 * len(generators) * np.eye(len(basis)) - (moved + moved.transpose(0, 2, 1)).sum(axis=0)
        columns = []
        for d in range(basis.degree + 1):
            rows = np.flatnonzero(basis.degrees == d)
            eigenvalues, vectors = np.linalg.eigh(total[np.ix_(rows, rows)])
            for vector in vectors.T[eigenvalues < 1e-6]:
                column = np.zeros(len(basis))
                column[rows] = vector
                columns.append(column)
        return np.array(columns).T

    def __len__(self) -> int:
        return int(self._combine.shape[1])

    def jet(self, values: FloatArray, type_: OrbitType) -> FloatArray:
        pattern = np.array(type_.pattern)
        m = type_.multiplicities
        k = len(m)
        directions = np.array([(pattern == d) - m[d] / m[-1] * (pattern == k - 1) for d in range(k - 1)], dtype=float)
        jet = self._basis.jet(values[:, pattern], directions.reshape(k - 1, len(pattern)))
        if not self._trivial:
            jet = (self._combine.T @ jet.reshape(len(jet), -1)).reshape(len(self), k, len(values))
        return jet.transpose(2, 1, 0)

    def sums_fixed(self, values: IntArray, weights: IntArray, type_: OrbitType, bits: int) -> IntArray:
        # The combination is rounded, so only the sum over whole orbits is invariant to the last digit.
        images = np.array(self._group.arrangements(type_))
        nodes = values[:, images].reshape(-1, self._group.n)
        shares = np.repeat(weights, len(images)) // len(images)
        return self._mix(self._basis.values_fixed(nodes, bits).dot(shares) >> bits, bits)

    def means_fixed(self, measure: Measure, bits: int) -> IntArray:
        return self._mix(self._basis.means_fixed(measure, bits), bits)

    def _mix(self, sums: IntArray, bits: int) -> IntArray:
        scaled: IntArray = (sums * fixed_point(self._basis.norms, bits)) >> bits
        if self._trivial:
            return scaled
        mixed: IntArray = scaled.dot(fixed_point(self._combine, bits)) >> bits
        return mixed


def _to_doubles(integers: IntArray, bits: int) -> FloatArray:
    return np.array([[math.ldexp(float(v), -bits) for v in row] for row in integers])


@lru_cache(maxsize=32)
def invariant_basis(group: Group, degree: int) -> Basis:
    """The invariants of `group` up to `degree`, built once per process."""
    if group.is_full:
        full = FullInvariants(group.n, degree)
        if full.noise < _NOISIEST:
            return full
    return SubgroupInvariants(group, degree)


def basis_for(group: Group, degree: int, measure: Measure) -> Basis:
    """The polynomials to search on; for spectra of many components they are made for the measure."""
    if isinstance(group, Spectra) and group.n > FEW_COMPONENTS:
        return spectral_basis(measure, degree)
    return invariant_basis(group, degree)
