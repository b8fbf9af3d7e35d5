"""Means against published formulas and sampling; the honesty of the error estimate."""

from __future__ import annotations

import importlib
import math
from fractions import Fraction

import numpy as np
import pytest
from numpy.typing import NDArray

import simplexcub
from simplexcub.average.functions import spectral_function
from simplexcub.average.mean import average
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
    orthogonal,
    polynomial_density,
)

FloatArray = NDArray[np.float64]


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
    (hilbert_schmidt(4), "von-neumann", float(page(4, 4)), 1e-9),
    (hilbert_schmidt(6), "von-neumann", float(page(6, 6)), 1e-5),
    (bures(3), "von-neumann", 2 / 7 + 2 / 9, 1e-10),  # ψ(11/2) − ψ(7/2), Sarkar & Kumar 2019
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
    (flat(3), "gap-1", 1 / 3, 1e-12),
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
    assert found.evaluations > 0
    assert found.met
    assert found.exact is not None
    assert float(found.exact.value) == pytest.approx(mean, rel=1e-14)


@pytest.mark.parametrize(("n", "k"), [(2, 2), (3, 3), (3, 7), (4, 4)])
def test_mean_purity_is_that_of_lubkin_without_any_evaluation(n: int, k: int) -> None:
    found = average(spectral_function("purity"), induced(n, k))
    purity = Fraction(n + k, n * k + 1)
    assert found.exact is not None
    assert found.exact.fraction == purity
    assert (found.value, found.error, found.evaluations) == (float(purity), 0.0, 0)


EVERY_KIND = [
    flat(2),
    flat(4),
    hilbert_schmidt(3),
    induced(3, 4),
    bures(3),
    bures_hall(3, exponent="1/3"),
    dirichlet(["1/2", 1, 3]),
    orthogonal(3, 3),
    beta_ensemble(3, "3/2", "1/4"),
    polynomial_density(flat(3), "(x1 - x2)^2 + x3"),
    polynomial_density(dirichlet(["1/2", "1/2"]), "x1 + 2*x2^2"),
]


@pytest.mark.parametrize("measure", EVERY_KIND, ids=str)
def test_a_polynomial_given_as_a_plain_function_comes_out_as_its_moment(measure: Measure) -> None:
    exponents = (3, 1, *(0,) * (measure.N - 2))
    found = average(lambda x: x[:, 0] ** 3 * x[:, 1], measure, tol=1e-9)
    assert abs(found.value - float(measure.moment(exponents))) <= found.error <= 1e-9
    assert found.exact is None


@pytest.mark.parametrize("measure", [m for m in EVERY_KIND if m.is_symmetric], ids=str)
def test_power_sums_come_out_as_their_moments(measure: Measure) -> None:
    found = average(lambda x: (x**2).sum(axis=1) * (x**3).sum(axis=1), measure, tol=1e-9)
    assert abs(found.value - float(measure.power_sum_moment((2, 3)))) <= found.error <= 1e-9


@pytest.mark.parametrize("measure", [hilbert_schmidt(3), induced(3, 5), flat(4)], ids=str)
def test_the_ordered_space_and_the_ordered_measure_give_f_the_largest_first(measure: Measure) -> None:
    exponents = (2, 0, 1, *(0,) * (measure.N - 3))
    mean = float(ordered(measure).moment(exponents))

    def f(x: FloatArray) -> FloatArray:
        return np.asarray(x[:, 0] ** 2 * x[:, 2])

    for found in (average(f, measure, space="ordered"), average(f, ordered(measure))):
        assert abs(found.value - mean) <= found.error <= 1e-8
    unordered = average(f, measure, space="all").value
    assert unordered == pytest.approx(float(measure.moment(exponents)), rel=1e-7)
    assert abs(unordered - mean) > 1e-4


