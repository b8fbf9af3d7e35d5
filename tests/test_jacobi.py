"""The product basis on the simplex: orthonormality, derivatives, long integers and means, each against another way."""

import itertools
import math
from fractions import Fraction

import numpy as np
import pytest
from scipy.special import eval_jacobi

from simplexcub.jacobi import jacobi_basis
from simplexcub.measures import dirichlet, flat, hilbert_schmidt, induced

BITS = 200
CASES = [(2, 9), (3, 6), (4, 4), (5, 3)]


def points(n, count, seed=0):
    return np.random.default_rng(seed).dirichlet(np.ones(n), count)


def homogeneous(n, alpha):
    """Φ_α as {exponents: coefficient}, multiplied out from the sum of binomials in the module's docstring."""
    product = {(0,) * n: Fraction(1)}
    for j in range(n - 1):
        degree, a = alpha[j], 2 * sum(alpha[j + 1 :]) + n - j - 2
        factor = {}
        for k in range(degree + 1):
            coefficient = (-1) ** k * math.comb(degree + a, degree - k) * math.comb(degree, k)
            # (λ_{j+1} + … )^k by the multinomial theorem
            for split in itertools.product(range(k + 1), repeat=n - 1 - j):
                if sum(split) == k:
                    exponents = (0,) * j + (degree - k,) + split
                    many = math.factorial(k) // math.prod(map(math.factorial, split))
                    factor[exponents] = factor.get(exponents, 0) + coefficient * many
        grown = {}
        for (e, c), (f, d) in itertools.product(product.items(), factor.items()):
            key = tuple(x + y for x, y in zip(e, f, strict=True))
            grown[key] = grown.get(key, Fraction(0)) + c * d
        product = grown
    return product


def exact_mean(measure, polynomial):
    return sum((c * measure.moment(e) for e, c in polynomial.items()), Fraction(0))


@pytest.mark.parametrize(("n", "degree"), CASES)
def test_as_many_functions_as_polynomials_by_rising_degree(n, degree):
    basis = jacobi_basis(n, degree)
    assert len(basis) == math.comb(degree + n - 1, n - 1) == len(set(map(tuple, basis.indices)))
    assert list(basis.degrees) == sorted(basis.degrees)
    assert list(basis.degrees) == [sum(index) for index in basis.indices]


@pytest.mark.parametrize(("n", "degree"), [(2, 6), (3, 4), (4, 2)])
def test_orthonormal_under_the_flat_measure_exactly(n, degree):
    basis, measure = jacobi_basis(n, degree), flat(n)
    functions = [homogeneous(n, tuple(int(a) for a in index)) for index in basis.indices]
    for i, j in itertools.combinations_with_replacement(range(len(basis)), 2):
        product = {}
        for (e, c), (f, d) in itertools.product(functions[i].items(), functions[j].items()):
            key = tuple(x + y for x, y in zip(e, f, strict=True))
            product[key] = product.get(key, Fraction(0)) + c * d
        mean = exact_mean(measure, product)
        if i == j:
            assert float(mean) * basis.norms[i] ** 2 == pytest.approx(1, abs=1e-14)
        else:
            assert mean == 0


@pytest.mark.parametrize(("n", "degree"), CASES)
def test_values_against_the_sum_of_binomials(n, degree):
    basis, x = jacobi_basis(n, degree), points(n, 7)
    values = basis.values(x)
    for row, index, norm in zip(values, basis.indices, basis.norms, strict=True):
        polynomial = homogeneous(n, tuple(int(a) for a in index))
        direct = sum(float(c) * np.prod(x**e, axis=1) for e, c in polynomial.items())
        assert row == pytest.approx(norm * direct, rel=1e-9, abs=1e-9)


def test_two_components_give_legendre_polynomials():
    # On [0, 1] with λ_1 = x the flat measure is that of Legendre: P_n^{(0,0)}(2x − 1), normalised by √(2n + 1).
    basis, x = jacobi_basis(2, 30), points(2, 11)
    for n, row in enumerate(basis.values(x)):
        assert row == pytest.approx(math.sqrt(2 * n + 1) * eval_jacobi(n, 0, 0, 2 * x[:, 0] - 1), abs=1e-12)


