"""Partitions, changes of basis, polynomials read from text and closed-form numbers, each against an outside check."""

from __future__ import annotations

import math
from fractions import Fraction
from itertools import permutations, product

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from mpmath import mp, mpf

from simplexcub.errors import InputError
from simplexcub.moments.alternant import Kernel, alternant_moment, homogeneity
from simplexcub.moments.digamma import DigammaSum
from simplexcub.moments.dirichlet import rising
from simplexcub.moments.jack import jack_in_monomials
from simplexcub.moments.partitions import count_partitions, distinct_permutations, orderings, partitions
from simplexcub.moments.polynomial import parse_polynomial, polynomial_of, polynomial_text
from simplexcub.moments.powersum import power_sum_moment
from simplexcub.moments.schur import schur_at_ones
from simplexcub.moments.transitions import (
    augmented_in_power_sums,
    kostka,
    power_sums_in_augmented,
    power_sums_in_schur,
)

POINT = (Fraction(3), Fraction(-1, 2), Fraction(2, 5), Fraction(7))


def p(k: int) -> Fraction:
    return sum((x**k for x in POINT), Fraction(0))


def power_product(mu: tuple[int, ...]) -> Fraction:
    return math.prod((p(k) for k in mu), start=Fraction(1))


def augmented(a: tuple[int, ...]) -> Fraction:
    return sum(
        (
            math.prod((x**k for x, k in zip(xs, a, strict=True)), start=Fraction(1))
            for xs in permutations(POINT, len(a))
        ),
        Fraction(0),
    )


def determinant(rows: list[list[Fraction]]) -> Fraction:
    total = Fraction(0)
    for order in permutations(range(len(rows))):
        inversions = sum(order[i] > order[j] for j in range(len(order)) for i in range(j))
        total += (-1) ** inversions * math.prod(rows[i][order[i]] for i in range(len(rows)))
    return total


def schur(nu: tuple[int, ...]) -> Fraction:
    """The bialternant, Cauchy's definition."""
    n = len(POINT)
    full = nu + (0,) * (n - len(nu))
    top = [[x ** (full[j] + n - 1 - j) for j in range(n)] for x in POINT]
    bottom = [[x ** (n - 1 - j) for j in range(n)] for x in POINT]
    return determinant(top) / determinant(bottom)


@pytest.mark.parametrize("mu", [mu for d in range(1, 7) for mu in partitions(d, 4)])
def test_changes_of_basis_hold_at_a_point(mu: tuple[int, ...]) -> None:
    assert augmented(mu) == sum(x * power_product(a) for a, x in augmented_in_power_sums(mu).items())
    assert power_product(mu) == sum(x * augmented(a) for a, x in power_sums_in_augmented(mu).items() if len(a) <= 4)
    assert power_product(mu) == sum(x * schur(nu) for nu, x in power_sums_in_schur(mu, 4).items())
    monomials = {a: augmented(a) * orderings(a, 4) / math.perm(4, len(a)) for a in partitions(sum(mu), 4)}
    assert schur(mu) == sum(kostka(mu, a) * value for a, value in monomials.items())


def test_characters_of_the_symmetric_group_on_four_letters() -> None:
    """Littlewood, *The Theory of Group Characters* (1940), appendix; columns 1⁴, 2 1², 2², 3 1, 4."""
    table = {
        (4,): (1, 1, 1, 1, 1),
        (3, 1): (3, 1, -1, 0, -1),
        (2, 2): (2, 0, 2, -1, 0),
        (2, 1, 1): (3, -1, -1, 0, 1),
        (1, 1, 1, 1): (1, -1, 1, 1, -1),
    }
    for at, mu in enumerate([(1, 1, 1, 1), (2, 1, 1), (2, 2), (3, 1), (4,)]):
        found = power_sums_in_schur(mu, 4)
        assert [found.get(nu, 0) for nu in table] == [row[at] for row in table.values()]


@pytest.mark.parametrize("degree", [5, 8])
def test_characters_are_orthogonal(degree: int) -> None:
    shapes = list(partitions(degree, degree))
    columns = {mu: power_sums_in_schur(mu, degree) for mu in shapes}
    for mu, nu in product(shapes, repeat=2):
        centraliser = math.prod(k ** mu.count(k) * math.factorial(mu.count(k)) for k in set(mu))
        inner = sum(x * columns[nu].get(shape, 0) for shape, x in columns[mu].items())
        assert inner == (centraliser if mu == nu else 0)


