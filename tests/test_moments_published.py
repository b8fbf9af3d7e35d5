"""Exact means against published formulas, values worked by hand, and quadrature of the density."""

from __future__ import annotations

import math
from fractions import Fraction

import mpmath
import pytest
from mpmath import mp, mpf

from simplexcub.measures import (
    Measure,
    bures,
    bures_hall,
    dirichlet,
    flat,
    hilbert_schmidt,
    induced,
    ordered,
    orthogonal,
    polynomial_density,
    symplectic,
)


@pytest.mark.parametrize(("n", "k"), [(2, 2), (2, 5), (3, 3), (4, 4), (5, 9), (7, 7), (100, 300)])
def test_purity_of_induced_states(n: int, k: int) -> None:
    """Lubkin, J. Math. Phys. 19 (1978) 1028: (N + K)/(NK + 1)."""
    assert induced(n, k).power_sum_moment((2,)) == Fraction(n + k, n * k + 1)


@pytest.mark.parametrize("n", [2, 3, 4, 5, 6, 10, 64])
def test_purity_of_bures_states(n: int) -> None:
    """Sommers & Życzkowski, J. Phys. A 37 (2004) 8457: (5N² + 1)/(2N(N² + 2))."""
    assert bures(n).power_sum_moment((2,)) == Fraction(5 * n * n + 1, 2 * n * (n * n + 2))
    assert n * bures(n).moment((2,) + (0,) * (n - 1)) == Fraction(5 * n * n + 1, 2 * n * (n * n + 2))


@pytest.mark.parametrize("n", [2, 3, 4, 8])
def test_third_and_fourth_moments_of_hilbert_schmidt_states(n: int) -> None:
    """Życzkowski & Sommers, J. Phys. A 34 (2001) 7111, section 4."""
    third = Fraction(5 * n * n + 1, (n * n + 1) * (n * n + 2))
    fourth = Fraction(14 * n**3 + 10 * n, (n * n + 1) * (n * n + 2) * (n * n + 3))
    assert hilbert_schmidt(n).power_sum_moment((3,)) == third
    assert hilbert_schmidt(n).power_sum_moment((4,)) == fourth


@pytest.mark.parametrize(("n", "k"), [(2, 2), (3, 4), (4, 4), (6, 11)])
def test_variance_of_the_purity_of_induced_states(n: int, k: int) -> None:
    """Lubkin 1978 for the mean; Giraud, J. Phys. A 40 (2007) 2793 for the variance."""
    variance = Fraction(2 * (n * n - 1) * (k * k - 1), (n * k + 1) ** 2 * (n * k + 2) * (n * k + 3))
    assert induced(n, k).power_sum_covariance(2, 2) == variance


@pytest.mark.parametrize(("n", "k"), [(2, 2), (2, 7), (3, 3), (5, 8), (12, 20)])
def test_entropy_of_induced_states(n: int, k: int) -> None:
    """Page, PRL 71 (1993) 1291; Foong & Kanno, PRL 72 (1994) 1148."""
    page = sum(Fraction(1, j) for j in range(k + 1, n * k + 1)) - Fraction(n - 1, 2 * k)
    assert induced(n, k).entropy().fraction == page


@pytest.mark.parametrize("n", [2, 3, 4, 5, 9, 40])
def test_entropy_of_bures_states(n: int) -> None:
    """Sarkar & Kumar, J. Phys. A 52 (2019) 295203; Wei, J. Phys. A 53 (2020) 235203: ψ(N²/2 + 1) − ψ(N + 1/2)."""
    with mp.workdps(50):
        wanted = mp.digamma(mpf(n * n) / 2 + 1) - mp.digamma(n + mpf(1) / 2)
        assert abs(bures(n).entropy().value(50) - wanted) < mpf(10) ** -47
    assert bures(n).entropy().is_rational == (n % 2 == 1)
    assert bures(n).entropy().log_two == (0 if n % 2 else 2)


@pytest.mark.parametrize(("n", "k"), [(3, 6), (4, 5)])
def test_entropy_of_induced_bures_states(n: int, k: int) -> None:
    """Wei, J. Phys. A 53 (2020) 235203: ψ(NK − N²/2 + 1) − ψ(K + 1/2)."""
    with mp.workdps(50):
        wanted = mp.digamma(n * k - mpf(n * n) / 2 + 1) - mp.digamma(k + mpf(1) / 2)
        assert abs(bures_hall(n, k).entropy().value(50) - wanted) < mpf(10) ** -47


