"""Building measures, their records, their densities and every refusal."""

from __future__ import annotations

import math
import pickle
import re
import unicodedata
from collections.abc import Callable
from fractions import Fraction

import numpy as np
import pytest
from mpmath import mp, mpf
from scipy.integrate import dblquad, quad

from simplexcub.errors import InputError, NothingFound, SimplexcubError
from simplexcub.measures import (
    FAMILIES,
    Induced,
    Measure,
    beta_ensemble,
    bures,
    bures_hall,
    dirichlet,
    flat,
    from_parameters,
    hilbert_schmidt,
    induced,
    ordered,
    orthogonal,
    polynomial_density,
    symplectic,
)

ALL = [
    flat(3),
    dirichlet(["1/2", 2]),
    hilbert_schmidt(3),
    induced(2, 5),
    bures(3),
    bures_hall(3, 5),
    bures_hall(2, exponent="1/3"),
    bures_hall(2, exponent="-3/4"),
    orthogonal(3, 4),
    symplectic(2, 3),
    beta_ensemble(3, "1/2", "1/3"),
    polynomial_density(flat(2), "x1^2 + x2"),
    ordered(hilbert_schmidt(3)),
    ordered(dirichlet([2, 2])),
]


@pytest.mark.parametrize("measure", ALL, ids=str)
def test_records_and_pickles_come_back_as_the_same_measure(measure: Measure) -> None:
    assert from_parameters(measure.parameters()) == measure
    assert pickle.loads(pickle.dumps(measure)) == measure
    assert hash(measure) == hash(from_parameters(measure.parameters()))
    assert len(measure.routes) >= 2
    assert measure.moment((0,) * measure.N) == 1


def test_every_family_has_a_name() -> None:
    assert {measure.family for measure in ALL} == {*FAMILIES, "ordered"}


def evaluator(text: str) -> Callable[[tuple[float, ...]], float]:
    """The printed density as a function: the notation turned into arithmetic, a blank meaning a product."""
    names = {"gamma": math.gamma, "abs": abs, "__builtins__": {}}
    for shown, plain in (("−", "-"), ("^", "**"), ("·", " "), ("Γ", "gamma")):
        text = text.replace(shown, plain)
    text = re.sub("[⁰¹²³⁴⁵⁶⁷⁸⁹]+", lambda match: f"**{unicodedata.normalize('NFKC', match[0])}", text)
    text = re.sub(r"\|([^|]*)\|", r"abs(\1)", text)
    text = re.sub(r"[λx](\d+)", lambda match: f"x[{int(match[1]) - 1}]", text)

    def product(match: re.Match[str]) -> str:
        factor = re.sub(r"(\d)j", r"\1*j", match[2]).replace(" ", "*")
        return repr(math.prod(eval(factor, {**names, "j": j}) for j in range(int(match[1]))))

    text = re.sub(r"Π_\(j<(\d+)\) (\S+ \S+)", product, text)
    text = re.sub(r"\s+", "*", re.sub(r" ([-+]) ", r"\1", text).strip())
    compiled = compile(text, "density", "eval")
    return lambda x: float(eval(compiled, {**names, "x": x}))


@pytest.mark.parametrize(
    "measure",
    [
        flat(2), dirichlet(["3/2", 2]), hilbert_schmidt(2), induced(2, 3), induced(2, 5), bures(2), bures_hall(2, 4),
        bures_hall(2, exponent="1/3"), orthogonal(2, 3), orthogonal(2, 4), symplectic(2, 2),
        beta_ensemble(2, "3/2", "1/2"), polynomial_density(dirichlet([2, 1]), "x1^2 + x2/3"),
    ],
    ids=str,
)  # fmt: skip
def test_printed_densities_integrate_to_one_for_two(measure: Measure) -> None:
    density = evaluator(measure.density()[0])

    def at(t: float) -> float:
        s = math.sin(t) ** 2
        return density((s, 1 - s)) * math.sin(2 * t)

    halves = [quad(at, a, b, epsabs=1e-10)[0] for a, b in ((0, math.pi / 4), (math.pi / 4, math.pi / 2))]
    assert abs(sum(halves) - 1) < 1e-7


@pytest.mark.parametrize("measure", [flat(3), hilbert_schmidt(3), bures_hall(3, 4), symplectic(3, 3)], ids=str)
def test_printed_densities_integrate_to_one_for_three(measure: Measure) -> None:
    density = evaluator(measure.density()[0])
    mass = dblquad(lambda y, x: density((x, y, 1 - x - y)), 0, 1, 0, lambda x: 1 - x, epsabs=1e-6)[0]
    assert abs(mass - 1) < 1e-4


