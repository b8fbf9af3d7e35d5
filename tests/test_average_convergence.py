"""The error estimates for ladders and products, on sequences that converge in known ways."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from simplexcub.average.convergence import Rung, estimated_error, has_stalled, per_component, settling_error

DEGREES = (1, 2, 3, 4, 5, 7, 11, 15, 23, 31)


def ladder(error: Callable[[int], float], mean: float = 0.7) -> list[Rung]:
    """Values that are off by `error` at each degree."""
    return [Rung(t, mean + error(t), 0.0) for t in DEGREES]


@pytest.mark.parametrize(
    "error",
    [
        lambda t: 1 / t,
        lambda t: (-1) ** t / t,
        lambda t: 1 / t**2,
        lambda t: math.cos(3 * t) / t**2,
        lambda t: 1 / t**4,
        lambda t: math.exp(-t / 3),
        lambda t: (t % 4 == 1) / t,
    ],
)
def test_the_estimate_covers_typical_ways_of_converging(error: Callable[[int], float]) -> None:
    rungs = ladder(error)
    for m in range(4, len(rungs) + 1):
        assert abs(error(DEGREES[m - 1])) <= estimated_error(rungs[:m])


def test_the_estimate_does_not_take_one_agreement_for_convergence() -> None:
    rungs = ladder(lambda t: 1 / t)
    repeated = [*rungs, Rung(47, rungs[-1].value, 0.0)]
    assert estimated_error(repeated) >= 1 / 31


def test_the_estimate_is_no_more_than_some_tens_of_the_error_for_algebraic_convergence() -> None:
    for power in (1, 2, 3, 4):
        assert estimated_error(ladder(lambda t, p=power: 1 / t**p)) <= 150 / 31**power  # type: ignore[misc]


def test_too_few_rules_give_no_estimate_and_rounding_is_always_added() -> None:
    rungs = [Rung(t, 0.5, 1e-16) for t in DEGREES]
    assert estimated_error(rungs[:3]) == math.inf
    assert estimated_error(rungs) == 1e-16


SIZES = (3, 4, 5, 7, 9, 12, 16, 21, 28)


def products(error: Callable[[int], float]) -> list[Rung]:
    return [Rung(n, 0.7 + error(n), 1e-16) for n in SIZES]


@pytest.mark.parametrize(
    "error",
    [
        lambda n: 0.3**n,
        lambda n: (-0.5) ** n,
        lambda n: n**-4.0,
        lambda n: n**-8.0,
        lambda n: math.cos(n) / n**6,
        lambda n: math.exp(-math.sqrt(n)),
        lambda n: 1 / n,
    ],
)
def test_the_estimate_for_products_covers_typical_ways_of_converging(error: Callable[[int], float]) -> None:
    rungs = products(error)
    for m in range(4, len(rungs) + 1):
        assert abs(error(SIZES[m - 1])) <= settling_error(rungs[:m])


def test_the_estimate_for_products_is_sharp_enough_to_end() -> None:
    assert settling_error(products(lambda n: 0.3**n)[:7]) < 1e-5
    assert settling_error(products(lambda n: 0.3**n)) < 1e-8
    assert settling_error([Rung(n, 0.5, 1e-16) for n in SIZES]) == 4e-16
    assert settling_error(products(lambda n: 0.3**n)[:3]) == math.inf


def test_products_stall_at_slow_convergence_and_not_at_rounding() -> None:
    assert has_stalled(products(lambda n: 1 / n))
    assert not has_stalled(products(lambda n: 0.2**n)[:5])
    assert not has_stalled([Rung(n, 0.5, 1e-16) for n in SIZES])
    assert not has_stalled(products(lambda n: 1 / n)[:4])


def test_each_component_has_its_own_estimate() -> None:
    rungs = [Rung(n, np.array([0.3**n, 1 / n]), np.zeros(2)) for n in SIZES]
    errors = per_component(settling_error, rungs)
    assert errors.tolist() == [settling_error([Rung(r.degree, r.value[c], 0.0) for r in rungs]) for c in (0, 1)]
    assert errors[0] < 1e-6 < errors[1]
