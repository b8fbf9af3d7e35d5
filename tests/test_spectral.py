"""The basis of symmetric polynomials for many components, against the basis for few and against its own arithmetic."""

import math

import numpy as np
import pytest

from simplexcub.basis import fixed_point
from simplexcub.invariants import basis_for, invariant_basis
from simplexcub.measures import bures, flat, hilbert_schmidt, induced
from simplexcub.search.extended import extended_means
from simplexcub.spectral import spectral_basis
from simplexcub.symmetry import OrbitType, named_group, spectra

# Partitions of t, OEIS A000041 (from memory): symmetric polynomials of degree ≤ t where N ≥ t.
PARTITIONS = {1: 1, 2: 2, 4: 5, 6: 11, 8: 22, 10: 42}


@pytest.mark.parametrize(("degree", "count"), PARTITIONS.items())
def test_the_number_of_functions_does_not_grow_with_n(degree, count):
    assert len(spectral_basis(hilbert_schmidt(12), degree)) == count
    assert len(spectral_basis(flat(40), degree)) == count


@pytest.mark.parametrize("measure", [flat(4), hilbert_schmidt(5), bures(4), induced(4, 7)], ids=str)
def test_the_same_space_and_the_same_means_as_the_basis_for_few_components(measure):
    # Means are linear: if ψ = φ X at points then E[ψ] = E[φ] X. The other basis has another recurrence.
    few, many = invariant_basis(named_group("full", measure.N), 6), spectral_basis(measure, 6)
    generic = OrbitType(tuple(range(measure.N)), 1)
    points = measure.sample(np.random.default_rng(3), 4 * len(few))
    left, right = few.jet(points, generic)[:, 0], many.jet(points, generic)[:, 0]
    change, _, rank, _ = np.linalg.lstsq(left, right, rcond=None)
    assert len(few) == len(many) == rank
    assert left @ change == pytest.approx(right, abs=1e-8)
    means = extended_means(named_group("full", measure.N), 6, (), measure)
    assert means @ change == pytest.approx(extended_means(spectra(measure.N), 6, (), measure), abs=1e-8)


@pytest.mark.parametrize("sizes", [(1,) * 9, (4, 3, 2), (9,)], ids=str)
def test_derivatives_agree_with_differences(sizes):
    basis = spectral_basis(hilbert_schmidt(9), 7)
    type_ = OrbitType(tuple(j for j, m in enumerate(sizes) for _ in range(m)), 1)
    rng = np.random.default_rng(4)
    m = np.array(sizes)
    values = rng.uniform(0.5, 1.5, (5, len(sizes)))
    values /= (values @ m)[:, None]
    jet, step = basis.jet(values, type_), 1e-6
    for j in range(len(sizes) - 1):
        shift = np.zeros(len(sizes))
        shift[j], shift[-1] = step, -step * m[j] / m[-1]
        slope = (basis.jet(values + shift, type_)[:, 0] - basis.jet(values - shift, type_)[:, 0]) / (2 * step)
        assert jet[:, 1 + j] == pytest.approx(slope, rel=1e-4, abs=1e-4 * np.abs(slope).max())


def test_long_integers_agree_with_doubles_and_with_longer_ones():
    measure, bits = hilbert_schmidt(16), 200
    basis = spectral_basis(measure, 8)
    assert basis.noise < 1e-9
    generic = OrbitType(tuple(range(16)), 1)
    values = fixed_point(measure.sample(np.random.default_rng(5), 3), bits)
    values[:, -1] = (1 << bits) - values[:, :-1].sum(axis=1)
    weights = np.array([1 << bits] * 3, dtype=object)
    sums = basis.sums_fixed(values, weights, generic, bits)
    doubles = basis.jet(np.array([[math.ldexp(float(v), -bits) for v in row] for row in values]), generic)[:, 0]
    assert [math.ldexp(float(s), -bits) for s in sums] == pytest.approx(doubles.sum(axis=0), abs=1e-9)
    longer = basis.sums_fixed(values << 100, weights << 100, generic, bits + 100)
    assert all(abs((b >> 100) - a) < 1 << 40 for a, b in zip(sums, longer, strict=True))
    means, finer = basis.means_fixed(measure, bits), basis.means_fixed(measure, bits + 100)
    assert all(abs((b >> 100) - a) <= 1 for a, b in zip(means, finer, strict=True))


def test_functions_are_about_orthonormal_over_the_measure():
    measure = hilbert_schmidt(16)
    basis = spectral_basis(measure, 6)
    values = basis.jet(measure.sample(np.random.default_rng(6), 2000), OrbitType(tuple(range(16)), 1))[:, 0]
    eigenvalues = np.linalg.eigvalsh(values.T @ values / 2000)
    assert 0.2 < eigenvalues[0] < eigenvalues[-1] < 5


def test_which_basis_is_taken():
    assert basis_for(spectra(3), 5, flat(3)) is invariant_basis(spectra(3), 5)
    assert basis_for(spectra(8), 5, flat(8)) is spectral_basis(flat(8), 5)


def test_spectra_of_many_components_list_no_permutations():
    group = spectra(1000)
    assert group.is_full
    (type_,) = group.types
    assert (type_.size, type_.unknowns) == (1, 1000)
    assert group.arrangements(type_) == [type_.pattern]
