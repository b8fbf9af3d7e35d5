"""Where a mean meets its limits: budgets, digits, functions that fail, and what the ladder asks for."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from simplexcub.average.functions import spectral_function
from simplexcub.average.ladder import _shipped, ladder
from simplexcub.average.mean import average
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure, dirichlet, flat, hilbert_schmidt, induced
from simplexcub.search import Progress

FloatArray = NDArray[np.float64]


def test_where_none_is_shipped_a_budget_searches_for_rules() -> None:
    f = lambda x: (x**2).sum(axis=1)  # noqa: E731
    seen: list[Progress] = []
    found = average(f, induced(3, 6), tol=1e-3, budget=30.0, progress=seen.append)
    assert "rules of degree 1 to" in found.how
    assert "by orbit search" in found.how
    assert abs(found.value - 9 / 19) <= found.error
    assert "product" in average(f, induced(3, 6), tol=1e-3).how
    assert seen


def test_the_evaluations_are_counted_and_their_limit_is_kept() -> None:
    count = 0

    def f(x: FloatArray) -> FloatArray:
        nonlocal count
        count += len(x)
        return np.asarray((x.max(axis=1) > 0.4) * 1.0)

    average(f, flat(3), tol=1e-9, max_evaluations=40)
    assert 20 < count <= 40
    for limit in (1000, 20_000):
        count = 0
        found = average(f, flat(3), tol=1e-9, max_evaluations=limit)
        assert count == found.evaluations <= limit
        assert not found.met
        assert f"the budget of {limit} evaluations has ended" in found.reason or "cannot reach" in found.reason
        # With c between 1/3 and 1/2, P(max > c) = 1 − (3 c − 1)².
        assert abs(found.value - (1 - 0.2**2)) <= found.error


def test_a_budget_too_small_for_anything_is_an_honest_no() -> None:
    with pytest.raises(NothingFound, match="Allow more evaluations"):
        average(lambda x: x[:, 0], dirichlet(["1/3", "1/5", 1]), max_evaluations=2)


def test_a_tolerance_below_the_digits_is_missed_with_that_reason() -> None:
    found = average(spectral_function("von-neumann"), hilbert_schmidt(2), tol=1e-30)
    assert abs(found.value - 1 / 3) <= found.error < 1e-13
    assert "double precision" in found.reason


def test_progress_is_reported() -> None:
    seen: list[Progress] = []
    average(spectral_function("trace-distance"), flat(3), tol=1e-4, progress=seen.append)
    assert any("cells" in report.text for report in seen)
    assert any("product" in report.text for report in seen)
    assert all(report.elapsed >= 0 for report in seen)


@pytest.mark.parametrize(
    ("options", "part"),
    [
        *(({"tol": tol}, "tol must be a positive number") for tol in (0.0, -1.0, math.nan, math.inf, True, "x")),
        ({"space": "most"}, "space must be one of auto, all, symmetric, ordered"),
        ({"max_evaluations": 0}, "max_evaluations must be an integer of at least 1"),
        ({"max_evaluations": 1e6}, "max_evaluations must be"),
        ({"budget": -1.0}, "budget must be"),
        ({"seed": -1}, "seed must be"),
    ],
)
def test_options_out_of_range_are_refused(options: dict[str, Any], part: str) -> None:
    with pytest.raises(InputError, match=part):
        average(spectral_function("largest"), flat(2), **options)


def test_something_else_than_a_measure_is_refused() -> None:
    with pytest.raises(InputError, match="measure must be a measure such as"):
        average(spectral_function("largest"), 3)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("f", "part"),
    [
        (lambda x: x.T, "one value per point"),
        (lambda x: 1.0, "one value per point"),
        (lambda x: ["a"] * len(x), "one value per point"),
        (lambda x: np.zeros((len(x), len(x))), "values of one shape"),
        (lambda x: np.full(len(x), np.nan), "finite inside the simplex; got nan at"),
        (lambda x: np.full(len(x), np.inf), "finite inside the simplex; got inf at"),
        (lambda x: x[:, 7], "f must not raise; got IndexError"),
    ],
)
def test_functions_that_cannot_be_averaged(f: Callable[[Any], Any], part: str) -> None:
    with pytest.raises(InputError, match=part):
        average(f, flat(3))


def test_a_function_that_fails_later_leaves_the_best_value_and_the_reason() -> None:
    calls = 0

    def f(x: FloatArray) -> FloatArray:
        nonlocal calls
        calls += 1
        return np.asarray(np.where(calls > 12, np.nan, np.abs(x[:, 0] - 0.4)))

    found = average(f, flat(3), tol=1e-12)
    assert "f returned nan at [" in found.reason
    # E|λ_1 − c| = 1/3 − c + 2 (…)⁺ part: 2 (1 − c)³/3 + c − 1/3
    assert abs(found.value - (2 * 0.6**3 / 3 + 0.4 - 1 / 3)) <= found.error < 0.2


def test_an_interrupt_keeps_the_best_value() -> None:
    calls = 0

    def f(x: FloatArray) -> FloatArray:
        nonlocal calls
        calls += 1
        if calls > 8:
            raise KeyboardInterrupt
        return np.asarray(np.abs(x[:, 0] - 0.4))

    found = average(f, flat(3), tol=1e-12)
    assert found.reason.endswith("interrupted")
    assert abs(found.value - (2 * 0.6**3 / 3 + 0.4 - 1 / 3)) < 0.1
    calls = 8
    with pytest.raises(KeyboardInterrupt):
        average(f, flat(3))


def test_f_cannot_spoil_the_points_that_others_are_given() -> None:
    def spoil(x: FloatArray) -> FloatArray:
        x[:] = 0.5
        return x[:, 0]

    with pytest.raises(InputError, match="f must not raise; got ValueError"):
        average(spoil, flat(2), space="symmetric")
    assert average(spectral_function("largest"), flat(2)).value == pytest.approx(0.75)


@pytest.mark.parametrize(
    ("space", "asked"), [("symmetric", ["symmetric", "all"]), ("ordered", ["ordered"]), ("all", ["all"])]
)
def test_the_ladder_asks_for_the_cheapest_tables_that_serve(
    space: str, asked: list[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    spaces: list[str] = []

    def nothing(measure: Measure, *, degree: int, space: str) -> None:
        spaces.append(space)
        raise NothingFound("table", "none", "Make one.")

    monkeypatch.setattr("simplexcub.average.ladder.load", nothing)
    _shipped.cache_clear()
    assert list(ladder(induced(3, 9), space)) == []  # type: ignore[arg-type]
    assert spaces == asked
    _shipped.cache_clear()


def test_a_symmetric_function_is_evaluated_once_per_orbit() -> None:
    """The shipped rule of degree 8 for Hilbert–Schmidt at N = 3 has fewer orbits under all permutations than nodes."""
    mu = hilbert_schmidt(3)
    steps = {space: next(s for s in ladder(mu, space) if s.degree >= 8) for space in ("all", "symmetric")}  # type: ignore[arg-type]
    assert len(steps["symmetric"].weights) < len(steps["all"].weights)
    assert np.all(np.diff(steps["symmetric"].points, axis=1) <= 0)
    for step in steps.values():
        found = step.weights @ (step.points**4).sum(axis=1)
        assert found == pytest.approx(float(hilbert_schmidt(3).power_sum_moment((4,))), rel=1e-13)


def test_infinite_values_on_the_boundary_only_skip_the_rules_that_touch_it() -> None:
    """Shipped rules have nodes at vertices; over the flat triangle E[−ln λ_1] = 1 + 1/2."""
    found = average(lambda x: -np.log(x).mean(axis=1), flat(3), tol=1e-6)
    assert abs(found.value - 1.5) <= found.error <= 1e-6