def test_auto_notices_whether_the_order_matters() -> None:
    """A symmetric f is given the largest first; one that is not gets the components in their order."""
    seen: list[FloatArray] = []

    def symmetric(x: FloatArray) -> FloatArray:
        seen.append(x)
        return np.asarray((x**3).sum(axis=1))

    average(symmetric, hilbert_schmidt(3))
    assert np.all(np.diff(seen[-1], axis=1) <= 0)
    assert average(lambda x: x[:, 0], hilbert_schmidt(3)).value == pytest.approx(1 / 3)


def test_a_promise_of_symmetry_is_taken() -> None:
    """x1 promised to be symmetric is averaged over ordered representatives: the largest eigenvalue."""
    found = average(lambda x: x[:, 0], hilbert_schmidt(3), space="symmetric", tol=1e-4)
    assert found.value == pytest.approx(313 / 432, abs=1e-3)


def test_values_may_be_vectors_matrices_and_complex() -> None:
    mu = hilbert_schmidt(3)
    vector = average(lambda x: np.stack([(x**2).sum(1), (x**3).sum(1)], axis=1), mu)
    expected = [float(mu.power_sum_moment((k,))) for k in (2, 3)]
    assert np.all(np.abs(vector.value - expected) <= vector.error)
    assert vector.error.shape == (2,)
    matrix = average(lambda x: x[:, :, None] * x[:, None, :], mu)
    assert matrix.value.shape == matrix.error.shape == (3, 3)
    np.testing.assert_allclose(np.diag(matrix.value), float(mu.moment((2, 0, 0))), rtol=1e-8)
    # Over the flat measure at N = 2, E[e^{iωλ}] = (e^{iω} − 1)/(iω).
    wave = average(lambda x: np.exp(5j * x[:, 0]), flat(2))
    assert isinstance(wave.value, complex)
    assert abs(wave.value - (np.exp(5j) - 1) / 5j) <= wave.error <= 1e-8
    assert isinstance(average(lambda x: np.arange(len(x)) * 0, flat(2)).value, float)


def test_the_tolerance_holds_for_every_component() -> None:
    found = average(lambda x: np.stack([(x**2).sum(1), np.sqrt(x).sum(1)], axis=1), bures(2), tol=1e-9)
    assert found.error.max() <= 1e-9
    assert abs(found.value[1] - float(bures(2).power_mean("1/2"))) <= found.error[1]


def test_a_smaller_tolerance_costs_more_and_is_met() -> None:
    f, mean = spectral_function("von-neumann"), float(page(2, 2))
    rough, fine = average(f, hilbert_schmidt(2), tol=1e-2), average(f, hilbert_schmidt(2), tol=1e-9)
    assert rough.evaluations < fine.evaluations
    assert abs(fine.value - mean) <= fine.error <= 1e-9 < rough.error <= 1e-2


def test_each_way_takes_over_where_the_one_before_ends() -> None:
    smooth, entropy = lambda x: np.exp((x**2).sum(axis=1)), spectral_function("von-neumann")
    assert "rules of degree" in average(smooth, hilbert_schmidt(3), tol=1e-4).how
    assert "by Gauss" in average(smooth, hilbert_schmidt(2), tol=1e-3).how
    assert "nodes on the chamber" in average(entropy, hilbert_schmidt(3), tol=1e-8).how
    assert "cells of the chamber" in average(spectral_function("trace-distance"), hilbert_schmidt(3), tol=1e-6).how
    assert "samples with exact moments" in average(entropy, flat(8), tol=1e-3).how
    assert "nodes on the simplex" in average(lambda x: np.exp(x[:, 0]), dirichlet([1, 2, 3])).how


def test_an_interior_kink_is_cut_out() -> None:
    """Over the flat measure at N = 3 the density of λ_1 is 2 (1 − λ), so E (λ_1 − c)_+ = (1 − c)³/3."""
    found = average(lambda x: np.maximum(x[:, 0] - 0.3, 0), flat(3), tol=1e-7)
    assert abs(found.value - 0.7**3 / 3) <= found.error <= 1e-7
    assert "cells" in found.how
    jump = average(lambda x: (x[:, 0] > 0.3) * 1.0, flat(2), tol=1e-9)
    assert abs(jump.value - 0.7) <= jump.error <= 1e-9


