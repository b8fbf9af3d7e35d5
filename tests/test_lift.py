"""Means over density matrices against exact moments of the Bloch ball, and unitary designs against known degrees."""

from __future__ import annotations

import math
from fractions import Fraction
from itertools import product

import numpy as np
import pytest

import simplexcub as sc
from simplexcub.average.unitaries import clifford_group, design_degree, frame_potential, group_potential
from simplexcub.errors import InputError
from simplexcub.measures import Measure

PAULI = np.array([[[0, 1], [1, 0]], [[0, -1j], [1j, 0]], [[1, 0], [0, -1]]])


def odd_factorial(n: int) -> int:
    return math.prod(range(n, 0, -2))


def bloch_moment(measure: Measure, exponents: tuple[int, int, int]) -> Fraction:
    """E[x^a y^b z^c] of the Bloch vector: E[r^m] E over the sphere, r = |λ_1 − λ_2|, directions uniform.

    The sphere's mean of x^a y^b z^c is (a−1)!! (b−1)!! (c−1)!!/(a+b+c+1)!! for even exponents, 0 otherwise (Folland,
    Amer. Math. Monthly 108 (2001) 446; from memory).
    """
    m = sum(exponents)
    if any(a % 2 for a in exponents):
        return Fraction(0)
    sphere = Fraction(math.prod(odd_factorial(a - 1) for a in exponents), odd_factorial(m + 1))
    radial = sum((math.comb(m, k) * (-1) ** k * measure.moment((m - k, k)) for k in range(m + 1)), Fraction(0))
    return radial * sphere


def lifted_moment(states: sc.average.StateRule, exponents: tuple[int, int, int]) -> complex:
    def f(rho: np.ndarray) -> np.ndarray:
        bloch = np.einsum("sij,pji->sp", rho, PAULI)
        return np.prod(bloch ** np.array(exponents), axis=1)

    return complex(states.average(f))


def monomials(degree: int) -> list[tuple[int, int, int]]:
    return [(a, b, c) for a, b, c in product(range(degree + 1), repeat=3) if a + b + c == degree]


@pytest.mark.parametrize("measure", [sc.hilbert_schmidt(2), sc.bures(2), sc.induced(2, 5)], ids=str)
def test_the_clifford_group_averages_the_bloch_ball_exactly_to_its_degree_and_no_further(measure: Measure) -> None:
    states = sc.lift(sc.solve(measure, degree=7), "clifford")
    assert (states.degree, states.design) == (3, 3)
    for degree in range(4):
        for exponents in monomials(degree):
            assert lifted_moment(states, exponents) == pytest.approx(float(bloch_moment(measure, exponents)), abs=1e-14)
    fails = [abs(lifted_moment(states, e) - float(bloch_moment(measure, e))) for e in monomials(4)]
    assert max(fails) > 1e-3


def test_the_hilbert_schmidt_ball_is_uniform() -> None:
    """E[r²] = 3/5 in a uniform ball, so E[x²] = 1/5."""
    assert bloch_moment(sc.hilbert_schmidt(2), (2, 0, 0)) == Fraction(1, 5)


def test_a_rule_of_lower_degree_limits_the_states() -> None:
    states = sc.lift(sc.solve(sc.bures(2), degree=1), "clifford")
    assert (states.degree, states.design) == (1, 3)
    fails = abs(lifted_moment(states, (2, 0, 0)) - float(bloch_moment(sc.bures(2), (2, 0, 0))))
    assert fails > 1e-2


def test_equal_states_are_merged_and_weights_sum_to_one() -> None:
    rule = sc.solve(sc.hilbert_schmidt(2), degree=5)  # nodes p, 1/2, 1 − p
    states = sc.lift(rule, "clifford")
    assert len(states) == 7  # six directions and the centre
    assert states.weights.sum() == pytest.approx(1, rel=1e-14)
    np.testing.assert_allclose(np.trace(states.states, axis1=1, axis2=2), 1, rtol=1e-14)
    assert np.linalg.eigvalsh(states.states).min() > -1e-15
    assert not states.states.flags.writeable
    assert not states.weights.flags.writeable


