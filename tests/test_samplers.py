"""Samplers against exact means, with five-sigma bounds, and against matrix models built here."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.typing import NDArray

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
    symplectic,
)

SIZE = 20_000
SYMMETRIC = [
    flat(3), hilbert_schmidt(2), hilbert_schmidt(4), induced(3, 5), bures(2), bures(3), bures(5), bures_hall(3, 5),
    bures_hall(3, exponent="-3/4"), bures_hall(2, exponent="1/3"), orthogonal(2, 2), orthogonal(3, 3), orthogonal(4, 6),
    symplectic(2, 2), symplectic(3, 4), beta_ensemble(3, "1/2", "1/3"),
]  # fmt: skip
OTHERS = [
    dirichlet(["1/2", 2, 1]),
    polynomial_density(flat(3), "x1*(x2 - x3)^2"),
    ordered(flat(4)),
    ordered(hilbert_schmidt(3)),
    ordered(orthogonal(3, 4)),
]


def assert_mean(values: NDArray[np.float64], exact: float) -> None:
    """Within five standard errors; the chance of a false alarm is below 1e-6."""
    assert abs(values.mean() - exact) < 5 * values.std(ddof=1) / math.sqrt(len(values))


@pytest.mark.parametrize("measure", [*SYMMETRIC, *OTHERS], ids=str)
def test_samples_have_the_exact_means(measure: Measure) -> None:
    points = measure.sample(np.random.default_rng(7), SIZE)
    assert points.shape == (SIZE, measure.N)
    assert points.dtype == np.float64
    assert points.min() >= 0
    assert np.allclose(points.sum(axis=1), 1)
    for parts in ((2,), (3,), (2, 2)):
        sums = np.prod([(points**k).sum(axis=1) for k in parts], axis=0)
        assert_mean(sums, float(measure.power_sum_moment(parts)))


@pytest.mark.parametrize("measure", OTHERS, ids=str)
def test_samples_have_the_exact_moments_of_each_component(measure: Measure) -> None:
    points = measure.sample(np.random.default_rng(8), SIZE)
    for i in range(measure.N):
        for k in (1, 2):
            exponents = [0] * measure.N
            exponents[i] = k
            assert_mean(points[:, i] ** k, float(measure.moment(exponents)))


@pytest.mark.parametrize("measure", [flat(3), hilbert_schmidt(3), bures(3), bures(4), bures_hall(3, 4)], ids=str)
def test_samples_have_the_exact_entropy(measure: Measure) -> None:
    points = measure.sample(np.random.default_rng(9), SIZE)
    logs = np.log(points, out=np.zeros_like(points), where=points > 0)
    assert_mean(-(points * logs).sum(axis=1), float(measure.entropy().value(20)))


@pytest.mark.parametrize("measure", [*SYMMETRIC, *OTHERS], ids=str)
def test_sampling_is_reproducible_and_takes_any_size(measure: Measure) -> None:
    a, b = (measure.sample(np.random.default_rng(3), 5) for _ in range(2))
    assert np.array_equal(a, b)
    assert not np.array_equal(a, measure.sample(np.random.default_rng(4), 5))
    assert measure.sample(np.random.default_rng(3), 0).shape == (0, measure.N)


def purities(matrices: NDArray[np.complex128]) -> NDArray[np.float64]:
    states = matrices @ matrices.conj().transpose(0, 2, 1)
    states /= np.trace(states, axis1=1, axis2=2).real[:, None, None]
    return np.einsum("sij,sji->s", states, states).real


@pytest.mark.parametrize(("n", "k"), [(2, 2), (3, 3), (3, 5)])
def test_orthogonal_purity_against_real_wishart_matrices(n: int, k: int) -> None:
    rng = np.random.default_rng(11)
    assert_mean(purities(rng.standard_normal((SIZE, n, k))), float(orthogonal(n, k).power_sum_moment((2,))))


def test_symplectic_purity_against_quaternion_matrices() -> None:
    """Quaternions as 2×2 blocks; each eigenvalue comes twice, so Tr ρ² is half of Σ λ²."""
    rng = np.random.default_rng(12)
    n, k = 2, 3
    a, b = (rng.standard_normal((SIZE, n, k)) + 1j * rng.standard_normal((SIZE, n, k)) for _ in range(2))
    blocks = np.concatenate([np.concatenate([a, b], axis=2), np.concatenate([-b.conj(), a.conj()], axis=2)], axis=1)
    assert_mean(2 * purities(blocks), float(symplectic(n, k).power_sum_moment((2,))))


@pytest.mark.parametrize("n", [2, 3, 4])
def test_bures_purity_against_haar_unitaries(n: int) -> None:
    """(1 + U)G with Haar U and Ginibre G (Osipov, Sommers & Życzkowski 2010)."""
    rng = np.random.default_rng(13)
    shape = (SIZE, n, n)
    z, g = (rng.standard_normal(shape) + 1j * rng.standard_normal(shape) for _ in range(2))
    q, r = np.linalg.qr(z)
    phases = np.diagonal(r, axis1=1, axis2=2)
    unitary = q * (phases / np.abs(phases))[:, None, :]
    assert_mean(purities((np.eye(n) + unitary) @ g), float(bures(n).power_sum_moment((2,))))


def test_beta_two_bidiagonal_matrices_are_hilbert_schmidt() -> None:
    measure = beta_ensemble(3, "2", "1/2")
    points = measure.sample(np.random.default_rng(14), SIZE)
    assert_mean((points**2).sum(axis=1), float(measure.power_sum_moment((2,))))
