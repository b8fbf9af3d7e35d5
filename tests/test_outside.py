"""Moments and rules against numbers from outside: libraries, integration, published tables, sampling."""

from __future__ import annotations

import math
from fractions import Fraction
from itertools import combinations, pairwise

import numpy as np
import pytest
from mpmath import mp, mpf
from numpy.polynomial.legendre import leggauss
from scipy import integrate, stats
from scipy.special import beta

import simplexcub as sc
from simplexcub.measures import Measure, dirichlet, flat, hilbert_schmidt, induced
from simplexcub.symmetry import orbit_size

ALPHAS = [("1", "1"), ("1/2", "3"), ("2", "3", "5"), ("0.25", "1", "7/2", "4")]


@pytest.mark.parametrize("alpha", ALPHAS)
def test_first_and_second_dirichlet_moments_are_those_of_scipy(alpha: tuple[str, ...]) -> None:
    measure = dirichlet(alpha)
    n = measure.N
    reference = stats.dirichlet([float(Fraction(a)) for a in alpha])
    unit = np.eye(n, dtype=int)
    first = np.array([float(measure.moment(tuple(row))) for row in unit])
    np.testing.assert_allclose(first, reference.mean(), rtol=1e-14)
    second = np.array([[float(measure.moment(tuple(unit[i] + unit[j]))) for j in range(n)] for i in range(n)])
    np.testing.assert_allclose(second - np.outer(first, first), reference.cov(), rtol=1e-12)


@pytest.mark.parametrize("alpha", ALPHAS)
def test_marginal_dirichlet_moments_are_ratios_of_scipys_beta_function(alpha: tuple[str, ...]) -> None:
    measure = dirichlet(alpha)
    a = float(Fraction(alpha[0]))
    rest = sum(float(Fraction(b)) for b in alpha[1:])
    for k in range(1, 8):
        exponents = (k, *(0,) * (measure.N - 1))
        np.testing.assert_allclose(float(measure.moment(exponents)), beta(a + k, rest) / beta(a, rest), rtol=1e-12)


def density(measure: Measure, point: list[mpf]) -> mpf:
    """The unnormalised density, straight from its definition."""
    alpha, vandermonde = measure.over_dirichlet()
    value = mpf(1)
    for x, a in zip(point, alpha, strict=True):
        value *= x ** (mpf(a.numerator) / a.denominator - 1)
    for x, y in combinations(point, 2) if vandermonde else ():
        value *= (x - y) ** 2
    return value


@pytest.mark.parametrize("measure", [flat(2), hilbert_schmidt(2), induced(2, 5), dirichlet(["1/2", "1/2"])])
def test_moments_of_two_components_by_integration_in_extended_precision(measure: Measure) -> None:
    with mp.workdps(30):
        mass = mp.quad(lambda x: density(measure, [x, 1 - x]), [0, 0.5, 1])
        for a, b in ((1, 0), (1, 1), (3, 2), (0, 6)):
            raw = mp.quad(lambda x, a=a, b=b: x**a * (1 - x) ** b * density(measure, [x, 1 - x]), [0, 0.5, 1])
            exact = measure.moment((a, b))
            assert abs(raw / mass - mpf(exact.numerator) / exact.denominator) < 1e-13


@pytest.mark.parametrize("measure", [flat(3), hilbert_schmidt(3), induced(3, 4), dirichlet([1, 2, 3])])
def test_moments_of_three_components_by_integration(measure: Measure) -> None:
    alpha, vandermonde = measure.over_dirichlet()

    def integral(a: tuple[int, int, int]) -> float:
        def integrand(y: float, x: float) -> float:
            z = 1 - x - y
            value = x ** float(alpha[0] - 1 + a[0]) * y ** float(alpha[1] - 1 + a[1]) * z ** float(alpha[2] - 1 + a[2])
            return value * (((x - y) * (x - z) * (y - z)) ** 2 if vandermonde else 1.0)

        return float(integrate.dblquad(integrand, 0, 1, 0, lambda x: 1 - x, epsabs=1e-14)[0])

    mass = integral((0, 0, 0))
    for exponents in ((1, 0, 0), (2, 1, 0), (1, 1, 1), (4, 0, 2)):
        assert integral(exponents) / mass == pytest.approx(float(measure.moment(exponents)), rel=1e-9)


@pytest.mark.parametrize(("n", "k"), [(2, 2), (3, 3), (3, 5), (4, 4)])
def test_moments_lie_within_the_confidence_bound_of_random_states(n: int, k: int) -> None:
    """Traces out K of a random pure state of N·K dimensions; five standard errors are exceeded once in 10^6 runs."""
    rng = np.random.default_rng(11)
    states = rng.standard_normal((40_000, n, k)) + 1j * rng.standard_normal((40_000, n, k))
    states /= np.sqrt((np.abs(states) ** 2).sum(axis=(1, 2), keepdims=True))
    reduced = states @ states.conj().transpose(0, 2, 1)
    for power in (2, 3, 4):
        traces = np.trace(np.linalg.matrix_power(reduced, power), axis1=1, axis2=2).real
        exact = float(induced(n, k).power_sum_moment((power,)))
        assert abs(traces.mean() - exact) <= 5 * traces.std() / math.sqrt(len(traces))


@pytest.mark.parametrize(("n", "k"), [(2, 2), (2, 9), (3, 3), (4, 4), (4, 6), (5, 5)])
def test_mean_purity_is_that_of_lubkin(n: int, k: int) -> None:
    assert induced(n, k).power_sum_moment((2,)) == Fraction(n + k, n * k + 1)


@pytest.mark.parametrize("n", [1, 2, 3, 5, 10, 20])
def test_flat_rules_of_two_components_are_those_of_gauss_and_legendre(n: int) -> None:
    rule = sc.solve(flat(2), degree=2 * n - 1)
    order = np.argsort(rule.nodes[:, 0])
    x, w = leggauss(n)
    np.testing.assert_allclose(rule.nodes[order, 0], (1 + x) / 2, atol=1e-15)
    np.testing.assert_allclose(rule.weights[order], w / 2, rtol=1e-12)


def test_the_seven_point_rule_is_that_of_radon() -> None:
    """Radon 1948: centre with weight 9/40, two orbits (a, a, 1 − 2a) with a = (6 ± √15)/21, (155 ± √15)/1200."""
    rule = sc.solve(flat(3), degree=5)
    with mp.workdps(60):
        root = mp.sqrt(15)
        expected = [(mpf(1) / 3, mpf(9) / 40), *(((6 + s * root) / 21, (155 + s * root) / 1200) for s in (-1, 1))]
        found = sorted((mpf(o.values[0]), mpf(o.weight) / orbit_size(o.multiplicities)) for o in rule.orbits)
        for (a, w), (b, v) in zip(found, sorted(expected), strict=True):
            assert abs(a - b) < mpf(10) ** -49
            assert abs(w - v) < mpf(10) ** -49


@pytest.mark.parametrize(("n", "k"), [(2, 2), (2, 3), (2, 8)])
def test_gauss_rules_of_rising_degree_close_in_on_the_entropy_of_page(n: int, k: int) -> None:
    page = float(sum(Fraction(1, j) for j in range(k + 1, n * k + 1)) - Fraction(n - 1, 2 * k))
    errors = []
    for degree in (9, 19, 39, 79):
        rule = sc.solve(induced(n, k), degree=degree, digits=20)
        entropy = rule.average(lambda x: -(x * np.log(x)).sum(axis=1))
        errors.append(abs(entropy - page))
    assert errors[-1] < 1e-6
    assert all(later < earlier / 8 or later < 1e-15 for earlier, later in pairwise(errors))