def test_random_states_agree_with_a_lifted_rule_on_a_quadratic_form() -> None:
    """10^5 seeded Ginibre states; five standard errors."""
    rng = np.random.default_rng(5)
    g = rng.standard_normal((100_000, 2, 2)) + 1j * rng.standard_normal((100_000, 2, 2))
    rho = g @ g.conj().transpose(0, 2, 1)
    rho /= np.trace(rho, axis1=1, axis2=2)[:, None, None]
    sampled = np.abs(rho[:, 0, 1]) ** 2 * rho[:, 0, 0].real
    states = sc.lift(sc.load(sc.hilbert_schmidt(2), degree=3), "clifford")
    found = states.average(lambda r: np.abs(r[:, 0, 1]) ** 2 * r[:, 0, 0].real)
    assert abs(found - sampled.mean()) <= 5 * sampled.std() / math.sqrt(len(sampled))


def test_the_clifford_group_is_one_and_is_a_three_design() -> None:
    group = clifford_group()
    assert len(group) == 24
    overlaps = np.abs(np.einsum("aij,bij->ab", group.conj(), np.einsum("ij,bjk->bik", group[5], group)))
    assert np.all((overlaps > 2 - 1e-9).sum(axis=0) == 1)  # closed under products, up to phase
    assert design_degree(group) == 3
    # frame potentials of the whole unitary group at N = 2 are Catalan numbers; Clifford departs at t = 4 with 15
    assert [round(frame_potential(group, t), 9) for t in (1, 2, 3, 4)] == [1, 2, 5, 15]


def test_group_potentials_count_permutations_without_long_rising_runs() -> None:
    """t! for t ≤ N; otherwise the permutations of t without a rising subsequence longer than N (Rains 1998)."""
    assert [group_potential(5, t) for t in range(1, 6)] == [1, 2, 6, 24, 120]
    assert [group_potential(3, t) for t in (4, 5)] == [23, 103]


def test_paulis_and_single_matrices_are_designs_of_their_known_degrees() -> None:
    paulis = np.concatenate([np.eye(2)[None], PAULI])
    assert design_degree(paulis.astype(complex)) == 1
    assert design_degree(np.eye(3, dtype=complex)[None]) == 0
    assert sc.lift(sc.solve(sc.flat(2), degree=3), paulis).degree == 1


def test_qutrit_states_from_the_generalised_paulis_have_degree_one() -> None:
    """The nine products X^a Z^b at N = 3 are a 1-design, so every mean of an entry of ρ is 1/3 or 0."""
    shift, clock = np.roll(np.eye(3), 1, axis=0), np.diag(np.exp(2j * np.pi * np.arange(3) / 3))
    power = np.linalg.matrix_power
    paulis = np.array([power(shift, a) @ power(clock, b) for a in range(3) for b in range(3)])
    states = sc.lift(sc.load(sc.hilbert_schmidt(3), degree=4), paulis)
    assert states.degree == 1
    np.testing.assert_allclose(states.average(lambda rho: rho), np.eye(3) / 3, atol=1e-15)


@pytest.mark.parametrize(
    ("n", "unitaries", "part"),
    [
        (2, "pauli", "an array or 'clifford'"),
        (3, "clifford", "must meet N = 2"),
        (2, np.eye(3)[None], r"shape \(U, 2, 2\)"),
        (2, np.eye(2), r"shape \(U, 2, 2\)"),
        (2, np.empty((0, 2, 2)), r"shape \(U, 2, 2\)"),
        (2, 2 * np.eye(2)[None], "must be unitary"),
        (2, np.full((1, 2, 2), np.nan), "must be unitary"),
        (2, [["a"]], "must be numbers"),
        (2, np.broadcast_to(np.eye(2), (20_001, 2, 2)), "at most 20000 unitaries"),
    ],
)
def test_unusable_unitaries_are_refused(n: int, unitaries: object, part: str) -> None:
    rule = sc.load(sc.hilbert_schmidt(n), degree=2)
    with pytest.raises(InputError, match=part):
        sc.lift(rule, unitaries)


def test_other_misuse_is_refused() -> None:
    with pytest.raises(InputError, match="rule must be a rule"):
        sc.lift("hs", "clifford")  # type: ignore[arg-type]
    with pytest.raises(InputError, match="measure must be symmetric"):
        sc.lift(sc.solve(sc.dirichlet([1, 2]), degree=2), "clifford")
    states = sc.lift(sc.load(sc.hilbert_schmidt(2), degree=3), "clifford")
    with pytest.raises(InputError, match="one value per state, first axis 6"):
        states.average(lambda rho: 1.0)
