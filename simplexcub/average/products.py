"""Products of Gauss–Jacobi rules on a chart of the chamber or the simplex, with growing numbers of nodes per axis."""

from __future__ import annotations

from collections.abc import Iterator
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from simplexcub.average.charts import Chamber, Chart, Density, Simplex, density_of
from simplexcub.average.convergence import Rung
from simplexcub.average.integrand import FloatArray, Integrand, Space, cost_of_orders, over_orders
from simplexcub.measures import Measure

# Nodes per axis, by the number of axes; more points than these are better spent on cells.
SIZES: dict[int, tuple[int, ...]] = {
    1: (5, 7, 9, 12, 16, 21, 28, 37, 49, 65, 86, 115, 153, 204),
    2: (4, 5, 7, 9, 12, 16, 21, 28, 37, 49, 65),
    3: (3, 4, 5, 7, 9, 11, 14, 17, 21, 26, 32, 40),
    4: (3, 4, 5, 6, 8, 10, 12, 15, 18),
    5: (3, 4, 5, 6, 7, 8, 10),
}
MOST_AXES = max(SIZES)
_MASS_SIZES = {1: 60, 2: 48, 3: 32, 4: 18, 5: 12}
MASS_ACCURACY = 1e-9
ROUNDING = 8 * float(np.finfo(np.float64).eps)


class Plan:
    """Where and how a function of a measure is integrated: the chart, and whether f is averaged over all orders there.

    Attributes
    ----------
    chart, flat : Chart
        For products of rules with the density's powers as weight, and for cells with flat rules.
    orders : bool
        f takes the components in their order, the chart is the chamber: f is averaged over all orders at each point.
    cost : int
        Evaluations per point.
    name : str
        Of the region: chamber or simplex.
    """

    def __init__(self, measure: Measure, density: Density, space: Space) -> None:
        whole = not measure.is_symmetric or (space == "all" and density.has_smooth_differences)
        kind = Simplex if whole else Chamber
        self.chart: Chart = kind(density)
        self.flat: Chart = kind(density, bounded=True)
        self.orders = space == "all" and not whole
        self.sort = space != "all" and whole
        self.name = "simplex" if whole else "chamber"
        self.cost = cost_of_orders(measure.N) if self.orders else 1

    def values(self, integrand: Integrand, points: FloatArray) -> NDArray[Any]:
        """f at points of the chart, shape (M, C)."""
        if self.orders:
            return over_orders(integrand, points)
        return integrand(-np.sort(-points, axis=1) if self.sort else points)


@lru_cache(maxsize=64)
def plan(measure: Measure, space: Space) -> Plan | None:
    """The plan for a measure and space; None where the density is not known or has too many axes."""
    density = density_of(measure)
    return None if density is None or measure.N - 1 > MOST_AXES else Plan(measure, density, space)


@lru_cache(maxsize=24)
def product_points(measure: Measure, space: Space, size: int) -> tuple[FloatArray, FloatArray]:
    """Points and weights of one product, read-only; kept, since making them costs more than most functions."""
    found = plan(measure, space)
    assert found is not None
    points, weights = found.chart.product((size,) * found.chart.axes)
    points.flags.writeable = weights.flags.writeable = False
    return points, weights


@lru_cache(maxsize=256)
def resolution(measure: Measure, space: Space, size: int) -> float:
    """|Q − E|/E of the purity for one product: how far it is from resolving the density itself."""
    points, weights = product_points(measure, space, size)
    exact = float(measure.power_sum_moment((2,)))
    return abs(float(weights @ (points**2).sum(axis=1)) - exact) / exact


def product_value(measure: Measure, space: Space, integrand: Integrand, size: int) -> Rung | None:
    """The value of f on the product with `size` nodes per axis; None where there is none or it costs too much."""
    found = plan(measure, space)
    if found is None or size**found.chart.axes * found.cost > integrand.left:
        return None
    points, weights = product_points(measure, space, size)
    values = found.values(integrand, points)
    return Rung(size, weights @ values, ROUNDING * (weights @ np.abs(values)))


def products(measure: Measure, space: Space, integrand: Integrand) -> Iterator[Rung]:
    """Values of f on products of rising size, as long as the evaluations last."""
    for size in SIZES.get(measure.N - 1, ()):
        rung = product_value(measure, space, integrand, size)
        if rung is None:
            return
        yield rung


@lru_cache(maxsize=64)
def log_mass(measure: Measure, space: Space) -> float | None:
    """Logarithm of ∫ of the density of the chart for cells, by a product that is finer than most in `SIZES`.

    None where a coarser product disagrees: the density is too steep for the chart, and cells would be misled.
    """
    found = plan(measure, space)
    assert found is not None
    size = _MASS_SIZES[found.flat.axes]
    fine, coarse = (found.flat.log_mass(n) for n in (size, size * 4 // 5))
    return fine if abs(fine - coarse) <= MASS_ACCURACY else None
