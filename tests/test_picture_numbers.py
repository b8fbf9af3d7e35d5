"""The numbers behind pictures: densities have the moments of their measures, the chamber its corners."""

from __future__ import annotations

import numpy as np
import pytest

from simplexcub.measures import (
    Measure,
    beta_ensemble,
    bures,
    dirichlet,
    flat,
    hilbert_schmidt,
    induced,
    ordered,
    polynomial_density,
)
from simplexcub.picture.density import density, on_the_line
from simplexcub.picture.orbits import (
    chamber_coordinates,
    chamber_points,
)
from simplexcub.table import load


@pytest.mark.parametrize("n", [2, 3, 4, 7])
def test_chamber_coordinates_are_barycentric_in_its_corners(n: int) -> None:
    corners = np.array([[1 / k] * k + [0.0] * (n - k) for k in range(1, n + 1)])
    assert chamber_coordinates(corners) == pytest.approx(np.eye(n))
    spectra = hilbert_schmidt(n).sample(np.random.default_rng(1), 50)
    spectra = -np.sort(-spectra, axis=1)
    inside = chamber_coordinates(spectra)
    assert inside.min() >= 0
    assert inside.sum(axis=1) == pytest.approx(np.ones(50))
    assert inside @ corners == pytest.approx(spectra)
    assert chamber_points(inside) == pytest.approx(spectra)


MEASURES = [
    flat(2),
    hilbert_schmidt(2),
    bures(2),
    induced(2, 4),
    dirichlet(["1/2", 3]),
    beta_ensemble(2, beta=1, exponent="1/2"),
    polynomial_density(flat(2), "x1*(x1 - x2)^2 + x2^3"),
]


@pytest.mark.parametrize("measure", MEASURES, ids=str)
def test_the_density_on_the_line_has_the_moments_of_the_measure(measure: Measure) -> None:
    x, values = on_the_line(density(measure), 0.0)
    for power in (0, 1, 2, 5):
        # The points are the midpoints of equal steps in θ, x = sin²θ.
        mean = float((values * x**power * 2 * np.sqrt(x * (1 - x))).sum()) * (np.pi / 2) / len(x)
        assert mean == pytest.approx(float(measure.moment((power, 0))), abs=1e-5)


def test_the_density_of_an_ordered_spectrum_is_twice_as_high() -> None:
    x, values = on_the_line(density(ordered(hilbert_schmidt(2))), 0.5)
    assert x.min() > 0.5
    assert values == pytest.approx(6 * (1 - 2 * x) ** 2, rel=1e-6)  # 3(1 − 2x)² on the whole line


@pytest.mark.parametrize("measure", [hilbert_schmidt(3), polynomial_density(flat(3), "x1^2*x2 + x3")], ids=str)
def test_the_density_on_the_triangle_has_the_moments_of_the_measure(measure: Measure) -> None:
    rule = load(flat(3), degree=12)  # exact for density times moment
    values = density(measure)(rule.nodes) * rule.weights
    for exponents in ((1, 0, 0), (2, 1, 0), (1, 1, 2)):
        mean = values @ np.prod(rule.nodes ** np.array(exponents), axis=1) / values.sum()
        assert mean == pytest.approx(float(measure.moment(exponents)), rel=1e-12)
