"""Charts of the chamber and the simplex, products on them, and cells: geometry, exact moments, degrees of exactness."""

from __future__ import annotations

import math
from fractions import Fraction
from itertools import product

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.special import beta

from simplexcub.average.cells import pair, subdivide
from simplexcub.average.charts import Chamber, Chart, Simplex, _jacobi, density_of
from simplexcub.average.integrand import Space
from simplexcub.average.products import log_mass, plan
from simplexcub.measures import (
    Measure,
    beta_ensemble,
    bures,
    bures_hall,
    dirichlet,
    flat,
    hilbert_schmidt,
    induced,
    ordered,
    polynomial_density,
)

FloatArray = NDArray[np.float64]


def chart_of(kind: type[Chart], measure: Measure) -> Chart:
    density = density_of(measure)
    assert density is not None
    return kind(density)


@pytest.mark.parametrize("n", [2, 3, 5])
def test_the_chamber_is_reached_and_ordered_and_its_corners_are_its_vertices(n: int) -> None:
    chart = chart_of(Chamber, hilbert_schmidt(n))
    points, remainder = chart.points(np.random.default_rng(1).random((500, n - 1)))
    np.testing.assert_allclose(points.sum(axis=1), 1, rtol=1e-14)
    assert np.all(np.diff(points, axis=1) <= 1e-15)
    assert np.all(np.isfinite(remainder))
    # y = (1, …, 1, 0, …) with k − 1 ones is the vertex (1/k, …, 1/k, 0, …, 0)
    corners = np.tril(np.ones((n, n - 1)), -1)
    reached, _ = chart.points(corners)
    np.testing.assert_allclose(reached, np.tril(np.ones((n, n))) / np.arange(1, n + 1)[:, None], atol=1e-15)


@pytest.mark.parametrize("measure", [hilbert_schmidt(3), bures(3), dirichlet([3, 3, 3]), beta_ensemble(3, 1, "1/2")])
def test_the_density_in_the_cube_is_that_of_the_measure_times_the_jacobian(measure: Measure) -> None:
    """The Jacobian determinant by central differences, the density written out from its definition."""
    density = density_of(measure)
    assert density is not None
    chart = Chamber(density)
    t = np.random.default_rng(2).uniform(0.2, 0.8, (40, 2))
    points, remainder = chart.points(t)
    h = 1e-5
    columns = [(chart.points(t + h * e)[0] - chart.points(t - h * e)[0])[:, :2] / (2 * h) for e in np.eye(2)]
    jacobian = np.abs(np.linalg.det(np.stack(columns, axis=2)))
    written = np.prod(points ** (np.array(density.alpha) - 1), axis=1)
    for i, j in ((0, 1), (0, 2), (1, 2)):
        written *= (points[:, i] - points[:, j]) ** density.beta
        written /= (points[:, i] + points[:, j]) ** density.ratio
    ratio = np.exp(chart.log_density(t, remainder)) / (written * jacobian)
    np.testing.assert_allclose(ratio, ratio[0], rtol=1e-7)


SYMMETRIC = [
    flat(3),
    hilbert_schmidt(4),
    induced(3, 5),
    bures(4),
    bures_hall(3, exponent="1/3"),
    beta_ensemble(3, 3, 1),
]


@pytest.mark.parametrize("measure", SYMMETRIC, ids=str)
def test_products_on_the_chamber_have_the_exact_moments(measure: Measure) -> None:
    points, weights = chart_of(Chamber, measure).product((14,) * (measure.N - 1))
    assert weights.sum() == pytest.approx(1, rel=1e-14)
    for parts in ((2,), (3,), (4, 2), (2, 2, 2)):
        found = weights @ np.prod([(points**k).sum(axis=1) for k in parts], axis=0)
        assert found == pytest.approx(float(measure.power_sum_moment(parts)), rel=1e-9)


WHOLE = [flat(3), dirichlet(["1/2", 1, 3, 2]), hilbert_schmidt(3), polynomial_density(flat(3), "(x1 - x2)^2 + x3")]


