"""The symmetric basis: what it spans, its derivatives, and its three evaluations against each other."""

from fractions import Fraction
from math import ldexp

import numpy as np
import pytest

import simplexcub as sc
from simplexcub.basis import SymmetricBasis, centred_means, symmetric_basis

SIZES = [(2, 9), (3, 12), (4, 8), (5, 6)]


def partitions_into(parts, total):
    """Number of partitions of integers ≤ total into the given parts, by the generating function."""
    ways = [1] + [0] * total
    for p in parts:
        for i in range(p, total + 1):
            ways[i] += ways[i - p]
    return sum(ways)


@pytest.mark.parametrize(("n", "degree"), SIZES)
def test_dimension_is_number_of_partitions_into_parts_two_to_n(n, degree):
    assert len(symmetric_basis(n, degree)) == partitions_into(range(2, n + 1), degree)


def test_dimension_stops_growing_at_partition_number():
    # p(0) + … + p(8) counted with e_1 = 1 leaves p(8) = 22; values of p from memory, checked by the function above.
    assert len(symmetric_basis(8, 8)) == len(symmetric_basis(9, 8)) == 22


@pytest.mark.parametrize(("n", "degree"), SIZES)
def test_functions_are_symmetric(n, degree):
    rng = np.random.default_rng(1)
    x = rng.dirichlet(np.ones(n), 20)
    basis = symmetric_basis(n, degree)
    ones = (1,) * n
    assert np.allclose(basis.jet(x, ones)[:, 0], basis.jet(x[:, rng.permutation(n)], ones)[:, 0], atol=1e-9)


@pytest.mark.parametrize(("n", "degree"), SIZES)
def test_orthonormal_for_the_flat_measure(n, degree):
    means = [ldexp(float(m), -200) for m in symmetric_basis(n, degree).means_fixed(sc.flat(n), 200)]
    assert np.allclose(means, np.eye(len(means))[0], atol=1e-11)


@pytest.mark.parametrize("type_", [(1, 1, 1, 1), (2, 1, 1), (2, 2), (3, 1)])
def test_derivatives_against_differences(type_):
    basis = symmetric_basis(4, 7)
    m = np.array(type_, dtype=float)
    rng = np.random.default_rng(2)
    free = rng.uniform(0.05, 0.2, (6, len(type_) - 1))
    h = 1e-6

    def at(v):
        return basis.jet(np.column_stack([v, (1 - v @ m[:-1]) / m[-1]]), type_)

    jet = at(free)
    for j in range(len(type_) - 1):
        shift = h * np.eye(len(type_) - 1)[j]
        difference = (at(free + shift)[:, 0] - at(free - shift)[:, 0]) / (2 * h)
        assert np.allclose(jet[:, 1 + j], difference, rtol=1e-6, atol=1e-5)


def test_representatives_and_written_out_nodes_agree():
    basis = symmetric_basis(4, 6)
    short = basis.jet(np.array([[0.1, 0.35]]), (3, 2 - 1))[:, 0]
    long = basis.jet(np.array([[0.1, 0.1, 0.1, 0.7]]), (1, 1, 1, 1))[:, 0]
    assert not np.allclose(short, long)  # 3·0.1 + 0.35 ≠ 1: the caller's coordinates are used as they are
    assert np.allclose(basis.jet(np.array([[0.1, 0.7]]), (3, 1))[:, 0], long)


def test_long_integers_agree_with_doubles():
    basis = symmetric_basis(3, 12)
    x = np.random.default_rng(3).dirichlet(np.ones(3), 8)
    bits = 160
    fixed = np.array([[int(Fraction(v) * (1 << bits)) for v in row] for row in x], dtype=object)
    values = basis.values_fixed(fixed, (1, 1, 1), bits)
    doubles = np.array([[ldexp(float(v), -bits) for v in row] for row in values])
    assert np.allclose(doubles, basis.jet(x, (1, 1, 1))[:, 0], atol=1e-10)


def test_means_against_sampled_spectra():
    mu = sc.hilbert_schmidt(3)
    basis = SymmetricBasis(3, 6)
    means = np.array([ldexp(float(m), -200) for m in basis.means_fixed(mu, 200)])
    values = basis.jet(mu.sample(np.random.default_rng(4), 40_000), (1, 1, 1))[:, 0]
    error = values.std(axis=0) / np.sqrt(len(values))
    assert (np.abs(values.mean(axis=0) - means) <= 5 * error + 1e-12).all()  # five standard deviations


def test_centred_mean_of_purity():
    # N Σ (λ_i − 1/N)² = N p_2 − 1, and E[p_2] = (N + K)/(NK + 1): Lubkin, J. Math. Phys. 19 (1978) 1028.
    n, k = 4, 6
    purity = Fraction(n + k, n * k + 1)
    assert centred_means(sc.induced(n, k), ((0, 0, 0), (1, 0, 0))) == [1, n * purity - 1]
