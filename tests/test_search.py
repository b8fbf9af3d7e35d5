"""Solved rules: node counts against published marks, defining properties, and the effect of every option."""

import itertools
import math
import time

import numpy as np
import pytest
from mpmath import mp, mpf

import simplexcub as sc
from simplexcub.search import driver
from simplexcub.search.conical import conical_count
from simplexcub.search.counts import node_count
from simplexcub.search.driver import Budget, Search
from simplexcub.search.gauss import recurrence
from simplexcub.search.symmetries import within_reach
from simplexcub.search.system import Problem
from simplexcub.search.workers import Workers
from simplexcub.symmetry import named_group

# Fewest nodes of fully symmetric, positive, inside rules for the flat measure. From memory:
# Xiao & Gimbutas, Comput. Math. Appl. 59 (2010) 663; Witherden & Vincent, Comput. Math. Appl. 69 (2015) 1232.
FLAT = {3: [1, 3, 6, 6, 7, 12, 15, 16, 19, 25, 28, 33], 4: [1, 4, 8, 14, 14, 24, 35, 46]}
# The same without a demand on symmetry. N = 4, from memory: Jaśkowiec & Sukumar, Int. J. Numer. Methods Eng. 121
# (2020) 2418. N = 3, degree 7: K. Gatermann, Computing 40 (1988) 229, from memory. The other counts for N = 3 have been
# reached by this package's authors and are no published figures.
FLAT_ANY = {(4, 3): 6, (3, 3): 4, (3, 6): 11, (3, 7): 12}
# Nothing is published for Hilbert–Schmidt; these are counts once reached by this package's authors.
HILBERT_SCHMIDT = {3: [1, 3, 6, 6, 9, 12, 15, 18, 21], 4: [1, 4, 10, 16, 24]}
HILBERT_SCHMIDT_ANY = {3: 4, 4: 6, 5: 8, 6: 10}


@pytest.fixture(autouse=True)
def one_walk_at_a_time(monkeypatch):
    monkeypatch.setattr(driver, "ABREAST", 1)  # the first results are there sooner


def search(measure, degree, mark, **options):
    """Solve, and interrupt as soon as a rule of `mark` nodes is there: the rule so far is kept."""

    def enough(progress):
        words = progress.text.split()
        if words[:3] == ["best", "so", "far"] and int(words[3]) <= mark:
            raise KeyboardInterrupt

    return sc.solve(measure, degree, progress=enough, **{"budget": 600.0, **options})


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
    assert rule.provenance.method == "orbit search"


def assert_invariant(rule):
    listed = set(zip(rule.node_decimals, rule.weight_decimals, strict=True))
    assert len(listed) == len(rule)
    for g in named_group(rule.symmetry, rule.measure.N, getattr(rule.measure, "alpha", ())).generators:
        assert {(tuple(p[i] for i in g), w) for p, w in listed} == listed


@pytest.mark.parametrize(
    ("build", "n", "degree", "mark"),
    [(sc.flat, n, t, m) for n, marks in FLAT.items() for t, m in enumerate(marks, 1) if t <= 18 - 3 * n]
    + [(sc.hilbert_schmidt, n, t, m) for n, marks in HILBERT_SCHMIDT.items() for t, m in enumerate(marks, 1)],
)
def test_node_counts_reach_the_marks(build, n, degree, mark):
    rule = search(build(n), degree, mark, digits=30)
    assert len(rule) <= mark
    assert rule.symmetry == "full"
    assert_good(rule)


@pytest.mark.parametrize(
    ("measure", "degree", "mark", "symmetry"),
    [
        (sc.flat(3), 3, FLAT_ANY[3, 3], "none"),
        (sc.flat(3), 6, FLAT_ANY[3, 6], "none"),
        (sc.flat(3), 7, FLAT_ANY[3, 7], "best"),
        (sc.flat(4), 3, FLAT_ANY[4, 3], "none"),
        *((sc.hilbert_schmidt(3), t, mark, "none") for t, mark in HILBERT_SCHMIDT_ANY.items()),
    ],
    ids=str,
)
def test_fewer_symmetries_need_fewer_nodes(measure, degree, mark, symmetry):
    rule = search(measure, degree, mark, symmetry=symmetry, digits=30)
    assert len(rule) <= mark
    assert_good(rule)
    assert_invariant(rule)


@pytest.mark.parametrize(
    ("n", "symmetry"),
    [
        (3, "alternating"),
        (3, "cyclic"),
        (3, "dihedral"),
        (3, "stabiliser"),
        (3, "product-1-2"),
        (3, "alpha"),
        (4, "klein"),
        (4, "product-2-2"),
        (4, "alternating"),
    ],
)
def test_every_symmetry_gives_a_rule_that_has_it(n, symmetry):
    rule = search(sc.flat(n), 7 - n, 50, symmetry=symmetry, digits=20)
    assert rule.symmetry == symmetry
    assert not rule.orbits
    assert_good(rule)
    assert_invariant(rule)


@pytest.mark.parametrize("measure", [sc.induced(3, 5), sc.dirichlet(["1/2"] * 3), sc.dirichlet([3, 3, 3, 3])], ids=str)
def test_other_symmetric_measures(measure):
    rule = search(measure, 5, 24)
    assert_good(rule)
    assert_invariant(rule)


