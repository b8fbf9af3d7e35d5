"""All routes of every measure give the same fractions, and they obey the identities that any moments must."""

from __future__ import annotations

from fractions import Fraction
from itertools import combinations_with_replacement, pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from simplexcub.errors import InputError
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
from simplexcub.moments.partitions import distinct_permutations, orderings, partitions


def padded(parts: tuple[int, ...], n: int) -> tuple[int, ...]:
    return parts + (0,) * (n - len(parts))


SPECTRA = [
    *(f(n) for n in (2, 3, 4, 5) for f in (hilbert_schmidt, bures)),
    *(induced(n, n + 2) for n in (2, 3, 4, 5)),
    *(bures_hall(n, exponent="-2/3") for n in (2, 3, 4, 5)),
    *(bures_hall(n, n + 1) for n in (2, 3, 4, 5)),
]
BETAS = [
    *(orthogonal(n, n + k) for n in (2, 3, 4) for k in (0, 1)),
    symplectic(2, 3),
    symplectic(3, 3),
    beta_ensemble(3, "1/2", "1/3"),
    beta_ensemble(3, 6, 0),
    beta_ensemble(4, 2, "-1/2"),
]
UNEQUAL = [
    dirichlet(["1/2", 2, "7/3"]),
    polynomial_density(flat(3), "x1*(x2 - x3)^2 + x1^3/7"),
    ordered(flat(3)),
    ordered(hilbert_schmidt(3)),
    ordered(orthogonal(3, 4)),
    ordered(induced(2, 4)),
]


@pytest.mark.parametrize("measure", SPECTRA, ids=str)
def test_routes_agree_for_every_partition_up_to_degree_8(measure: Measure) -> None:
    for degree in range(9):
        for mu in partitions(degree, measure.N):
            exponents = padded(mu, measure.N)
            values = {measure.moment(exponents, route=route) for route in measure.routes}
            assert len(values) == 1, (exponents, values)


@pytest.mark.parametrize("measure", BETAS, ids=str)
def test_routes_agree_for_every_beta(measure: Measure) -> None:
    for degree in range(8):
        for mu in partitions(degree, measure.N):
            exponents = padded(mu, measure.N)
            assert len({measure.moment(exponents, route=route) for route in measure.routes}) == 1, exponents


@pytest.mark.parametrize("measure", UNEQUAL, ids=str)
def test_routes_agree_without_symmetry(measure: Measure) -> None:
    for degree in range(5):
        for mu in partitions(degree, measure.N):
            for exponents in distinct_permutations(padded(mu, measure.N)):
                assert len({measure.moment(exponents, route=route) for route in measure.routes}) == 1, exponents


@pytest.mark.parametrize("measure", [*SPECTRA[:6], *BETAS, *UNEQUAL, dirichlet(["3/2"] * 4), flat(6)], ids=str)
def test_routes_agree_for_power_sums(measure: Measure) -> None:
    for length in (1, 2, 3):
        for parts in combinations_with_replacement((2, 3), length):
            reference = measure.power_sum_moment(parts)
            assert all(measure.power_sum_moment(parts, route=route) == reference for route in measure.routes)


@pytest.mark.parametrize("measure", [*SPECTRA, *BETAS, *UNEQUAL], ids=str)
def test_power_sums_are_sums_of_moments(measure: Measure) -> None:
    n = measure.N
    by_hand = Fraction(0)
    for i in range(n):
        for j in range(n):
            exponents = [0] * n
            exponents[i] += 2
            exponents[j] += 3
            by_hand += measure.moment(exponents)
    assert measure.power_sum_moment((3, 2)) == by_hand


@pytest.mark.parametrize("measure", [*SPECTRA, *BETAS, *UNEQUAL], ids=str)
def test_multiplying_by_the_sum_of_components_changes_nothing(measure: Measure) -> None:
    for a in ((2, 1), (3, 0), (1, 1)):
        exponents = padded(a, measure.N)
        raised = [(*exponents[:i], exponents[i] + 1, *exponents[i + 1 :]) for i in range(measure.N)]
        assert sum(measure.moment(b) for b in raised) == measure.moment(exponents)


@pytest.mark.parametrize("measure", SPECTRA[:9], ids=str)
def test_moments_do_not_depend_on_the_order_of_exponents(measure: Measure) -> None:
    exponents = padded((3, 1), measure.N)
    assert {measure.moment(a) for a in distinct_permutations(exponents)} == {measure.moment(exponents)}


@pytest.mark.parametrize(
    ("measure", "base"),
    [
        (ordered(hilbert_schmidt(4)), hilbert_schmidt(4)),
        (ordered(induced(3, 5)), induced(3, 5)),
        (ordered(dirichlet([2, 2, 2])), dirichlet([2, 2, 2])),
        (ordered(orthogonal(3, 6)), orthogonal(3, 6)),
        (ordered(symplectic(2, 2)), symplectic(2, 2)),
    ],
    ids=str,
)
def test_ordered_moments_average_to_the_unordered_ones(measure: Measure, base: Measure) -> None:
    for degree in (1, 3, 4):
        for mu in partitions(degree, base.N):
            exponents = padded(mu, base.N)
            total = sum(measure.moment(a) for a in distinct_permutations(exponents))
            assert total == orderings(exponents) * base.moment(exponents)