def test_schur_functions_count_tableaux() -> None:
    for nu in partitions(5, 3):
        count = sum(
            kostka(nu, tuple(a for a in content if a)) for content in product(range(6), repeat=3) if sum(content) == 5
        )
        assert schur_at_ones(nu, 3) == count


def test_zonal_polynomials_of_degree_three() -> None:
    """Muirhead, *Aspects of Multivariate Statistical Theory* (1982), section 7.2.2, up to scale."""
    rows = jack_in_monomials(3, 3, Fraction(2))
    assert rows[3,] == {(3,): 1, (2, 1): Fraction(3, 5), (1, 1, 1): Fraction(2, 5)}
    assert rows[2, 1] == {(2, 1): 1, (1, 1, 1): Fraction(3, 2)}
    assert rows[1, 1, 1] == {(1, 1, 1): 1}


@pytest.mark.parametrize("degree", [3, 5, 6])
def test_jack_polynomials_at_alpha_one_are_schur_functions(degree: int) -> None:
    for nu, row in jack_in_monomials(degree, 4, Fraction(1)).items():
        assert row == {mu: kostka(nu, mu) for mu in partitions(degree, 4) if kostka(nu, mu)}


@pytest.mark.parametrize("kernel", list(Kernel))
@pytest.mark.parametrize("exponents", [(2, 1, 0), (3, 3, 1), (4, 0, 0), (1, 1, 1), (5, 2, 2)])
def test_pruned_sum_is_the_full_alternating_sum(kernel: Kernel, exponents: tuple[int, ...]) -> None:
    """All N! terms with Γ values and pair kernels written out, as the formula reads."""
    c = Fraction(1, 3)
    n = len(exponents)

    def alternating(a: tuple[int, ...]) -> Fraction:
        total = Fraction(0)
        for order in permutations(range(n)):
            x = [k + s + c + 1 for k, s in zip(a, order, strict=True)]
            term = Fraction((-1) ** sum(order[i] > order[j] for j in range(n) for i in range(j)))
            for i in range(n):
                term *= rising(c + 1, a[i] + order[i])
                for j in range(i):
                    term *= (x[i] - x[j]) / (1 if kernel is Kernel.DIFFERENCE else x[i] + x[j])
            total += term
        return total

    wanted = alternating(exponents) / alternating((0,) * n) / rising(homogeneity(n, c, kernel), sum(exponents))
    assert alternant_moment(exponents, c, kernel) == wanted


@settings(deadline=None)
@given(st.integers(0, 14), st.integers(0, 6))
def test_counting_partitions(total: int, parts: int) -> None:
    listed = list(partitions(total, parts))
    assert len(listed) == len(set(listed)) == count_partitions(total, parts)
    assert all(sum(mu) == total and list(mu) == sorted(mu, reverse=True) and len(mu) <= parts for mu in listed)


@given(st.lists(st.integers(0, 3), min_size=1, max_size=6))
def test_distinct_permutations_are_all_and_once(items: list[int]) -> None:
    found = list(distinct_permutations(items))
    assert sorted(found) == sorted(set(permutations(items)))
    assert len(found) == orderings([k + 1 if k else 0 for k in items])


def test_power_sums_of_a_point_mass() -> None:
    """The mean over a point mass is the value there, whatever the route."""

    def moment(a: object) -> Fraction:
        return math.prod((x**k for x, k in zip(POINT, a, strict=True)), start=Fraction(1))  # type: ignore[call-overload]

    assert power_sum_moment(moment, 4, (3, 2), symmetric=False) == p(3) * p(2)


