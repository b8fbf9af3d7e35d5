"""Named spectral functions against hand values, limits and second formulas."""

from __future__ import annotations

import math
import warnings
from fractions import Fraction
from typing import Any

import numpy as np
import pytest

from simplexcub.average.exact import Exact
from simplexcub.average.functions import NAMES, exact_mean, spectral_function
from simplexcub.errors import InputError
from simplexcub.measures import Measure, bures, dirichlet, flat, hilbert_schmidt, induced, orthogonal

SPECTRA = np.array([[0.5, 0.3, 0.2], [1.0, 0.0, 0.0], [0.5, 0.5, 0.0], [1 / 3, 1 / 3, 1 / 3]])
LOGS = [math.log(2), math.log(3)]
RELATIVE = [math.log(3), math.log(1.5), 0]
ORDERS = {"Q": ("0", "1", "2", "7/3", "0.5"), "K": ("1", "2"), "E": ("0", "1/4", "0.35")}
EVERY_NAME = [
    *(name for name in NAMES if name[-1] not in ORDERS),
    *(name[:-1] + order for name in NAMES for order in ORDERS.get(name[-1], ())),
]


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
        ("min-entropy", [math.log(2), 0, *LOGS]),
        ("max-entropy", [math.log(3), 0, *LOGS]),
        ("participation", [1 / 0.38, 1, 2, 3]),
        ("eigenvalue-2", [0.3, 0, 0.5, 1 / 3]),
        ("eigenvalue-3", [0.2, 0, 0, 1 / 3]),
        ("gap-1", [0.2, 1, 0, 0]),
        ("gap-2", [0.1, 0, 0.5, 0]),
        ("rank-0", [3, 1, 2, 3]),
        ("rank-0.25", [2, 1, 2, 3]),
        ("determinant", [0.03, 0, 0, 1 / 27]),
        ("elementary-1", [1, 1, 1, 1]),
        ("elementary-2", [0.31, 0, 0.25, 1 / 3]),
        ("elementary-3", [0.03, 0, 0, 1 / 27]),
        ("trace-distance", [1 / 6, 2 / 3, 1 / 3, 0]),
        ("fidelity", [(0.5**0.5 + 0.3**0.5 + 0.2**0.5) ** 2 / 3, 1 / 3, 2 / 3, 1]),
        ("relative-entropy", [math.log(0.3) + 0.5 * math.log(5) + 0.3 * math.log(3) + 0.2 * math.log(2), *RELATIVE]),
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
        ("gap-0", "whole number of at least 1"),
        ("eigenvalue-1/2", "whole number of at least 1"),
        ("elementary-inf", "whole number of at least 1"),
        ("rank-inf", "must be finite"),
    ],
)
def test_unknown_names_are_refused_with_a_way_out(name: str, part: str) -> None:
    with pytest.raises(InputError, match=part) as caught:
        spectral_function(name)
    assert "\n" not in str(caught.value)
    assert repr(name) in str(caught.value)


def exact(name: str, measure: Measure, **options: Any) -> Exact:
    found = exact_mean(spectral_function(name, **options), measure)
    assert found is not None
    return found


@pytest.mark.parametrize(("n", "k"), [(2, 2), (3, 3), (3, 5), (4, 4)])
def test_mean_purity_and_linear_entropy_are_those_of_lubkin(n: int, k: int) -> None:
    purity = Fraction(n + k, n * k + 1)
    assert exact("purity", induced(n, k)).fraction == purity
    assert exact("linear", induced(n, k)).fraction == 1 - purity
    assert exact("tsallis-2", induced(n, k)).fraction == 1 - purity


def test_exact_means_of_low_orders() -> None:
    assert exact("power-sum-1", flat(5)).fraction == 1
    assert exact("power-sum-0", hilbert_schmidt(3)).fraction == 3
    assert exact("tsallis-0", hilbert_schmidt(3)).fraction == 2
    # E[λ_1²] + E[λ_2²] for Dirichlet(1, 3): (1·2 + 3·4) / (4·5)
    assert exact("purity", dirichlet([1, 3])).fraction == Fraction(7, 10)


def test_exact_means_of_entropies_are_those_of_page_and_of_sarkar_and_kumar() -> None:
    """Page 1993; for Bures ψ(N²/2 + 1) − ψ(N + 1/2), at N = 3 by hand ψ(11/2) − ψ(7/2) = 2/7 + 2/9."""
    page = sum((Fraction(1, k) for k in range(5, 17)), Fraction(0)) - Fraction(3, 8)
    assert exact("von-neumann", hilbert_schmidt(4)).fraction == page
    assert exact("renyi-1", hilbert_schmidt(4)).fraction == page
    assert exact("von-neumann", bures(3)).fraction == Fraction(2, 7) + Fraction(2, 9)
    relative = exact("relative-entropy", bures(3))
    assert relative.form == "ln 3 - 32/63"
    assert float(relative.value) == pytest.approx(math.log(3) - 32 / 63, rel=1e-15)