@pytest.mark.parametrize("n", [2, 3, 4])
def test_beta_two_is_the_induced_measure(n: int) -> None:
    jack = beta_ensemble(n, 2, Fraction(1, 2))
    assert beta_ensemble(n, 2, 1) == induced(n, n + 1)
    assert jack.family == "beta"
    assert jack.routes[0] == "jack"


@pytest.mark.parametrize("n", [2, 3, 4])
def test_polynomial_density_contains_hilbert_schmidt(n: int) -> None:
    pairs = "*".join(f"(x{i} - x{j})^2" for j in range(1, n + 1) for i in range(1, j))
    mine = polynomial_density(flat(n), pairs)
    assert mine.is_symmetric
    for mu in partitions(5, n):
        assert mine.moment(padded(mu, n)) == hilbert_schmidt(n).moment(padded(mu, n))
    assert mine.power_sum_moment((4, 2)) == hilbert_schmidt(n).power_sum_moment((4, 2))


def test_large_environment_tends_to_the_maximally_mixed_point() -> None:
    n = 4
    distances = [induced(n, k).moment((3, 0, 0, 0)) * n**3 - 1 for k in (10, 100, 1000, 10000)]
    assert all(a / 11 < b < a / 9 for a, b in pairwise(distances))


@pytest.mark.parametrize(("n", "k"), [(20, 30), (1000, 2000)])
def test_large_n_routes_agree(n: int, k: int) -> None:
    for measure in (induced(n, k), bures(n)):
        first, *others = (
            measure.power_sum_moment((4, 3, 2), route=route)
            for route in ("schur", "loop", "alternant")
            if route in measure.routes
        )
        assert all(other == first for other in others)
        exponents = padded((3, 2, 1, 1), n)
        assert measure.moment(exponents) == measure.moment(exponents, route=measure.routes[-1])


def test_the_route_is_switched_and_never_hangs() -> None:
    many = tuple(range(9))  # 9! terms in the alternating sum
    assert hilbert_schmidt(9).default_route(many) == "schur"
    assert hilbert_schmidt(13).moment((1,) * 13) == hilbert_schmidt(13).moment((1,) * 13, route="schur")
    with pytest.raises(InputError, match="must have at most 2000000 terms"):
        hilbert_schmidt(11).moment(tuple(range(11)), route="alternant")
    with pytest.raises(InputError, match="partitions into 29 parts"):
        hilbert_schmidt(30).moment(tuple(range(30)))
    with pytest.raises(InputError, match="at most 12000 monomials"):
        hilbert_schmidt(6).moment((1, 0, 0, 0, 0, 0), route="expansion")
    with pytest.raises(InputError, match="loop equation must be at most 60"):
        orthogonal(2, 2).moment((61, 0), route="loop")
    with pytest.raises(InputError, match="at most 250 partitions"):
        orthogonal(20, 20).moment(padded((17,), 20))


@settings(max_examples=60, deadline=None)
@given(st.lists(st.integers(0, 5), min_size=2, max_size=5), st.integers(0, 4))
def test_induced_routes_agree_anywhere(exponents: list[int], extra: int) -> None:
    measure = induced(len(exponents), len(exponents) + extra)
    assert measure.moment(exponents, route="alternant") == measure.moment(exponents, route="schur")


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.integers(0, 4), min_size=2, max_size=4),
    st.fractions(Fraction(-6, 7), 3, max_denominator=7),
)
def test_bures_hall_routes_agree_anywhere(exponents: list[int], c: Fraction) -> None:
    measure = bures_hall(len(exponents), exponent=c)
    assert measure.moment(exponents, route="alternant") == measure.moment(exponents, route="cauchy")


@settings(max_examples=40, deadline=None)
@given(
    st.lists(st.integers(2, 4), min_size=1, max_size=3),
    st.fractions(Fraction(1, 3), 5, max_denominator=4),
    st.fractions(Fraction(-1, 2), 2, max_denominator=4),
    st.integers(2, 12),
)
def test_loop_equations_agree_with_jack_anywhere(parts: list[int], beta: Fraction, c: Fraction, n: int) -> None:
    measure = beta_ensemble(n, beta, c)
    assert measure.power_sum_moment(parts) == measure.power_sum_moment(parts, route="loop")


@settings(max_examples=40, deadline=None)
@given(st.lists(st.fractions(Fraction(1, 5), 4, max_denominator=5), min_size=2, max_size=6), st.data())
def test_dirichlet_power_sums_agree_with_monomials(alpha: list[Fraction], data: st.DataObject) -> None:
    parts = data.draw(st.lists(st.integers(1, 5), max_size=4))
    measure = dirichlet(alpha)
    assert measure.power_sum_moment(parts) == measure.power_sum_moment(parts, route="stick-breaking")


@settings(max_examples=40, deadline=None)
@given(st.sampled_from([*SPECTRA[:8], *BETAS[:4]]), st.integers(1, 5), st.integers(1, 5))
def test_log_convexity_of_power_sums(measure: Measure, j: int, k: int) -> None:
    cross = measure.power_sum_moment((j, k))
    assert cross**2 <= measure.power_sum_moment((j, j)) * measure.power_sum_moment((k, k))