@pytest.mark.parametrize(
    ("measure", "text"),
    [
        (dirichlet([1, 2, 3]), "Γ(6)/(Γ(1) Γ(2) Γ(3)) · λ2 λ3²"),
        (dirichlet(["1/2", 13]), "Γ(27/2)/(Γ(1/2) Γ(13)) · λ1^(-1/2) λ2¹²"),
        (induced(2, 4), "210 λ1² λ2² (λ1−λ2)²"),  # 1/(B(3, 3) − 4 B(4, 4))
        (beta_ensemble(2, 3, 2), "Γ(9) Π_(j<2) Γ(5/2)/(Γ(3+3/2j) Γ(5/2+3/2j)) · λ1² λ2² |λ1−λ2|³"),
        (bures(3), "Γ(9/2)/Γ(1/2)³ · "),
        (hilbert_schmidt(16), "Γ(256)/(Π_(j<16) Γ(16−j) Γ(17−j)) · Π_(i<j) (λi−λj)²"),
    ],
    ids=str,
)
def test_powers_and_quotients_are_printed_in_one_way(measure: Measure, text: str) -> None:
    assert text in measure.density()[0]


def test_densities_of_many_eigenvalues_are_short_and_right() -> None:
    for measure in (induced(1000, 1001), bures(1000), flat(1000), orthogonal(500, 501)):
        assert all(len(text) < 200 for text in measure.density())
    seven = induced(7, 9).density()[0]
    constant = math.gamma(63) / math.prod(math.gamma(9 - j) * math.gamma(8 - j) for j in range(7))
    assert seven.startswith("Γ(63)/(Π_(j<7) Γ(9−j) Γ(8−j)) · Π_i λi² Π_(i<j) (λi−λj)²")
    assert math.isclose(constant, float(Induced(7, 9)._constant()), rel_tol=1e-12)
    assert bures(7).density()[0].startswith("Γ(49/2) Π_(j<7) Γ(1+2j)/(Γ(1/2+j) Γ(1+j) Γ(2+j)) · Π_i λi^(-1/2) ")
    product = math.prod(
        math.gamma(1 + 2 * j) / (math.gamma(0.5 + j) * math.gamma(1 + j) * math.gamma(2 + j)) for j in range(7)
    )
    assert math.isclose(product * math.gamma(0.5) ** 7, float(1 / bures(7)._mass()), rel_tol=1e-12)


@pytest.mark.parametrize("measure", ALL, ids=str)
def test_latex_has_balanced_braces_and_no_unicode(measure: Measure) -> None:
    tex = measure.density()[1]
    assert tex.count("{") == tex.count("}")
    assert tex.isascii()