def test_exact_means_of_pieces_of_a_broken_stick() -> None:
    """Ordered pieces of a stick broken at random: E λ_k = (1/k + … + 1/N)/N (David & Nagaraja 2003, section 6.4)."""
    assert exact("largest", flat(3)).fraction == Fraction(11, 18)
    assert exact("eigenvalue-2", flat(3)).fraction == Fraction(5, 18)
    assert exact("smallest", flat(3)).fraction == Fraction(1, 9)
    assert exact("gap-1", flat(3)).fraction == Fraction(1, 3)
    assert exact("gap-2", flat(3)).fraction == Fraction(1, 6)


def test_exact_means_of_elementary_symmetric_polynomials() -> None:
    """e_2 = (1 − p_2)/2 for every measure; E det over Dirichlet(α) is Π α_i / (A)_N."""
    purity = exact("purity", bures(3)).fraction
    assert purity is not None
    assert exact("elementary-2", bures(3)).fraction == (1 - purity) / 2
    assert exact("determinant", dirichlet([1, 2, 3])).fraction == Fraction(6, 6 * 7 * 8)
    assert exact("elementary-2", dirichlet([1, 2, 3])).fraction == Fraction(2 + 3 + 6, 6 * 7)


def test_exact_means_of_real_powers_come_from_gamma_functions() -> None:
    """E[Σ λ^q] over the flat measure: N! Γ(q + 1)/Γ(N + q)."""
    half = exact("power-sum-1/2", flat(3))
    assert half.fraction is None
    assert float(half.value) == pytest.approx(6 * math.gamma(1.5) / math.gamma(3.5), rel=1e-15)
    assert float(exact("tsallis-1/2", flat(3)).value) == pytest.approx(2 * (float(half.value) - 1), rel=1e-14)


@pytest.mark.parametrize("name", ["renyi-2", "renyi-inf", "trace-distance", "fidelity", "participation", "rank-0.1"])
def test_no_exact_mean_is_claimed_elsewhere(name: str) -> None:
    assert exact_mean(spectral_function(name), flat(3)) is None


def test_no_exact_mean_is_claimed_where_the_measure_has_no_formula_for_it() -> None:
    assert exact_mean(spectral_function("largest"), bures(3)) is None
    assert exact_mean(spectral_function("von-neumann"), orthogonal(3, 3)) is None
    assert exact_mean(spectral_function("elementary-4"), flat(3)) is None


def test_a_plain_callable_has_no_exact_mean() -> None:
    assert exact_mean(lambda x: (x**2).sum(axis=1), flat(3)) is None


@pytest.mark.parametrize("name", ["von-neumann", "renyi-2", "renyi-inf", "min-entropy", "max-entropy", "tsallis-1"])
def test_bits_are_nats_over_the_logarithm_of_two(name: str) -> None:
    nats, bits = spectral_function(name), spectral_function(name, unit="bits")
    np.testing.assert_allclose(bits(SPECTRA) * math.log(2), nats(SPECTRA), rtol=1e-14)
    assert (nats.unit, bits.unit) == ("nats", "bits")


def test_exact_means_in_bits_say_so() -> None:
    found = exact("von-neumann", hilbert_schmidt(2), unit="bits")
    assert (found.form, found.fraction) == ("(1/3)/ln 2", None)
    assert float(found.value) == pytest.approx(1 / (3 * math.log(2)), rel=1e-15)


@pytest.mark.parametrize("name", ["purity", "largest", "tsallis-2", "fidelity"])
def test_what_has_no_unit_refuses_bits(name: str) -> None:
    with pytest.raises(InputError, match="bits must be asked of an entropy"):
        spectral_function(name, unit="bits")


def test_an_unknown_unit_is_refused() -> None:
    with pytest.raises(InputError, match="unit must be one of nats, bits"):
        spectral_function("von-neumann", unit="dits")  # type: ignore[arg-type]


@pytest.mark.parametrize("name", ["gap-3", "eigenvalue-4", "elementary-4"])
def test_too_few_components_are_refused(name: str) -> None:
    with pytest.raises(InputError, match="at least 4 components; got 3"):
        spectral_function(name)(SPECTRA)
