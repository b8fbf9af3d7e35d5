"""Polynomials that a group leaves unchanged: how many, that they are, and their sums and means by other ways."""

import itertools
import math
from fractions import Fraction

import numpy as np
import pytest

from simplexcub.basis import flat_points
from simplexcub.invariants import invariant_basis
from simplexcub.jacobi import jacobi_basis
from simplexcub.measures import dirichlet, flat, hilbert_schmidt
from simplexcub.search.counts import random_values
from simplexcub.search.extended import extended_means
from simplexcub.symmetry import named_group

BITS = 160
CASES = [
    ("full", 3, 9),
    ("full", 4, 7),
    ("none", 3, 5),
    ("none", 4, 3),
    ("cyclic", 3, 8),
    ("cyclic", 5, 3),
    ("dihedral", 4, 5),
    ("alternating", 4, 6),
    ("klein", 4, 5),
    ("stabiliser", 3, 6),
    ("stabiliser", 4, 4),
    ("product-2-2", 4, 5),
    ("product-2-1-2", 5, 3),
]


def cycle_lengths(g):
    seen, lengths = set(), []
    for start in range(len(g)):
        length, i = 0, start
        while i not in seen:
            seen.add(i)
            length, i = length + 1, g[i]
        if length:
            lengths.append(length)
    return lengths


def molien(group, degree):
    """Invariants of degree ≤ `degree` on Σ λ_i = 1: those of exactly this degree in N free variables.

    T. Molien (1897): their number is the mean over the group of the coefficient of z^degree in Π 1/(1 − z^length).
    """
    total = 0
    for g in group.elements:
        series = [1] + [0] * degree
        for length in cycle_lengths(g):
            for k in range(length, degree + 1):
                series[k] += series[k - length]
        total += series[degree]
    assert total % len(group.elements) == 0
    return total // len(group.elements)


def values_at(group, degree, nodes):
    """All invariants at any points, by the generic orbit type; shape (P, E)."""
    generic = group.types[-1]
    assert generic.unknowns == group.n
    return invariant_basis(group, degree).jet(nodes, generic)[:, 0]


@pytest.mark.parametrize(("name", "n", "degree"), CASES)
def test_as_many_invariants_as_the_characters_count(name, n, degree):
    group = named_group(name, n)
    for d in range(1, degree + 1):
        assert len(invariant_basis(group, d)) == molien(group, d)


@pytest.mark.parametrize(("name", "n", "degree"), CASES)
def test_invariant_and_independent(name, n, degree):
    group = named_group(name, n)
    nodes = np.random.default_rng(0).dirichlet(np.ones(n), 2 * math.comb(degree + n - 1, n - 1))
    values = values_at(group, degree, nodes)
    for g in group.generators:
        assert values_at(group, degree, nodes[:, g]) == pytest.approx(values, abs=1e-9)
    assert np.linalg.matrix_rank(values, tol=1e-8) == values.shape[1]
    # They are polynomials of the degree: no more than the space that holds them all.
    everything = jacobi_basis(n, degree).values(nodes).T
    assert np.linalg.matrix_rank(np.column_stack([everything, values]), tol=1e-8) == everything.shape[1]


@pytest.mark.parametrize(("name", "n", "degree"), CASES)
def test_orthonormal_under_the_flat_measure(name, n, degree):
    nodes, weights = flat_points(n, 2 * degree)
    values = values_at(named_group(name, n), degree, nodes)
    assert (values * weights[:, None]).T @ values == pytest.approx(np.eye(values.shape[1]), abs=1e-9)


@pytest.mark.parametrize(("name", "n", "degree"), CASES)
def test_derivatives_along_the_free_coordinates_of_every_type(name, n, degree):
    group = named_group(name, n)
    basis = invariant_basis(group, degree)
    h = 1e-6
    for t in group.types:
        m = np.array(t.multiplicities)
        values = random_values(t, np.random.default_rng(1).dirichlet(np.ones(n), 5))
        assert values @ m == pytest.approx(np.ones(5))
        jet = basis.jet(values, t)
        assert jet.shape == (5, len(m), len(basis))
        for j in range(len(m) - 1):
            step = np.zeros(len(m))
            step[j], step[-1] = h, -h * m[j] / m[-1]
            difference = (basis.jet(values + step, t)[:, 0] - basis.jet(values - step, t)[:, 0]) / (2 * h)
            assert jet[:, 1 + j] == pytest.approx(difference, abs=2e-6 * (1 + np.abs(jet).max()))


@pytest.mark.parametrize(("name", "n", "degree"), CASES)
def test_long_sums_are_the_weighted_means_over_orbits(name, n, degree):
    group = named_group(name, n)
    basis = invariant_basis(group, degree)
    rng = np.random.default_rng(2)
    for t in group.types:
        m = t.multiplicities
        values = random_values(t, rng.dirichlet(np.ones(n), 3))
        weights = rng.random(3)
        fixed = np.array([[int(v * 2**50) << (BITS - 50) for v in row] for row in values], dtype=object)
        fixed[:, -1] = ((1 << BITS) - sum(k * fixed[:, j] for j, k in enumerate(m[:-1]))) // m[-1]
        shares = np.array([int(w * 2**50) << (BITS - 50) for w in weights], dtype=object)
        sums = basis.sums_fixed(fixed, shares, t, BITS)
        found = [math.ldexp(float(s), -BITS) for s in sums]
        assert found == pytest.approx(weights @ basis.jet(values, t)[:, 0], abs=1e-9)


@pytest.mark.parametrize(
    ("name", "measure", "degree"),
    [
        ("none", dirichlet([1, 2, "1/2"]), 5),
        ("alpha", dirichlet([3, 1, 3]), 5),
        ("product-2-1", dirichlet(["1/2", "1/2", 4]), 4),
        ("cyclic", hilbert_schmidt(3), 7),
        ("full", hilbert_schmidt(3), 7),
        ("klein", hilbert_schmidt(4), 4),
        ("full", flat(4), 6),
    ],
)
def test_means_against_moments(name, measure, degree):
    # Invariants are written in monomials by interpolation; the means of these are exact.
    group = named_group(name, measure.N, getattr(measure, "alpha", ()))
    exponents = [e for e in itertools.product(range(degree + 1), repeat=measure.N) if sum(e) == degree]
    nodes = np.random.default_rng(3).dirichlet(np.ones(measure.N), 3 * len(exponents))
    monomials = np.array([np.prod(nodes**e, axis=1) for e in exponents]).T
    coefficients, *_ = np.linalg.lstsq(monomials, values_at(group, degree, nodes), rcond=None)
    expected = np.array([float(measure.moment(e)) for e in exponents]) @ coefficients
    assert extended_means(group, degree, (), measure) == pytest.approx(expected, abs=1e-8)
    fixed = invariant_basis(group, degree).means_fixed(measure, BITS)
    assert [float(Fraction(int(v), 1 << BITS)) for v in fixed] == pytest.approx(expected, abs=1e-8)


def test_mean_vectors_are_read_only():
    with pytest.raises(ValueError, match="read-only"):
        extended_means(named_group("cyclic", 3), 3, (), flat(3))[0] = 2.0
