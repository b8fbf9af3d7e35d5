"""Variances, covariances, moments and distribution functions against exact moments and laws."""

from __future__ import annotations

import math
from fractions import Fraction
from typing import Any

import numpy as np
import pytest

import simplexcub as sc
from simplexcub.errors import InputError
from simplexcub.measures import Measure


def power_sum(k: int) -> Any:
    return sc.spectral_function(f"power-sum-{k}")


@pytest.mark.parametrize("measure", [sc.hilbert_schmidt(3), sc.bures(3), sc.flat(2), sc.dirichlet([1, 2, 3])], ids=str)
def test_covariances_of_power_sums_are_exact_moments(measure: Measure) -> None:
    found = sc.distribution([power_sum(2), power_sum(3)], measure)
    for i, j in ((0, 0), (0, 1), (1, 1)):
        exact = float(measure.power_sum_covariance(i + 2, j + 2))
        assert abs(found.covariance[i, j] - exact) <= found.covariance_error[i, j] + 1e-15 < 1e-6
    means = [float(measure.power_sum_moment((k,))) for k in (2, 3)]
    assert np.all(np.abs(found.mean - means) <= found.mean_error + 1e-15)
    np.testing.assert_array_equal(found.covariance, found.covariance.T)
    np.testing.assert_array_equal(found.variance, np.diag(found.covariance))
    assert found.names == ("power-sum-2", "power-sum-3")
    assert found.reason == ""


def test_central_moments_are_those_of_the_exact_cumulants() -> None:
    """μ_3 = κ_3 and μ_4 = κ_4 + 3 κ_2²."""
    mu = sc.hilbert_schmidt(3)
    found = sc.distribution(power_sum(2), mu, orders=4)
    two, three, four = (mu.power_sum_cumulant((2,) * k) for k in (2, 3, 4))
    exact = [float(x) for x in (two, three, four + 3 * two**2)]
    assert found.moments.shape == (3, 1)
    assert np.all(np.abs(found.moments[:, 0] - exact) <= found.moments_error[:, 0] + 1e-15)
    assert found.moments_error.max() < 1e-6


def test_the_variance_of_the_entropy_of_a_random_pure_state_is_that_of_vivo_pato_and_oshanin() -> None:
    """N = K = 2: ⟨S⟩ = 1/3 and Var S = −ψ'(5) + (m+n)/(mn+1) ψ'(2) − (m+1)(m+2n+1)/(4n²(mn+1)), m = n = 2

    (P. Vivo, M. P. Pato, G. Oshanin, Phys. Rev. E 93 (2016) 052106; proved by L. Wei 2017; from memory, and recomputed
    here by an integral over the density 3(1 − 2p)² that shares nothing with the package).
    """
    trigamma = lambda n: math.pi**2 / 6 - sum(1 / k**2 for k in range(1, n))  # noqa: E731
    formula = -trigamma(5) + 4 / 5 * trigamma(2) - 3 * 7 / (4 * 4 * 5)
    t, w = np.polynomial.legendre.leggauss(400)
    s = (t + 1) / 2
    p, w = s**3, w / 2 * 3 * s**2
    density = 3 * (1 - 2 * p) ** 2 * w
    entropy = -p * np.log(p) - (1 - p) * np.log1p(-p)
    integral = density @ entropy**2 - (density @ entropy) ** 2
    found = sc.distribution(sc.spectral_function("von-neumann"), sc.hilbert_schmidt(2))
    assert integral == pytest.approx(formula, rel=1e-7)
    assert abs(found.variance[0] - formula) <= found.variance_error[0] + 1e-14


def test_the_distribution_function_of_a_piece_of_a_stick_is_its_beta_law() -> None:
    """Over the flat measure P(λ_1 ≤ c) = 1 − (1 − c)^{N−1}."""
    at = [0.1, 0.3, 0.7, 1.0]
    found = sc.distribution(lambda x: x[:, 0], sc.flat(4), points=at, samples=20_000)
    exact = 1 - (1 - np.array(at)) ** 3
    assert np.all(np.abs(found.cdf[0] - exact) <= found.cdf_error[0])
    assert np.all(found.cdf_error > 0)
    assert found.samples == 20_000
    finer = sc.distribution(lambda x: x[:, 0], sc.flat(4), points=at, samples=80_000)
    assert finer.cdf_error[0, 0] == pytest.approx(found.cdf_error[0, 0] / 2, rel=0.1)


def test_components_of_spectra_are_sampled_in_no_order_unless_asked() -> None:
    """P(λ_1 ≤ 1/2) at N = 2 is 1/2 for the components as they stand and 0 for the largest first."""
    mu = sc.hilbert_schmidt(2)
    plain = sc.distribution(lambda x: x[:, 0], mu, points=[0.5], samples=10_000, space="all")
    first = sc.distribution(lambda x: x[:, 0], mu, points=[0.4999], samples=10_000, space="ordered")
    assert abs(plain.cdf[0, 0] - 0.5) <= plain.cdf_error[0, 0]
    assert first.cdf[0, 0] == 0
    assert first.mean[0] == pytest.approx(7 / 8)
    assert plain.mean[0] == pytest.approx(1 / 2)


def test_one_set_of_evaluations_serves_all() -> None:
    calls: list[int] = []

    def f(x: Any) -> Any:
        calls.append(len(x))
        return (x**2).sum(axis=1)

    found = sc.distribution({"a": f, "b": power_sum(3)}, sc.flat(3), orders=5)
    assert sum(calls) == found.evaluations
    assert found.names == ("a", "b")


def test_the_options_reach_the_average() -> None:
    rough, fine = (sc.distribution(sc.spectral_function("fidelity"), sc.flat(3), tol=tol) for tol in (1e-2, 1e-10))
    assert rough.evaluations < fine.evaluations
    short = sc.distribution(sc.spectral_function("trace-distance"), sc.flat(4), max_evaluations=2000)
    assert "was not met" in short.reason
    one, two = (sc.distribution(lambda x: x[:, 0], sc.flat(2), points=[0.5], samples=1000, seed=s).cdf for s in (1, 2))
    assert one != two


@pytest.mark.parametrize(
    ("functions", "options", "part"),
    [
        ([], {}, "1 to 20 functions"),
        ([power_sum(2)] * 21, {}, "1 to 20 functions"),
        (power_sum(2), {"orders": 1}, "orders must be an integer from 2 to 8"),
        (power_sum(2), {"orders": 9}, "orders must be"),
        (power_sum(2), {"samples": 1}, "samples must be"),
        (power_sum(2), {"points": [math.nan]}, "points must be a list of finite numbers"),
        (lambda x: x, {}, "one real number per point"),
        (lambda x: x[:, 0] * 1j, {}, "one real number per point"),
    ],
)
def test_misuse_is_refused(functions: Any, options: dict[str, Any], part: str) -> None:
    with pytest.raises(InputError, match=part):
        sc.distribution(functions, sc.flat(2), **options)


def test_the_same_function_twice_is_told_apart() -> None:
    found = sc.distribution([power_sum(2), power_sum(2)], sc.flat(2))
    assert found.names == ("power-sum-2 (1)", "power-sum-2 (2)")
    assert found.covariance[0, 1] == pytest.approx(float(Fraction(1, 45)))