@pytest.mark.parametrize("measure", WHOLE, ids=str)
def test_products_on_the_simplex_have_the_exact_moments(measure: Measure) -> None:
    points, weights = chart_of(Simplex, measure).product((20,) * (measure.N - 1))
    for exponents in ((1, 0, 2), (0, 3, 1), (2, 2, 2)):
        padded = (*exponents, *(0,) * (measure.N - 3))
        found = weights @ np.prod(points ** np.array(padded), axis=1)
        assert found == pytest.approx(float(measure.moment(padded)), rel=1e-10)


def volume(measure: Measure, space: Space) -> float:
    """∫ of the density over λ, or barycentric b: the constant factors of dy/dt are left out of the chart's density."""
    found = plan(measure, space)
    assert found is not None
    powers = found.flat.powers
    slopes = {"chamber": powers, "simplex": [1 / beta(p, p) for p in powers]}
    factors = [beta(a + 1, b + 1) for a, b in zip(found.flat.at_zero, found.flat.at_one, strict=True)]
    logarithm = log_mass(measure, space)
    assert logarithm is not None
    return math.exp(logarithm) * math.prod(slopes[found.name]) * math.prod(factors)


@pytest.mark.parametrize("n", [2, 3, 4])
def test_the_mass_is_the_volume_of_the_simplex(n: int) -> None:
    """1/(N − 1)!, whether the coordinates are λ on the simplex or b on the chamber."""
    for space in ("symmetric", "all"):
        assert volume(flat(n), space) == pytest.approx(1 / math.factorial(n - 1), rel=1e-13)  # type: ignore[arg-type]


def test_the_mass_of_hilbert_schmidt_on_the_simplex_is_that_of_zyczkowski_and_sommers() -> None:
    """1/1680 for N = 3, the constant of the density (Życzkowski & Sommers 2001, eq. 4.1)."""
    assert volume(hilbert_schmidt(3), "all") == pytest.approx(1 / 1680, rel=1e-13)


@pytest.mark.parametrize("kind", [Chamber, Simplex])
def test_a_bounded_chart_has_a_bounded_density_for_every_exponent(kind: type[Chart]) -> None:
    density = density_of(dirichlet(["1/10"] * 3))
    assert density is not None
    chart = kind(density, bounded=True)
    assert chart.is_bounded
    assert not kind(density).is_bounded
    points, weights = chart.product((40, 40))
    assert weights @ (points**2).sum(axis=1) == pytest.approx(float(dirichlet(["1/10"] * 3).power_sum_moment((2,))))


def test_where_functions_of_each_space_are_integrated() -> None:
    def told(measure: Measure, space: str) -> tuple[str, int]:
        found = plan(measure, space)  # type: ignore[arg-type]
        assert found is not None
        return found.name, found.cost

    assert told(hilbert_schmidt(3), "symmetric") == ("chamber", 1)
    assert told(bures(3), "ordered") == ("chamber", 1)
    assert told(hilbert_schmidt(3), "all") == ("simplex", 1)
    assert told(bures(3), "all") == ("chamber", 6)
    assert told(dirichlet([1, 2, 3]), "symmetric") == ("simplex", 1)
    assert plan(flat(7), "symmetric") is None


@pytest.mark.parametrize(("a", "b"), [(0.0, 0.0), (-0.5, 2.0), (-0.5, -0.5), (3.0, 0.0), (4000.0, 7000.0)])
def test_gauss_jacobi_rules_have_the_moments_of_beta_laws(a: float, b: float) -> None:
    nodes, weights = _jacobi(5, a, b)
    for k in range(10):
        exact = math.prod((a + 1 + j) / (a + b + 2 + j) for j in range(k))
        assert weights @ nodes**k == pytest.approx(exact, rel=1e-12)


@pytest.mark.parametrize("measure", [induced(4, 2000), dirichlet([1000, 1, 2000]), dirichlet([500] * 3)], ids=str)
def test_exponents_in_the_thousands_neither_overflow_nor_underflow(measure: Measure) -> None:
    found = plan(measure, "symmetric")
    assert found is not None
    points, weights = found.chart.product((12,) * (measure.N - 1))
    purity = float(measure.power_sum_moment((2,)))
    assert weights @ (points**2).sum(axis=1) == pytest.approx(purity, rel=1e-2)