def test_entropy_of_flat_vectors() -> None:
    """Jones, J. Phys. A 23 (1990) L1247 (harmonic numbers): Σ_{k=2}^{N} 1/k."""
    for n in (2, 3, 10):
        assert flat(n).entropy().fraction == sum(Fraction(1, k) for k in range(2, n + 1))


@pytest.mark.parametrize(("n", "k"), [(2, 2), (3, 3), (3, 7), (5, 5)])
@pytest.mark.parametrize(("family", "beta"), [(orthogonal, 1), (symplectic, 4)])
def test_purity_of_real_and_quaternion_states(n: int, k: int, family: object, beta: int) -> None:
    """By hand from the Wishart moments: E Tr W² = NK(N + K − 1 + 2/β)·(β/2)², over (T)_2 with T = NKβ/2.

    For β = 1 it is (N + K + 1)/(NK + 2), Życzkowski & Sommers 2001 section 5 for K = N.
    """
    half = Fraction(beta, 2)
    total = n * k * half
    wanted = n * k * half**2 * (n + k - 1 + 1 / half) / (total * (total + 1))
    assert family(n, k).power_sum_moment((2,)) == wanted  # type: ignore[operator]
    assert orthogonal(n, k).power_sum_moment((2,)) == Fraction(n + k + 1, n * k + 2)


def test_largest_eigenvalue() -> None:
    """Hilbert–Schmidt N = 2 by hand: E[max] = ½ + ½ ∫ 3r³ dr = 7/8; broken stick: 11/18, 5/18, 2/18."""
    assert ordered(hilbert_schmidt(2)).moment((1, 0)) == Fraction(7, 8)
    stick = ordered(flat(3))
    assert [stick.moment(a) for a in ((1, 0, 0), (0, 1, 0), (0, 0, 1))] == [
        Fraction(11, 18),
        Fraction(5, 18),
        Fraction(2, 18),
    ]
    assert abs(float(ordered(hilbert_schmidt(3)).moment((1, 0, 0))) - 0.72453703703) < 1e-11
    for n in (
        2,
        3,
        4,
    ):  # Chen, Liu & Zhou, J. Phys. A 43 (2010) 315303; smallest eigenvalue of the fixed-trace LUE: 1/N³
        assert ordered(hilbert_schmidt(n)).moment((0,) * (n - 1) + (1,)) == Fraction(1, n**3)


def test_hilbert_schmidt_pair_is_a_beta_type_integral() -> None:
    """N = 2: λ = (1 ± r)/2 with density 3r² on [0, 1]."""
    for a in range(6):
        for b in range(6):
            total = Fraction(0)
            for i in range(a + 1):
                for j in range(b + 1):
                    if (i + j) % 2 == 0:
                        total += Fraction(3 * math.comb(a, i) * math.comb(b, j) * (-1) ** j, i + j + 3)
            assert hilbert_schmidt(2).moment((a, b)) == total / 2 ** (a + b)


@pytest.mark.parametrize("c", ["-1/2", "1/3"])
def test_bures_pair_is_a_beta_function(c: str) -> None:
    """N = 2: λ_1 + λ_2 = 1, so r² = (λ_1 − λ_2)² is Beta(3/2, c + 1)."""
    a, b = Fraction(3, 2), Fraction(c) + 1
    square = a / (a + b)
    fourth = square * (a + 1) / (a + b + 1)
    measure = bures_hall(2, exponent=c)
    assert measure.moment((2, 0)) == (1 + square) / 4
    assert measure.moment((4, 0)) == (1 + 6 * square + fourth) / 16
    assert measure.moment((1, 3)) == (1 - fourth) / 16