BAD: list[tuple[object, str]] = [
    (lambda: flat(1), "N must be an integer of at least 2; got 1"),
    (lambda: flat(2.0), "N must be an integer"),
    (lambda: flat(True), "N must be an integer"),
    (lambda: dirichlet([1]), "at least 2 entries"),
    (lambda: dirichlet([1, 0]), "every alpha must be positive"),
    (lambda: dirichlet([1, 0.5]), "alpha must hold exact numbers"),
    (lambda: dirichlet([1, "x"]), "alpha must hold numbers"),
    (lambda: dirichlet([1, "1/0"]), "alpha must hold numbers"),
    (lambda: induced(3, 2), "K must be an integer of at least 3; got 2"),
    (lambda: bures(1), "N must be an integer of at least 2"),
    (lambda: bures_hall(3), "one of K and exponent must be given; got neither"),
    (lambda: bures_hall(3, 4, exponent="1/2"), "got both"),
    (lambda: bures_hall(3, exponent=-1), "exponent must be above -1"),
    (lambda: bures_hall(3, exponent=0.5), "exponent must hold exact numbers"),
    (lambda: bures_hall(3, 2), "K must be an integer of at least 3"),
    (lambda: orthogonal(3, 2), "K must be an integer of at least 3"),
    (lambda: symplectic(1, 2), "N must be an integer"),
    (lambda: beta_ensemble(3, 0, 1), "beta must be positive"),
    (lambda: beta_ensemble(3, 1, "-3/2"), "exponent must be above -1"),
    (lambda: ordered(bures(3)), "polynomial density on the chamber"),
    (lambda: ordered(dirichlet([1, 2])), "polynomial density on the chamber"),
    (lambda: ordered(dirichlet(["1/2", "1/2"])), "polynomial density on the chamber"),
    (lambda: ordered(orthogonal(3, 3)), "polynomial density on the chamber"),
    (lambda: polynomial_density(bures(3), "x1"), "base must be"),
    (lambda: polynomial_density(flat(2), "x1 - x2"), "density must not be negative"),
    (lambda: polynomial_density(flat(3), "(x1 - x2)^2 - 1/1000"), "density must not be negative"),
    (lambda: polynomial_density(flat(3), "-1"), "density must not be negative"),
    (lambda: polynomial_density(flat(2), "0"), "positive integral"),
    (lambda: flat(3).moment((1, 1)), "one entry per component, 3 here"),
    (lambda: bures(2).moment((1, -1)), "non-negative integers"),
    (lambda: bures(2).moment((1, 0.5)), "non-negative integers"),
    (lambda: bures(2).moment((1, True)), "non-negative integers"),
    (lambda: bures(2).moment((1, 0), route="schur"), "route must be one of alternant, cauchy; got schur"),
    (lambda: bures(2).power_sum_moment((2,), route="x"), "route must be one of"),
    (lambda: bures(2).power_sum_moment((0,)), "positive integer powers"),
    (lambda: bures(2).power_sum_moment((1.5,)), "positive integer powers"),
    (lambda: bures(2).power_sum_cumulant(()), "1 to 8 power sums"),
    (lambda: bures(2).power_sum_cumulant((2,) * 9), "1 to 8 power sums"),
    (lambda: flat(1000).power_sum_moment(range(2, 14)), "split in at most 2000 ways"),
    (lambda: bures(2).power_mean("-1/2"), "q must be above -1/2, where the mean of Σ λ^q diverges"),
    (lambda: bures(2).power_mean(-0.5), "q must be above -1/2"),
    (lambda: hilbert_schmidt(2).power_mean(-1), "q must be above -1"),
    (lambda: hilbert_schmidt(2).power_mean_exact(-1), "q must be above -1"),
    (lambda: induced(2, 4).power_mean(mpf("-3.5")), "q must be above -3"),
    (lambda: dirichlet(["1/3", 2]).power_mean("-1/3"), "q must be above -1/3"),
    (lambda: polynomial_density(flat(2), "x1*x2").power_mean(-2), "q must be above -2"),
    (lambda: bures(2).power_mean("nan"), "finite real number"),
    (lambda: bures(2).power_mean(float("inf")), "finite real number"),
    (lambda: bures(2).power_mean(1j), "finite real number"),
    (lambda: bures(2).power_mean(mp.inf), "finite real number"),
    (lambda: bures(2).power_mean(1, dps=0), "dps must be an integer between 1 and 10000"),
    (lambda: bures(2).power_mean_exact("1/2"), "q must be an integer"),
    (lambda: bures(2).power_mean_exact(10**6), "q must be at most 20000"),
    (lambda: bures(2).log_mean(0), "k must be an integer of at least 1"),
    (lambda: orthogonal(2, 3).power_mean("1/2"), "measure with a closed form"),
    (lambda: orthogonal(2, 3).entropy(), "measure with a closed form"),
    (lambda: from_parameters({"family": "x"}), "measure must be one of flat, dirichlet"),
    (lambda: from_parameters({"family": ["flat"]}), "measure must be one of"),
    (lambda: from_parameters({"family": "induced", "N": 3}), "needs N and K; got no K"),
    (lambda: from_parameters({"family": "flat", "N": 3, "K": 4}), "measure flat must have no K"),
    (lambda: from_parameters({"family": "hilbert-schmidt", "N": 3, "K": 4}), "K must agree"),
    (lambda: from_parameters({"family": "dirichlet", "alpha": [1, 2], "N": 3}), "N must agree"),
    (lambda: from_parameters({"family": "ordered"}), "needs the record of a measure under 'of'"),
    (lambda: from_parameters({"family": "ordered", "of": {"family": "ordered"}}), "needs the record of a measure"),
    (lambda: flat(2).sample(np.random.default_rng(0), -1), "size must be an integer of at least 0"),
    (lambda: bures(2).sample(np.random.default_rng(0), 1.5), "size must be an integer"),
]


