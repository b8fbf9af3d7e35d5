"""Invariant polynomials, and functions besides them, in the one interface that the search works on.

A function f is replaced by (f − Σ c_i φ_i)/r, with c_i from least squares on many points of the simplex and r the size
of what is left, so that the equations stay well conditioned. The c_i are doubles taken as exact, so any number of
digits can be had of the difference. Where hardly anything is left, f is a combination of the others to all that the
search could tell, and is refused.
"""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from simplexcub.basis import fixed_point, flat_points
from simplexcub.errors import InputError
from simplexcub.invariants import Basis, basis_for, invariant_basis
from simplexcub.measures import Measure
from simplexcub.search.extra import Extra
from simplexcub.symmetry import Group, OrbitType

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.object_]

_FINER = 12  # degrees beyond the polynomials' that the points can tell apart
_DEPENDENT = 1e-6  # share of a function that must not be a combination of the others


class ExtendedBasis:
    """Polynomials and further functions, in the interface of :class:`simplexcub.invariants.Basis`."""

    def __init__(self, group: Group, degree: int, also: tuple[Extra, ...]) -> None:
        self._base = invariant_basis(group, degree)
        self._also = also
        points, weights = flat_points(group.n, degree + _FINER)
        generic = group.types[-1]
        root = np.sqrt(weights)[:, None]
        known = self._base.jet(points, generic)[:, 0] * root
        self._combine: list[FloatArray] = []
        self._scale: list[float] = []
        for extra in also:
            values = extra.jet(points, generic.multiplicities)[:, 0] * root[:, 0]
            c = np.linalg.lstsq(known, values, rcond=None)[0]
            rest = values - known @ c
            size = float(np.linalg.norm(rest))
            if not size > _DEPENDENT * float(np.linalg.norm(values)):
                raise InputError(
                    "a function in also must not be a combination of the polynomials and the others, to all that"
                    " doubles can tell",
                    extra.label.name,
                    "Leave it out, or lower the degree.",
                )
            self._combine.append(np.asarray(c, dtype=np.float64))
            self._scale.append(1.0 / size)
            known = np.column_stack([known, rest / size])
        self.noise = self._base.noise + 1e-15 * max(self._scale)

    def __len__(self) -> int:
        return len(self._base) + len(self._also)

    def jet(self, values: FloatArray, type_: OrbitType) -> FloatArray:
        out = self._base.jet(values, type_)
        for extra, c, scale in zip(self._also, self._combine, self._scale, strict=True):
            new = (extra.jet(values, type_.multiplicities) - out @ c) * scale
            out = np.concatenate([out, new[:, :, None]], axis=2)
        return out

    def sums_fixed(self, values: IntArray, weights: IntArray, type_: OrbitType, bits: int) -> IntArray:
        sums = self._base.sums_fixed(values, weights, type_, bits)
        also = [weights.dot(extra.fixed(values, type_.multiplicities, bits)) >> bits for extra in self._also]
        return self._extended(sums, also, bits)

    def means_fixed(self, measure: Measure, bits: int) -> IntArray:
        also = [extra.mean_fixed(measure, bits) for extra in self._also]
        return self._extended(self._base.means_fixed(measure, bits), also, bits)

    def _extended(self, sums: IntArray, also: list[int], bits: int) -> IntArray:
        for value, c, scale in zip(also, self._combine, self._scale, strict=True):
            rest = value - (int(sums.dot(fixed_point(c, bits))) >> bits)
            sums = np.append(
                sums, np.array([rest * int(fixed_point(np.array([scale]), bits)[0]) >> bits], dtype=object)
            )
        return sums


@lru_cache(maxsize=32)
def invariant_extension(group: Group, degree: int, also: tuple[Extra, ...]) -> Basis:
    """The invariants of `group` up to `degree` and the functions in `also`, built once per process."""
    return ExtendedBasis(group, degree, also) if also else invariant_basis(group, degree)


def extended_basis(group: Group, degree: int, also: tuple[Extra, ...], measure: Measure) -> Basis:
    """The functions to search on; for spectra of many components they are made for the measure."""
    return invariant_extension(group, degree, also) if also else basis_for(group, degree, measure)


@lru_cache(maxsize=64)
def extended_means(group: Group, degree: int, also: tuple[Extra, ...], measure: Measure) -> FloatArray:
    """The means of all of them in double precision."""
    bits = 120
    means = extended_basis(group, degree, also, measure).means_fixed(measure, bits)
    vector = np.array([math.ldexp(float(m), -bits) for m in means])
    vector.flags.writeable = False
    return vector