def integrate(density: object, f: object, n: int) -> tuple[mpf, mpf]:
    """Integrals of the density and of f times it, N = 2 or 3, with the end points flattened by λ = sin²."""

    def at(*angles: mpf) -> tuple[list[mpf], mpf]:
        left, jacobian, point = mpf(1), mpf(1), []
        for t in angles:
            s = mp.sin(t) ** 2
            point.append(left * s)
            jacobian *= left * mp.sin(2 * t)
            left *= mp.cos(t) ** 2
        return [*point, left], jacobian

    def integrand(weight: object) -> object:
        def value(*angles: mpf) -> mpf:
            point, jacobian = at(*angles)
            if not all(point):  # an end point of the rule, where a density with a pole vanishes with the Jacobian
                return mpf(0)
            return jacobian * density(*point) * weight(*point)  # type: ignore[operator]

        return value

    method, degree = ("tanh-sinh", 6) if n == 2 else ("gauss-legendre", 4)
    box = [[0, mp.pi / 2]] * (n - 1)
    return (
        mpmath.quad(integrand(lambda *x: mpf(1)), *box, method=method, maxdegree=degree),
        mpmath.quad(integrand(f), *box, method=method, maxdegree=degree),
    )


def spectral_density(c: mpf, power: mpf, over_sum: bool) -> object:
    def value(*x: mpf) -> mpf:
        product = mpf(1)
        for i in range(len(x)):
            product *= x[i] ** c
            for j in range(i):
                product *= abs(x[i] - x[j]) ** power / (x[i] + x[j] if over_sum else 1)
        return product

    return value


@pytest.mark.parametrize(
    ("measure", "c", "power", "over_sum"),
    [
        (hilbert_schmidt(2), 0, 2, False),
        (induced(2, 5), 3, 2, False),
        (bures(2), -0.5, 2, True),
        (bures_hall(2, 4), 1.5, 2, True),
        (hilbert_schmidt(3), 0, 2, False),
        (induced(3, 4), 1, 2, False),
        (bures(3), -0.5, 2, True),
        (bures_hall(3, exponent="1/2"), 0.5, 2, True),
        (symplectic(3, 3), 1, 4, False),
    ],
    ids=str,
)
def test_moments_against_quadrature_of_the_density(measure: Measure, c: float, power: int, over_sum: bool) -> None:
    n = measure.N
    density = spectral_density(mpf(c), mpf(power), over_sum)
    with mp.workdps(20):
        mass, mean = integrate(density, lambda *x: x[0] ** 3 * x[-1], n)
        exact = measure.moment((3,) + (0,) * (n - 2) + (1,))
        assert abs(mean / mass - mpf(exact.numerator) / exact.denominator) < 1e-8


@pytest.mark.parametrize("q", ["1/2", "5/2", "-1/3"])
@pytest.mark.parametrize("k", [1, 2])
@pytest.mark.parametrize(
    ("measure", "c", "over_sum"),
    [(hilbert_schmidt(2), 0, False), (induced(2, 4), 2, False), (bures(2), -0.5, True), (bures_hall(2, 3), 0.5, True)],
    ids=str,
)
def test_real_powers_and_logarithms_against_quadrature(
    measure: Measure, c: float, over_sum: bool, q: str, k: int
) -> None:
    density = spectral_density(mpf(c), mpf(2), over_sum)
    power = mpf(Fraction(q).numerator) / Fraction(q).denominator
    with mp.workdps(25):
        mass, mean = integrate(density, lambda *x: sum(y**power for y in x), 2)
        assert abs(mean / mass - measure.power_mean(q)) < 1e-7
        mass, mean = integrate(density, lambda *x: sum(y**k * mp.log(y) for y in x), 2)
        assert abs(mean / mass - measure.log_mean(k).value(25)) < 1e-10


def test_polynomial_density_against_quadrature() -> None:
    measure = polynomial_density(dirichlet([2, 1, "3/2"]), "(x1 - x2)^2 + 1/3*x3")
    with mp.workdps(20):

        def density(*x: mpf) -> mpf:
            return x[0] * mp.sqrt(x[2]) * ((x[0] - x[1]) ** 2 + x[2] / 3)

        mass, mean = integrate(density, lambda *x: x[0] * x[1] ** 2, 3)
        exact = measure.moment((1, 2, 0))
        assert abs(mean / mass - mpf(exact.numerator) / exact.denominator) < 1e-12
        mass, mean = integrate(density, lambda *x: sum(mp.sqrt(y) for y in x), 3)
        assert abs(mean / mass - measure.power_mean("1/2")) < 1e-8
        mass, mean = integrate(density, lambda *x: -sum(y * mp.log(y) for y in x), 3)
        assert abs(mean / mass - measure.entropy().value(20)) < 1e-8
