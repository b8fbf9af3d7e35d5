"""Solved rules: node counts against published marks, defining properties, and the effect of every option."""

import itertools
import math
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest
from mpmath import mp, mpf

import simplexcub as sc
from simplexcub.search import orbits as orbit_search
from simplexcub.search.conical import conical_count
from simplexcub.search.counts import node_count, possible_counts
from simplexcub.search.gauss import recurrence

# Fewest nodes of fully symmetric, positive, inside rules for the flat measure. From memory:
# Xiao & Gimbutas, Comput. Math. Appl. 59 (2010) 663; Witherden & Vincent, Comput. Math. Appl. 69 (2015) 1232.
FLAT = {3: [1, 3, 6, 6, 7, 12, 15, 16, 19, 25, 28, 33, 37, 42], 4: [1, 4, 8, 14, 14, 24, 35, 46]}
# Nothing is published for Hilbert–Schmidt; these are counts once reached by this package's authors.
HILBERT_SCHMIDT = {3: [1, 3, 6, 6, 9, 12, 15, 18, 21, 27, 30, 36, 39, 45], 4: [1, 4, 10, 16, 24, 31]}


def worst_relative_error(rule):
    """Largest relative error over all monomials of the rule's degree, in extended precision."""
    with mp.workdps(rule.digits + 20):
        nodes, weights = rule.exact_nodes(), rule.exact_weights()
        worst = mpf(0)
        for a in itertools.product(range(rule.degree + 1), repeat=rule.measure.N):
            if sum(a) != rule.degree:
                continue
            value = mp.fsum(
                w * mp.fprod(x**k for x, k in zip(p, a, strict=True)) for p, w in zip(nodes, weights, strict=False)
            )
            exact = rule.measure.moment(a)
            worst = max(worst, abs(value * exact.denominator / exact.numerator - 1))
    return worst


def assert_good(rule):
    assert worst_relative_error(rule) < mpf(10) ** (2 - rule.digits)
    assert (rule.weights > 0).all()
    assert (rule.nodes >= 0).all()
    assert np.allclose(rule.nodes.sum(axis=1), 1, atol=1e-15)


@pytest.mark.parametrize(
    ("build", "n", "degree", "mark"),
    [(sc.flat, n, t, m) for n, marks in FLAT.items() for t, m in enumerate(marks, 1) if t <= 16 - 2 * n or t in (14,)]
    + [
        (sc.hilbert_schmidt, n, t, m)
        for n, marks in HILBERT_SCHMIDT.items()
        for t, m in enumerate(marks, 1)
        if t <= 9 - n
    ],
)
def test_node_counts_reach_the_marks(build, n, degree, mark):
    rule = sc.solve(build(n), degree)
    assert len(rule) <= mark
    assert_good(rule)


@pytest.mark.parametrize("measure", [sc.induced(3, 5), sc.dirichlet(["1/2"] * 3), sc.dirichlet([3, 3, 3, 3])], ids=str)
def test_other_symmetric_measures(measure):
    rule = sc.solve(measure, 5)
    assert rule.provenance.method == "orbit search"
    assert_good(rule)


def test_node_set_is_invariant_and_orbits_expand_to_it():
    rule = sc.solve(sc.flat(4), 5)
    listed = set(zip(rule.node_decimals, rule.weight_decimals, strict=True))
    for order in itertools.permutations(range(4)):
        assert {(tuple(p[i] for i in order), w) for p, w in listed} == listed
    for orbit in rule.orbits:
        node = tuple(v for v, m in zip(orbit.values, orbit.multiplicities, strict=True) for _ in range(m))
        size = math.factorial(4) // math.prod(math.factorial(m) for m in orbit.multiplicities)
        weight = dict(listed)[node]
        assert float(orbit.weight) == pytest.approx(size * float(weight), rel=1e-15)


def test_gauss_legendre_values():
    # Abramowitz & Stegun, table 25.4, n = 3 and n = 5, moved from [−1, 1] to [0, 1].
    three = sc.solve(sc.flat(2), 5)
    assert np.allclose(
        sorted(three.nodes[:, 0]), [(1 - 0.774596669241483) / 2, 0.5, (1 + 0.774596669241483) / 2], atol=1e-15
    )
    assert np.allclose(sorted(three.weights), [5 / 18, 5 / 18, 8 / 18], atol=1e-15)
    five = sc.solve(sc.flat(2), 9)
    assert np.allclose(
        sorted(five.nodes[:, 0])[3:], [(1 + 0.538469310105683) / 2, (1 + 0.906179845938664) / 2], atol=1e-15
    )
    assert np.allclose(
        sorted(five.weights)[::2], [0.236926885056189 / 2, 0.478628670499366 / 2, 0.568888888888889 / 2], atol=1e-15
    )