def test_three_components_give_koornwinder_products():
    # T. Koornwinder (1975) 435, class of the triangle, with s = λ_2 + λ_3:
    # P_n^{(2m+1,0)}(2λ_1 − 1) · s^m P_m^{(0,0)}((λ_2 − λ_3)/s).
    basis, x = jacobi_basis(3, 20), points(3, 11)
    s = x[:, 1] + x[:, 2]
    for (n, m), norm, row in zip(basis.indices, basis.norms, basis.values(x), strict=True):
        expected = eval_jacobi(n, 2 * m + 1, 0, 2 * x[:, 0] - 1) * s**m * eval_jacobi(m, 0, 0, (x[:, 1] - x[:, 2]) / s)
        assert row == pytest.approx(norm * expected, abs=1e-11)


@pytest.mark.parametrize(("n", "degree"), [*CASES, (3, 25)])
def test_derivatives_against_differences(n, degree):
    basis, x = jacobi_basis(n, degree), points(n, 300)  # more points than are worked on at once
    directions = np.random.default_rng(1).standard_normal((n - 1, n))
    directions -= directions.mean(axis=1, keepdims=True)
    jet = basis.jet(x, directions)
    assert jet.shape == (len(basis), n, len(x))
    assert jet[:, 0] == pytest.approx(basis.values(x), rel=1e-12, abs=1e-12)
    h = 1e-6
    for d, direction in enumerate(directions):
        difference = (basis.values(x + h * direction) - basis.values(x - h * direction)) / (2 * h)
        scale = np.abs(jet[:, 1 + d]).max(axis=1, keepdims=True) + 1
        assert np.abs(jet[:, 1 + d] - difference).max() < 1e-4 * scale.max()
        assert (np.abs(jet[:, 1 + d] - difference) / scale).max() < 1e-4


def test_jet_without_directions_is_the_values():
    basis, x = jacobi_basis(3, 4), points(3, 5)
    assert np.array_equal(basis.jet(x, np.empty((0, 3)))[:, 0], basis.jet(x, np.zeros((2, 3)))[:, 0])


@pytest.mark.parametrize(("n", "degree"), [*CASES, (3, 12)])
def test_long_integers_agree_with_exact_fractions_and_doubles(n, degree):
    basis = jacobi_basis(n, degree)
    x = np.array([[int(v * 2**40) << (BITS - 40) for v in row] for row in points(n, 4)], dtype=object)
    x[:, -1] = (1 << BITS) - x[:, :-1].sum(axis=1)
    fixed = basis.values_fixed(x, BITS)
    floats = np.array([[float(Fraction(int(v), 1 << BITS)) for v in row] for row in fixed])
    nodes = np.array([[float(Fraction(int(v), 1 << BITS)) for v in row] for row in x])
    assert floats * basis.norms[:, None] == pytest.approx(basis.values(nodes), rel=1e-10, abs=1e-10)
    exact = [[Fraction(int(v), 1 << BITS) for v in row] for row in x]
    for row, index in list(zip(fixed, basis.indices, strict=True))[:40]:
        polynomial = homogeneous(n, tuple(int(a) for a in index))
        for value, node in zip(row, exact, strict=True):
            direct = sum(c * math.prod(v**k for v, k in zip(node, e, strict=True)) for e, c in polynomial.items())
            assert abs(Fraction(int(value), 1 << BITS) - direct) < Fraction(1, 1 << (BITS - 40))


@pytest.mark.parametrize(
    "measure",
    [flat(3), hilbert_schmidt(3), induced(3, 5), dirichlet(["1/2", 2, "7/3"]), dirichlet([1, 2, 3, "1/2"]), flat(2)],
    ids=str,
)
def test_means_against_moments(measure):
    degree = 6 if measure.N < 4 else 4
    basis = jacobi_basis(measure.N, degree)
    for mean, index in zip(basis.means_fixed(measure, BITS), basis.indices, strict=True):
        exact = exact_mean(measure, homogeneous(measure.N, tuple(int(a) for a in index)))
        assert 0 <= exact - Fraction(int(mean), 1 << BITS) < Fraction(1, 1 << BITS)


@pytest.mark.parametrize("n", [3, 5])
def test_means_of_the_flat_measure_are_those_of_the_constant(n):
    assert [int(m) for m in jacobi_basis(n, 4).means_fixed(flat(n), BITS)][1:] == [0] * (math.comb(n + 3, 4) - 1)
    assert jacobi_basis(n, 4).norms[0] == 1