def test_sampling_is_seeded_and_covers_the_mean() -> None:
    entropy = spectral_function("von-neumann")
    found = [average(entropy, flat(9), tol=1e-3, seed=seed) for seed in (1, 1, 2)]
    assert found[0].value == found[1].value != found[2].value
    for one in found:
        assert abs(one.value - float(flat_entropy(9))) <= one.error <= 1e-3
    component = average(lambda x: x[:, 8] ** 2, hilbert_schmidt(9), tol=1e-3)
    assert abs(component.value - float(hilbert_schmidt(9).moment((2, *(0,) * 8)))) <= component.error <= 1e-3


def test_sampling_where_f_does_not_care_for_an_order_that_the_measure_has() -> None:
    """The control variates are those of the components as they stand, though f is given them sorted."""
    measure = dirichlet([1, 2, 3, 4, 5, 6, 7])
    found = average(spectral_function("von-neumann"), measure, tol=1e-3)
    assert "samples" in found.how
    assert abs(found.value - float(measure.entropy().value())) <= found.error <= 1e-3


@pytest.mark.parametrize("alpha", [["1/10", 100, 3, 5], ["1/100", 1, 1], ["1/100"] * 3, [500] * 3])
def test_steep_densities(alpha: list[int | str]) -> None:
    measure = dirichlet(alpha)
    found = average(spectral_function("von-neumann"), measure, tol=1e-6)
    assert abs(found.value - float(measure.entropy().value())) <= found.error <= 1e-4


def test_the_density_must_be_resolved_before_products_are_believed() -> None:
    """Over induced measures with K = 2000 spectra crowd at 1/N, where few nodes see a smooth f agree by accident."""
    measure = induced(4, 2000)
    found = average(spectral_function("von-neumann"), measure, tol=1e-3, max_evaluations=2000)
    assert abs(found.value - float(measure.entropy().value())) <= found.error


def test_exact_moments_take_most_of_the_variance_away() -> None:
    """Plain sampling of the entropy needs (3 σ/error)² draws; with control variates it is under a hundredth."""
    entropy, mu = spectral_function("von-neumann"), hilbert_schmidt(8)
    found = average(entropy, mu, tol=3e-4)
    sigma = float(entropy(mu.sample(np.random.default_rng(3), 4000)).std())
    assert found.evaluations < (3 * sigma / found.error) ** 2 / 100


def test_ginibre_samples_agree_within_their_confidence_bound() -> None:
    """10^5 random 3×3 density matrices; with five standard errors a right answer fails once in 10^6 runs."""
    rng = np.random.default_rng(7)
    shape = (100_000, 3, 3)
    matrices = rng.standard_normal(shape) + 1j * rng.standard_normal(shape)
    states = matrices @ matrices.conj().transpose(0, 2, 1)
    spectra = np.linalg.eigvalsh(states) / np.trace(states, axis1=1, axis2=2).real[:, None]
    names = ("von-neumann", "renyi-1/2", "tsallis-5/2", "largest", "smallest", "renyi-inf", "rank-0.1", "fidelity")
    for name in (*names, "trace-distance", "participation", "min-entropy"):
        f = spectral_function(name)
        sampled = f(spectra)
        found = average(f, hilbert_schmidt(3), tol=1e-3)
        bound = 5 * sampled.std() / math.sqrt(len(sampled))
        assert abs(found.value - sampled.mean()) <= bound + found.error, name


def test_the_package_exports_the_function_under_the_name_of_its_room() -> None:
    assert simplexcub.average(spectral_function("largest"), flat(2)).value == pytest.approx(0.75)
    assert importlib.import_module("simplexcub.average")(spectral_function("largest"), flat(2)).met
