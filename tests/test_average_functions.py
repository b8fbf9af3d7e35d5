"""Named spectral functions against hand values, limits and second formulas."""

from __future__ import annotations

import math
import warnings
from fractions import Fraction

import numpy as np
import pytest

from simplexcub.average.functions import NAMES, exact_mean, spectral_function
from simplexcub.errors import InputError
from simplexcub.measures import dirichlet, flat, hilbert_schmidt, induced

SPECTRA = np.array([[0.5, 0.3, 0.2], [1.0, 0.0, 0.0], [0.5, 0.5, 0.0], [1 / 3, 1 / 3, 1 / 3]])
LOGS = [math.log(2), math.log(3)]
EVERY_NAME = [name.replace("Q", q) for name in NAMES for q in ("0", "1", "2", "7/3", "0.5")]


@pytest.mark.parametrize(
    ("name", "values"),
    [
        ("purity", [0.38, 1, 0.5, 1 / 3]),
        ("linear", [0.62, 0, 0.5, 2 / 3]),
        ("von-neumann", [math.log(10) - 0.5 * math.log(5) - 0.3 * math.log(3) - 0.2 * math.log(2), 0, *LOGS]),
        ("renyi-0", [math.log(3), 0, *LOGS]),
        ("renyi-2", [-math.log(0.38), 0, *LOGS]),
        ("renyi-1/2", [2 * math.log(0.5**0.5 + 0.3**0.5 + 0.2**0.5), 0, *LOGS]),
        ("renyi-inf", [math.log(2), 0, *LOGS]),
        ("tsallis-0", [2, 0, 1, 2]),
        ("tsallis-3", [(1 - 0.125 - 0.027 - 0.008) / 2, 0, 0.375, (1 - 1 / 9) / 2]),
        ("tsallis-1/2", [2 * (0.5**0.5 + 0.3**0.5 + 0.2**0.5 - 1), 0, 2 * (2**0.5 - 1), 2 * (3**0.5 - 1)]),
        ("power-sum-0", [3, 1, 2, 3]),
        ("power-sum-3", [0.16, 1, 0.25, 1 / 9]),
        ("largest", [0.5, 1, 0.5, 1 / 3]),
        ("smallest", [0.2, 0, 0, 1 / 3]),
    ],
)
def test_values(name: str, values: list[float]) -> None:
    np.testing.assert_allclose(spectral_function(name)(SPECTRA), values, rtol=1e-14, atol=1e-15)


@pytest.mark.parametrize("name", EVERY_NAME)
def test_zeros_and_rounding_below_zero_raise_no_warning(name: str) -> None:
    rounded = np.array([[1.0, -1e-17, 0.0]])
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        values = spectral_function(name)(rounded)
    np.testing.assert_allclose(values, spectral_function(name)(np.array([[1.0, 0.0, 0.0]])), atol=1e-15)


@pytest.mark.parametrize("name", EVERY_NAME)
def test_order_of_components_does_not_matter(name: str) -> None:
    f = spectral_function(name)
    np.testing.assert_allclose(f(SPECTRA), f(SPECTRA[:, ::-1]), rtol=1e-13)


@pytest.mark.parametrize("family", ["renyi", "tsallis"])
def test_order_one_is_the_von_neumann_entropy_and_is_reached_without_cancellation(family: str) -> None:
    entropy = spectral_function("von-neumann")(SPECTRA)
    np.testing.assert_array_equal(spectral_function(f"{family}-1")(SPECTRA), entropy)
    for order in ("1.0000000001", "0.9999999999"):
        np.testing.assert_allclose(spectral_function(f"{family}-{order}")(SPECTRA), entropy, atol=1e-9)


@pytest.mark.parametrize("order", ["1.4999999999", "0.5000000001"])
@pytest.mark.parametrize("family", ["renyi", "tsallis"])
def test_the_two_ways_of_computing_agree_where_they_meet(family: str, order: str) -> None:
    meeting = "3/2" if order.startswith("1") else "1/2"
    near = spectral_function(f"{family}-{order}")(SPECTRA)
    np.testing.assert_allclose(near, spectral_function(f"{family}-{meeting}")(SPECTRA), atol=1e-9)


def test_renyi_falls_with_its_order_down_to_the_min_entropy() -> None:
    orders = ["0", "1/4", "1/2", "1", "3/2", "2", "10", "1000", "100000000"]
    values = np.array([spectral_function(f"renyi-{q}")(SPECTRA) for q in orders])
    assert np.all(np.diff(values, axis=0) <= 1e-15)
    np.testing.assert_allclose(values[-1], spectral_function("renyi-inf")(SPECTRA), atol=1e-7)


@pytest.mark.parametrize(
    ("name", "part"),
    [
        ("purty", "Nearest: purity"),
        ("renyi", "Q is an order"),
        ("Von-Neumann", "Nearest: von-neumann"),
        ("", "power-sum-Q"),
        ("renyi-", "must be a number"),
        ("renyi-x", "must be a number"),
        ("renyi-1/0", "must be a number"),
        ("renyi-1e999999999", "must be a number"),
        ("tsallis--1", "at least 0"),
        ("tsallis-inf", "must be finite"),
        ("power-sum-nan", "must be a number"),
    ],
)
def test_unknown_names_are_refused_with_a_way_out(name: str, part: str) -> None:
    with pytest.raises(InputError, match=part) as caught:
        spectral_function(name)
    assert "\n" not in str(caught.value)
    assert repr(name) in str(caught.value)


@pytest.mark.parametrize(("n", "k"), [(2, 2), (3, 3), (3, 5), (4, 4)])
def test_mean_purity_and_linear_entropy_are_those_of_lubkin(n: int, k: int) -> None:
    purity = Fraction(n + k, n * k + 1)
    assert exact_mean(spectral_function("purity"), induced(n, k)) == purity
    assert exact_mean(spectral_function("linear"), induced(n, k)) == 1 - purity
    assert exact_mean(spectral_function("tsallis-2"), induced(n, k)) == 1 - purity


def test_exact_means_of_low_orders() -> None:
    assert exact_mean(spectral_function("power-sum-1"), flat(5)) == 1
    assert exact_mean(spectral_function("power-sum-0"), hilbert_schmidt(3)) == 3
    assert exact_mean(spectral_function("tsallis-0"), hilbert_schmidt(3)) == 2
    # E[λ_1²] + E[λ_2²] for Dirichlet(1, 3): (1·2 + 3·4) / (4·5)
    assert exact_mean(spectral_function("purity"), dirichlet([1, 3])) == Fraction(7, 10)


@pytest.mark.parametrize("name", ["von-neumann", "renyi-2", "tsallis-1/2", "largest", "power-sum-201"])
def test_no_exact_mean_is_claimed_elsewhere(name: str) -> None:
    assert exact_mean(spectral_function(name), flat(3)) is None


def test_a_plain_callable_has_no_exact_mean() -> None:
    assert exact_mean(lambda x: (x**2).sum(axis=1), flat(3)) is None