@pytest.mark.parametrize("measure", [sc.hilbert_schmidt(2), sc.induced(2, 5), sc.dirichlet(["1/2", "7/3"])], ids=str)
@pytest.mark.parametrize("degree", [1, 4, 21])
def test_gauss_rules_of_other_measures(measure, degree):
    rule = sc.solve(measure, degree, digits=30)
    assert rule.degree == degree + 1 - degree % 2
    assert len(rule) == rule.degree // 2 + 1
    assert_good(rule)


def test_recurrence_of_legendre_polynomials():
    # Monic Legendre polynomials on [0, 1]: b_k = k² / (4 (4k² − 1)). Abramowitz & Stegun 22.7.
    from fractions import Fraction

    a, b = recurrence(lambda k: Fraction(1, k + 1), 6)
    assert a == [Fraction(1, 2)] * 6
    assert b[1:] == [Fraction(k * k, 4 * (4 * k * k - 1)) for k in range(1, 6)]


@pytest.mark.parametrize("measure", [sc.dirichlet([1, 2, "1/2"]), sc.dirichlet(["5/2", 1, 1, 3])], ids=str)
def test_unequal_parameters_get_the_conical_product(measure):
    rule = sc.solve(measure, 4)
    assert rule.provenance.method == "conical product"
    assert rule.symmetry == "none"
    assert len(rule) == conical_count(measure, 4)
    assert_good(rule)


def test_no_symmetry_asked_gives_the_conical_product():
    rule = sc.solve(sc.hilbert_schmidt(3), 4, symmetry="none")
    assert rule.provenance.method == "conical product"
    assert_good(rule)


def test_spent_budget_gives_the_conical_product():
    rule = sc.solve(sc.flat(3), 6, budget=1e-9)
    assert rule.provenance.method == "conical product"
    assert len(rule) == 16
    assert_good(rule)


def test_too_large_a_product_is_refused():
    with pytest.raises(sc.NothingFound, match="would need"):
        sc.solve(sc.hilbert_schmidt(6), 12, symmetry="none")


def test_same_seed_same_rule_whatever_the_number_of_workers():
    measure, budget = sc.hilbert_schmidt(3), orbit_search.Budget(60)
    options = {"digits": 30, "seed": 3, "budget": budget, "most_nodes": 40, "progress": None}
    alone = orbit_search.find_orbits(measure, 8, executor=None, **options)
    with ThreadPoolExecutor(3) as pool:
        assert orbit_search.find_orbits(measure, 8, executor=pool, **options) == alone


def test_processes_find_the_same_rule():
    alone, together = (sc.solve(sc.hilbert_schmidt(3), 6, jobs=jobs, digits=20) for jobs in (1, 2))
    assert together == alone


def test_another_seed_takes_other_starts():
    # Degree 3 on the triangle leaves one unknown free, so other starts end at other rules.
    one, two = (sc.solve(sc.flat(3), 3, seed=seed) for seed in (0, 1))
    assert one.node_decimals != two.node_decimals


def test_digits_are_those_asked_for():
    for digits in (5, 16, 80):
        rule = sc.solve(sc.flat(3), 4, digits=digits)
        assert {len(w.lstrip("0.")) for w in rule.weight_decimals} <= {digits, digits - 1}
        assert_good(rule)


def test_progress_is_reported():
    seen = []
    sc.solve(sc.flat(3), 4, progress=seen.append)
    assert seen
    assert all("nodes" in p.text and p.elapsed >= 0 for p in seen)


def test_interrupt_keeps_the_best_rule():
    def interrupt(progress):
        if "best so far" in progress.text:
            raise KeyboardInterrupt

    rule = sc.solve(sc.hilbert_schmidt(3), 10, progress=interrupt)
    assert rule.provenance.method == "orbit search"
    assert_good(rule)


def test_interrupt_before_anything_is_found_is_passed_on():
    def interrupt(_):
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        sc.solve(sc.flat(3), 6, progress=interrupt)


def test_counts_come_by_rising_nodes_and_meet_the_conditions():
    seen = list(possible_counts(3, 6, most_nodes=13))
    assert [node_count(c) for c in seen] == sorted(node_count(c) for c in seen)
    # (λ1−λ2)²(λ1−λ3)²(λ2−λ3)² has degree 6 and vanishes wherever two coordinates agree: a generic orbit is needed.
    assert all(dict(c).get((1, 1, 1), 0) >= 1 for c in seen)
    assert (((2, 1), 2), ((1, 1, 1), 1)) in seen


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"degree": 0}, "degree must be an integer of at least 1; got 0"),
        ({"degree": 2.5}, "degree"),
        ({"digits": 3}, "digits"),
        ({"seed": -1}, "seed"),
        ({"budget": 0}, "budget"),
        ({"budget": math.nan}, "budget"),
        ({"jobs": 0}, "jobs"),
        ({"space": "round"}, "space must be one of all"),
        ({"symmetry": "some"}, "symmetry must be one of full, none"),
    ],
)
def test_bad_options(options, words):
    with pytest.raises(sc.InputError, match=words):
        sc.solve(sc.flat(3), **{"degree": 3, **options})