@pytest.mark.parametrize(
    ("measure", "symmetry"),
    [
        (sc.dirichlet([1, 2, "1/2"]), "none"),
        (sc.dirichlet([1, 2, "1/2"]), "best"),
        (sc.dirichlet([1, 2, 2]), "alpha"),
        (sc.dirichlet([1, 2, 2]), "full"),
    ],
    ids=str,
)
def test_unequal_parameters_need_fewer_nodes_than_the_conical_product(measure, symmetry):
    bound = math.comb(2 + measure.N - 1, 2)  # dim P_2: no rule of degree 4 has fewer nodes
    rule = search(measure, 4, bound, symmetry=symmetry, digits=20)
    assert len(rule) == bound < conical_count(measure, 4)
    assert rule.symmetry in {"none": ["none"], "best": ["alpha", "none"]}.get(symmetry, ["alpha"])
    assert_good(rule)
    assert_invariant(rule)


def test_node_set_is_invariant_and_orbits_expand_to_it():
    rule = search(sc.flat(4), 5, 14)
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
    assert worst_relative_error(rule) < mpf(10) ** -28


def test_recurrence_of_legendre_polynomials():
    # Monic Legendre polynomials on [0, 1]: b_k = k² / (4 (4k² − 1)). Abramowitz & Stegun 22.7.
    from fractions import Fraction

    a, b = recurrence(lambda k: Fraction(1, k + 1), 6)
    assert a == [Fraction(1, 2)] * 6
    assert b[1:] == [Fraction(k * k, 4 * (4 * k * k - 1)) for k in range(1, 6)]


@pytest.mark.parametrize(
    ("measure", "symmetry"), [(sc.flat(3), "full"), (sc.hilbert_schmidt(3), "none"), (sc.dirichlet([1, 2, 3]), "best")]
)
def test_spent_budget_gives_the_conical_product(measure, symmetry):
    rule = sc.solve(measure, 6, budget=1e-9, symmetry=symmetry)
    assert rule.provenance.method == "conical product"
    assert rule.symmetry == "none"
    assert len(rule) <= conical_count(measure, 6) == (49 if measure == sc.hilbert_schmidt(3) else 16)
    assert worst_relative_error(rule) < mpf(10) ** -48
    assert (rule.weights > 0).all()
    assert (rule.nodes >= 0).all()


def test_too_large_a_product_is_refused():
    with pytest.raises(sc.NothingFound, match="would need"):
        sc.solve(sc.hilbert_schmidt(5), 20, budget=1e-9)


def test_another_seed_takes_other_starts():
    # Degree 3 on the triangle leaves one unknown free, so other starts end at other rules.
    one, two, again = (search(sc.flat(3), 3, 6, seed=seed) for seed in (0, 1, 0))
    assert one.node_decimals != two.node_decimals
    assert one.node_decimals == again.node_decimals


def test_digits_are_those_asked_for():
    for digits in (5, 16, 80):
        rule = search(sc.flat(3), 4, 6, digits=digits)
        assert {len(w.lstrip("0.")) for w in rule.weight_decimals} <= {digits, digits - 1}
        assert_good(rule)


def test_progress_tells_best_count_and_rate():
    seen = []
    sc.solve(sc.flat(3), 7, progress=seen.append)
    assert all("nodes" in p.text and p.text.endswith(" tasks/s") for p in seen)
    assert [p.elapsed for p in seen] == sorted(p.elapsed for p in seen)
    assert seen[0].text.startswith("no rule yet")
    assert seen[-1].text.startswith("best so far 15 nodes")


def test_budget_ends_the_search():
    start = time.monotonic()
    rule = sc.solve(sc.flat(3), 8, budget=2.0, symmetry="none", digits=5)
    assert 1.0 < time.monotonic() - start < 20.0
    assert len(rule) < conical_count(sc.flat(3), 8) == 25


def test_interrupt_keeps_the_best_rule():
    rule = search(sc.hilbert_schmidt(3), 10, 10**6)
    assert_good(rule)


def test_interrupt_before_anything_is_found_is_passed_on():
    def interrupt(_):
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        sc.solve(sc.flat(3), 6, progress=interrupt)


def test_a_search_takes_only_rules_within_its_limit_of_nodes():
    problem = Problem(sc.flat(3), 4, named_group("full", 3))
    options = {"digits": 20, "seed": 0, "workers": Workers()}
    found = Search(problem, budget=Budget(60), most_nodes=6, **options)
    found.run()
    assert found.best is not None
    assert found.best.nodes == node_count(found.best.counts) == 6
    none = Search(problem, budget=Budget(2), most_nodes=5, **options)
    none.run()
    assert none.best is None


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
        ({"symmetry": "some"}, "symmetry must be one of full, .*, none; got some"),
        ({"symmetry": "klein"}, "symmetry klein needs N = 4; got 3"),
        ({"digits": 1001}, "digits must be at most 1000; got 1001"),
        ({"degree": 501}, "degree must be at most 500; got 501"),
        ({"symmetry": "product-2-2"}, "block sizes of a product must be positive and sum to N = 3; got product-2-2"),
        ({"symmetry": "product-3-0"}, "block sizes"),
        ({"symmetry": "product-a"}, "block sizes"),
    ],
)
def test_bad_options(options, words):
    with pytest.raises(sc.InputError, match=words):
        sc.solve(sc.flat(3), **{"degree": 3, **options})


@pytest.mark.parametrize("symmetry", ["cyclic", "stabiliser", "product-2-1"])
def test_a_symmetry_that_the_measure_lacks_is_refused(symmetry):
    with pytest.raises(sc.InputError, match=r"symmetry must leave .* unchanged"):
        sc.solve(sc.dirichlet([1, 2, 3]), 3, symmetry=symmetry)


def test_what_is_out_of_reach_is_not_searched_for():
    assert within_reach(named_group("full", 3), 70)
    assert not within_reach(named_group("full", 3), 90)
    assert not within_reach(named_group("none", 3), 150)