@pytest.mark.parametrize(
    "text",
    [
        "__import__('os').getcwd()", "x4", "y", "x0", "x1^-1", "x1^x2", "x1^0.5", "x1/x2", "1/0", "x1 if 1 else 2",
        "1e3", "0x10", "1_0", "x1^101", "(x1+x2+x3+1)^60*(x1+x2)^60", "", "x1,x2", "lambda: 1", "x1==2", "True", "'a'",
        "1j", "-" * 3900 + "1", "x1\x00", "[x1]", "x1.real", "f(x1)", "x1@x2", "x1//2", "x1%2", "((", "~x1", "9" * 5000,
    ],
)  # fmt: skip
def test_text_that_is_no_polynomial_is_refused(text: str) -> None:
    with pytest.raises(InputError) as caught:
        parse_polynomial(text, 3)
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("(x1 - x2)^2 * x3", (Fraction(3) + Fraction(1, 2)) ** 2 * Fraction(2, 5)),
        ("-x1**2 + .5*x2 - 1.25", -9 + Fraction(1, 2) * Fraction(-1, 2) - Fraction(5, 4)),
        ("2*(x1/3 + 1/2)^3", 2 * (Fraction(1) + Fraction(1, 2)) ** 3),
        ("λ1² − λ2·λ3", 9 + Fraction(1, 5)),
        ("2^3 - 2^2", Fraction(4)),
        ("x1 - x1", Fraction(0)),
    ],
)
def test_polynomials_mean_what_they_say(text: str, value: Fraction) -> None:
    parsed = parse_polynomial(text, 3)
    at = sum(
        (
            x * math.prod((y**k for y, k in zip(POINT[:3], a, strict=True)), start=Fraction(1))
            for a, x in parsed.items()
        ),
        Fraction(0),
    )
    assert at == value
    assert parse_polynomial(polynomial_text(parsed), 3) == parsed


@settings(deadline=None)
@given(
    st.dictionaries(
        st.tuples(*[st.integers(0, 4)] * 3), st.fractions(-5, 5, max_denominator=9).filter(bool), max_size=6
    )
)
def test_polynomial_text_reads_back(terms: dict[tuple[int, ...], Fraction]) -> None:
    polynomial = polynomial_of(terms, 3)
    assert parse_polynomial(polynomial_text(polynomial), 3) == polynomial == terms


@pytest.mark.parametrize("terms", [{(1, 0): 1}, {(1, 0, -1): 1}, {(1, 0, 0): 0.5}, {(1, 0, 0): "a"}, {(1.0, 0, 0): 1}])
def test_terms_that_are_no_polynomial_are_refused(terms: dict[tuple[int, ...], object]) -> None:
    with pytest.raises(InputError):
        polynomial_of(terms, 3)  # type: ignore[arg-type]


@settings(deadline=None)
@given(
    st.fractions(-5, 5, max_denominator=12),
    st.dictionaries(
        st.fractions(Fraction(1, 6), 12, max_denominator=6), st.fractions(-4, 4, max_denominator=5), max_size=5
    ),
)
def test_digamma_sums_keep_their_value(rational: Fraction, digammas: dict[Fraction, Fraction]) -> None:
    number = DigammaSum.of(rational, digammas)
    with mp.workdps(40):
        direct = mpf(rational.numerator) / rational.denominator
        for x, b in digammas.items():
            direct += mpf(b.numerator) / b.denominator * mp.digamma(mpf(x.numerator) / x.denominator)
        assert abs(number.value(40) - direct) < mpf(10) ** -30
        assert abs((-number + number).value(40)) == 0
        assert abs((3 * number).value(40) - 3 * direct) < mpf(10) ** -30
    assert all(0 < x <= 1 for x, _ in number.digammas)


def test_digamma_sums_read_well() -> None:
    half, one = Fraction(1, 2), Fraction(1)
    assert str(DigammaSum.of(0, {})) == "0"
    assert str(DigammaSum.of(0, {half: 1, one: -1})) == "-2 ln 2"
    assert str(DigammaSum.of(Fraction(-1, 3), {half: Fraction(-1, 2), one: Fraction(1, 2)})) == "-1/3 + ln 2"
    assert str(DigammaSum.of(1, {Fraction(1, 3): 2, one: -2})) == "1 + 2 ψ(1/3) - 2 ψ(1)"
    assert DigammaSum.of(1, {Fraction(1, 3): 2, one: -2}).log_two is None
    with pytest.raises(InputError, match="must be rational"):
        _ = DigammaSum.of(1, {half: 1, one: -1}).fraction


def test_digamma_arguments_far_apart_stay_apart() -> None:
    far = DigammaSum.of(0, {Fraction(10**9): 1, Fraction(1): -1})
    assert not far.is_rational
    with mp.workdps(30):
        assert abs(far.value(30) - mp.harmonic(10**9 - 1)) < mpf(10) ** -27
