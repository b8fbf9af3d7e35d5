"""Means against published formulas and sampling; the honesty of the error estimate."""

from __future__ import annotations

import math
from collections.abc import Callable
from fractions import Fraction
from typing import Any

import numpy as np
import pytest

from simplexcub.average.convergence import Rung, estimated_error
from simplexcub.average.functions import spectral_function
from simplexcub.average.mean import average
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure, dirichlet, flat, hilbert_schmidt, induced
from simplexcub.search import Progress


def harmonic(first: int, last: int) -> Fraction:
    """Σ 1/k from `first` to `last`."""
    return sum((Fraction(1, k) for k in range(first, last + 1)), Fraction(0))


def page(n: int, k: int) -> Fraction:
    """Mean entropy of the induced measure (Page 1993; proved by Foong & Kanno 1994)."""
    return harmonic(k + 1, n * k) - Fraction(n - 1, 2 * k)


def flat_entropy(n: int) -> Fraction:
    """Mean entropy of the flat measure: N · E[−λ ln λ] for λ ~ Beta(1, N − 1)."""
    return harmonic(2, n)


KNOWN: list[tuple[Measure, str, float, float]] = [
    (hilbert_schmidt(2), "von-neumann", float(page(2, 2)), 1e-6),
    (induced(2, 3), "von-neumann", float(page(2, 3)), 1e-8),
    (induced(2, 7), "von-neumann", float(page(2, 7)), 1e-10),
    (hilbert_schmidt(3), "von-neumann", float(page(3, 3)), 1e-4),
    (induced(3, 5), "von-neumann", float(page(3, 5)), 1e-6),
    (hilbert_schmidt(4), "von-neumann", float(page(4, 4)), 1e-2),
    (flat(2), "von-neumann", float(flat_entropy(2)), 1e-6),
    (flat(3), "von-neumann", float(flat_entropy(3)), 1e-4),
    (flat(4), "von-neumann", float(flat_entropy(4)), 1e-2),
    # The largest and smallest piece of a stick broken at random: means (1 + 1/2 + … + 1/N)/N and 1/N².
    (flat(2), "largest", 0.75, 1e-3),
    (flat(3), "largest", 11 / 18, 1e-2),
    (flat(3), "smallest", 1 / 9, 1e-2),
    (flat(4), "smallest", 1 / 16, 3e-2),
    # E[Σ λ^q] over the flat measure: N! Γ(q + 1)/Γ(N + q).
    (flat(2), "power-sum-1/2", 2 * math.gamma(1.5) / math.gamma(2.5), 1e-4),
    (flat(3), "tsallis-3/2", 2 * (1 - 6 * math.gamma(2.5) / math.gamma(4.5)), 1e-5),
]


@pytest.mark.parametrize(("measure", "name", "mean", "tol"), KNOWN)
def test_known_means_within_the_stated_error_and_the_tolerance(
    measure: Measure, name: str, mean: float, tol: float
) -> None:
    found = average(spectral_function(name), measure, tol=tol)
    assert abs(found.value - mean) <= found.error <= tol
    assert found.exact is None
    assert found.evaluations > 0


@pytest.mark.parametrize(("n", "k"), [(2, 2), (3, 3), (3, 7), (4, 4)])
def test_mean_purity_is_that_of_lubkin_without_any_evaluation(n: int, k: int) -> None:
    found = average(spectral_function("purity"), induced(n, k))
    assert found.exact == Fraction(n + k, n * k + 1)
    assert (found.value, found.error, found.evaluations) == (float(found.exact), 0.0, 0)


@pytest.mark.parametrize("measure", [flat(2), hilbert_schmidt(3), induced(3, 4), dirichlet(["1/2", 1, 3])])
def test_a_polynomial_given_as_a_plain_function_comes_out_to_rounding(measure: Measure) -> None:
    found = average(lambda x: x[:, 0] ** 3 * x[:, 1], measure, tol=1e-13)
    exact = float(measure.moment((3, 1, *(0,) * (measure.N - 2))))
    assert abs(found.value - exact) <= found.error
    assert found.error < 1e-4
    np.testing.assert_allclose(found.value, exact, rtol=1e-13)