@pytest.mark.parametrize(("call", "message"), BAD, ids=[message for _, message in BAD])
def test_bad_input_is_refused_in_one_line(call: object, message: str) -> None:
    with pytest.raises(InputError) as caught:
        call()  # type: ignore[operator]
    assert message in str(caught.value)
    assert "\n" not in str(caught.value)
    assert str(pickle.loads(pickle.dumps(caught.value))) == str(caught.value)


def test_product_rules_are_offered_where_they_exist() -> None:
    assert hilbert_schmidt(3).over_dirichlet() == ((1, 1, 1), True)
    assert dirichlet([1, 2]).over_dirichlet() == ((1, 2), False)
    for measure in (bures(3), orthogonal(3, 3), ordered(flat(3))):
        with pytest.raises(NothingFound, match="product rule"):
            measure.over_dirichlet()
    assert issubclass(NothingFound, SimplexcubError)


def test_real_powers_meet_the_integers() -> None:
    for measure in (flat(3), hilbert_schmidt(4), bures(4), induced(2, 6), polynomial_density(flat(2), "x1^3")):
        assert measure.power_mean(0) == measure.N
        assert abs(measure.power_mean(1) - 1) < 1e-40
        for k in (1, 2, 5):
            exact = measure.power_mean_exact(k)
            with mp.workdps(60):
                near = measure.power_mean(Fraction(k) + Fraction(1, 10**40), dps=60)
                assert abs(near - mpf(exact.numerator) / exact.denominator) < mpf(10) ** -38


def test_real_powers_keep_their_digits_where_the_terms_cancel() -> None:
    measure = hilbert_schmidt(60)
    coarse, fine = measure.power_mean("7/3", dps=15), measure.power_mean("7/3", dps=80)
    with mp.workdps(80):
        assert abs(coarse / fine - 1) < mpf(10) ** -14
        above = measure.power_mean(Fraction(2) + Fraction(1, 10**30), dps=60)
        exact = measure.power_mean_exact(2)
        assert abs(above - mpf(exact.numerator) / exact.denominator) < mpf(10) ** -28


def test_huge_integer_powers_use_the_closed_form() -> None:
    value = hilbert_schmidt(3).power_mean(2000, dps=30)
    exact = hilbert_schmidt(3).power_mean_exact(2000)
    with mp.workdps(30):
        assert abs(value / (mpf(exact.numerator) / exact.denominator) - 1) < mpf(10) ** -27


def test_inverse_powers_are_sums_of_reciprocals() -> None:
    """E[Σ 1/λ] by lowering the exponents: the induced density with K has the factor Π λ^(K−N)."""
    three, base = induced(2, 5), induced(2, 4)
    ratio = base.moment((1, 1))
    assert three.power_mean_exact(-1) == 1 / ratio  # Σ 1/λ = 1/(λ_1 λ_2) for N = 2
    assert dirichlet([3, 2]).power_mean_exact(-1) == Fraction(4, 2) + Fraction(4, 1)
    assert polynomial_density(flat(2), "x1*x2").power_mean_exact(-1) == dirichlet([2, 2]).power_mean_exact(-1)


def test_cumulants_of_purities() -> None:
    measure = bures(3)
    m2, m22, m222 = (measure.power_sum_moment((2,) * k) for k in (1, 2, 3))
    assert measure.power_sum_cumulant((2, 2, 2)) == m222 - 3 * m22 * m2 + 2 * m2**3
    assert measure.power_sum_covariance(2, 3) == measure.power_sum_moment((2, 3)) - m2 * measure.power_sum_moment((3,))
    assert measure.power_sum_covariance(1, 3) == 0


def test_entropy_of_quaternion_states_by_their_polynomial() -> None:
    pairs = "((x1 - x2)^4)*x1*x2"
    assert symplectic(2, 2).entropy() == polynomial_density(flat(2), pairs).entropy()


def test_symmetry_is_recognised() -> None:
    assert polynomial_density(flat(3), "x1*x2 + x2*x3 + x3*x1").is_symmetric
    assert not polynomial_density(flat(3), "x1*x2 + x2*x3 + 2*x3*x1").is_symmetric
    assert not polynomial_density(dirichlet([1, 2, 1]), "x1*x2 + x2*x3 + x3*x1").is_symmetric


def test_products_of_polynomials_multiply() -> None:
    once = polynomial_density(flat(2), "x1*x2^2")
    assert polynomial_density(polynomial_density(flat(2), "x1"), {(0, 2): "1"}) == once
    assert once.moment((1, 1)) == dirichlet([2, 3]).moment((1, 1))