def test_a_density_too_steep_for_the_chart_has_no_mass_for_cells() -> None:
    assert log_mass(hilbert_schmidt(3), "symmetric") is not None
    assert log_mass(dirichlet(["1/10", 100, 3, 5]), "symmetric") is None


def test_an_ordered_measure_has_the_density_of_its_base() -> None:
    assert density_of(ordered(induced(3, 4))) == density_of(induced(3, 4))


def monomial_mean(exponents: tuple[int, ...]) -> Fraction:
    """Mean of Π x^a over [−1, 1]^d."""
    return math.prod((Fraction(0) if a % 2 else Fraction(1, a + 1) for a in exponents), start=Fraction(1))


@pytest.mark.parametrize(("d", "fine", "coarse"), [(1, 22, 13), (2, 7, 5), (3, 7, 5), (4, 7, 5), (5, 7, 5)])
def test_the_pairs_have_their_degrees_of_exactness_and_no_more(d: int, fine: int, coarse: int) -> None:
    """Gauss–Kronrod 7/15 has degrees 22 and 13 (Kronrod 1965), the pair of Genz & Malik (1980) degrees 7 and 5."""
    rule = pair(d)
    for weights, degree in ((rule.fine, fine), (rule.coarse, coarse)):
        missed = 0.0
        for exponents in product(range(0, degree + 3, 2), repeat=d):
            found = float(weights @ np.prod(rule.nodes ** np.array(exponents), axis=1))
            error = abs(found - float(monomial_mean(exponents)))
            missed = max(missed, error * (degree + 1 <= sum(exponents) <= degree + 2))
            assert error * (sum(exponents) <= degree) < 1e-13
        assert missed > 1e-12


@pytest.mark.parametrize("d", [2, 3, 4])
def test_fourth_differences_vanish_on_cubics_and_see_their_own_axis_only(d: int) -> None:
    rule = pair(d)
    cubic = rule.nodes[:, 0] ** 3 - 2 * rule.nodes[:, 1] ** 2 + 1
    np.testing.assert_allclose(rule.differences @ cubic, 0, atol=1e-13)
    quartic = rule.differences @ rule.nodes[:, 1] ** 4
    assert abs(quartic[1]) > 0.1
    np.testing.assert_allclose(np.delete(quartic, 1), 0, atol=1e-13)


def cut(f: object, d: int, tol: float, limit: int = 200_000) -> tuple[float, float, int]:
    used = 0

    def values(t: FloatArray) -> FloatArray:
        nonlocal used
        used += len(t)
        return np.asarray(f(t))[:, None]  # type: ignore[operator]

    found = subdivide(values, d, tol=tol, points_left=lambda: limit - used, report=lambda cells, error: None)
    assert used <= limit
    return float(found.value[0]), float(found.error[0]), used


@pytest.mark.parametrize("d", [1, 2, 3])
def test_cells_find_the_volume_below_a_plane(d: int) -> None:
    """Volume of Σ t_i < 1 in the cube is 1/d!, the mean of (1 − Σ t)_+ is 1/(d + 1)!."""
    tol = {1: 1e-9, 2: 1e-5, 3: 1e-3}[d]
    value, error, _ = cut(lambda t: np.maximum(0.7 - t.sum(axis=1), 0), d, tol)
    assert abs(value - 0.7 ** (d + 1) / math.factorial(d + 1)) <= error <= tol


def test_cells_gather_where_the_function_is_rough_and_stop_at_their_limit() -> None:
    peak = lambda t: 1 / (1e-4 + ((t - 0.3) ** 2).sum(axis=1))  # noqa: E731
    value, error, used = cut(peak, 2, 1e-6)
    again, less, few = cut(peak, 2, 1e-6, limit=3000)
    assert error <= 1e-6 < less
    assert few <= 3000 < used < 200_000
    assert abs(value - again) <= less