def test_a_smaller_tolerance_costs_more_and_is_met() -> None:
    f, mean = spectral_function("von-neumann"), float(page(2, 2))
    rough, fine = average(f, hilbert_schmidt(2), tol=1e-2), average(f, hilbert_schmidt(2), tol=1e-6)
    assert rough.evaluations < fine.evaluations
    assert abs(fine.value - mean) <= fine.error <= 1e-6 < rough.error <= 1e-2


def test_shipped_rules_come_first_and_products_carry_on() -> None:
    f = spectral_function("von-neumann")
    assert "the last by orbit search" in average(f, hilbert_schmidt(3), tol=1e-1).how
    assert "the last by conical product" in average(f, hilbert_schmidt(3), tol=1e-4).how
    assert "the last by Gauss" in average(f, hilbert_schmidt(2), tol=1e-1).how


@pytest.mark.parametrize("n", [5, 8])
def test_larger_n_has_rules_too(n: int) -> None:
    found = average(lambda x: (x**2).sum(axis=1), flat(n), budget=10.0)
    assert abs(found.value - 2 / (n + 1)) < 1e-14
    assert found.error < 0.2


def test_the_budget_ends_the_climb_with_the_best_value_so_far() -> None:
    found = average(spectral_function("largest"), flat(3), tol=1e-15, budget=1e-9)
    assert found.error == math.inf
    assert found.value == pytest.approx(1 / 3)


def test_progress_is_reported_before_every_rule() -> None:
    seen: list[Progress] = []
    average(spectral_function("largest"), flat(3), tol=1e-1, progress=seen.append)
    assert len(seen) >= 4
    assert all(report.text and report.elapsed >= 0 for report in seen)


@pytest.mark.parametrize("tol", [0.0, -1.0, math.nan, math.inf])
def test_a_tolerance_must_be_positive(tol: float) -> None:
    with pytest.raises(InputError, match="tol must be"):
        average(spectral_function("largest"), flat(2), tol=tol)


@pytest.mark.parametrize(
    ("f", "part"),
    [
        (lambda x: x, "one real value per point"),
        (lambda x: 1.0, "one real value per point"),
        (lambda x: x[:, 0] * 1j, "one real value per point"),
        (lambda x: np.full(len(x), np.nan), "finite at every point; got nan at"),
        (lambda x: np.where(x[:, 0] > 0.9, np.inf, 0.0), "finite at every point; got inf at"),
    ],
)
def test_functions_that_cannot_be_averaged(f: Callable[[Any], Any], part: str) -> None:
    with pytest.raises(InputError, match=part):
        average(f, flat(2))


def test_a_measure_beyond_reach_is_refused_with_a_way_out() -> None:
    with pytest.raises(NothingFound, match="too large for products") as caught:
        average(spectral_function("largest"), hilbert_schmidt(9))
    assert "measure.sample" in str(caught.value)


def test_ginibre_samples_agree_within_their_confidence_bound() -> None:
    """10^5 random 3×3 density matrices; with five standard errors a right answer fails once in 10^6 runs."""
    rng = np.random.default_rng(7)
    shape = (100_000, 3, 3)
    matrices = rng.standard_normal(shape) + 1j * rng.standard_normal(shape)
    states = matrices @ matrices.conj().transpose(0, 2, 1)
    spectra = np.linalg.eigvalsh(states) / np.trace(states, axis1=1, axis2=2).real[:, None]
    for name in ("von-neumann", "renyi-1/2", "tsallis-5/2", "largest", "smallest", "renyi-inf"):
        f = spectral_function(name)
        sampled = f(spectra)
        found = average(f, hilbert_schmidt(3), tol=1e-3)
        bound = 5 * sampled.std() / math.sqrt(len(sampled))
        assert abs(found.value - sampled.mean()) <= bound + found.error, name


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
