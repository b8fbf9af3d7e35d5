"""Rules for functions of the spectrum: symmetric and ordered, against theorems and other formulas."""

from concurrent.futures import ThreadPoolExecutor
from fractions import Fraction
from itertools import permutations

import numpy as np
import pytest

import simplexcub as sc
from simplexcub.decimals import to_decimal
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Chamber, bures, dirichlet, flat, hilbert_schmidt, induced, ordered
from simplexcub.measures.chamber import spectrum
from simplexcub.moments.schur import schur_power_sum
from simplexcub.rule import Provenance, Rule
from simplexcub.search import patterns, solve
from simplexcub.search.patterns import density_shares, structures
from simplexcub.verify import lower_bound, prove, verify

BY_HAND = Provenance("", 0, "", "by hand")


def by_hand(measure, degree, nodes, weights, space, digits=30):
    def text(x):
        return to_decimal(Fraction(x), digits)

    listed = tuple(tuple(text(x) for x in node) for node in nodes)
    symmetry = "full" if space == "symmetric" else "none"
    return Rule(measure, degree, listed, tuple(map(text, weights)), BY_HAND, space, symmetry, digits=digits)


def test_hilbert_schmidt_vertices_and_centre():
    # Weights 2/5 and 3/5 follow from E[Σλ²] = 3/5 (common practice, no source).
    third = Fraction(1, 3)
    rule = by_hand(hilbert_schmidt(3), 2, [(1, 0, 0), (third,) * 3], [Fraction(2, 5), Fraction(3, 5)], "symmetric")
    report = verify(rule, prove=True)
    assert report.holds
    assert report.proof.holds
    assert not verify(rule, measure=bures(3)).holds


@pytest.mark.parametrize(
    ("measure", "degree"),
    [(hilbert_schmidt(3), 6), (flat(3), 6), (bures(4), 4), (dirichlet([1, 2, 3]), 4), (induced(7, 9), 6)],
    ids=str,
)
def test_symmetric_rules_have_as_few_representatives_as_can_be(measure, degree):
    rule = solve(measure, degree, space="symmetric", digits=20, budget=20)
    assert len(rule) == lower_bound(measure, degree, "symmetric")
    assert (rule.space, rule.symmetry, rule.provenance.method) == ("symmetric", "full", "orbit search")
    assert np.all(np.diff(rule.nodes, axis=1) <= 0)
    report = verify(rule, prove=True)
    assert report.holds
    assert report.verification.positive
    assert report.proof.holds


def test_permuted_representatives_average_every_polynomial():
    rule = solve(hilbert_schmidt(3), 6, space="symmetric", digits=30)
    nodes = [node for x in rule.node_decimals for node in permutations(x)]
    weights = [to_decimal(Fraction(w) / 6, 30) for w in rule.weight_decimals for _ in range(6)]
    full = Rule(rule.measure, 0, tuple(nodes), tuple(weights), BY_HAND, space="all", digits=30)
    assert verify(full).exact_degree >= 6


def test_sixteen_eigenvalues():
    rule = solve(hilbert_schmidt(16), 6, space="symmetric", digits=20)
    assert len(rule) == 3
    for parts in [(2,), (3,), (2, 2), (4,), (3, 2), (5,), (2, 2, 2), (4, 2), (3, 3), (6,)]:
        found = rule.average(lambda x, parts=parts: np.prod([(x**k).sum(axis=1) for k in parts], axis=0))
        assert found == pytest.approx(float(schur_power_sum(tuple(parts), 16, 16)), rel=1e-12)
    assert rule.average(lambda x: (x**7).sum(axis=1)) != pytest.approx(float(schur_power_sum((7,), 16, 16)), rel=1e-12)


@pytest.mark.parametrize("measure", [hilbert_schmidt(2), flat(2), bures(2), dirichlet(["1/2", 3])], ids=str)
def test_two_components_are_a_gauss_rule_in_the_square_of_the_difference(measure):
    rule = solve(measure, 5, space="symmetric", digits=20)
    assert (rule.degree, len(rule)) == (7, 2)
    report = verify(rule, prove=True)
    assert report.holds
    assert report.exact_degree == 7
    assert report.proof.holds


def test_one_representative_of_two_eigenvalues():
    # Density 3 (2p − 1)² on [0, 1]: E[(λ1 − λ2)²] = 3/5, so the one node is (1 ± √(3/5))/2.
    (node,) = solve(hilbert_schmidt(2), 2, space="symmetric").nodes
    assert node == pytest.approx([(1 + np.sqrt(0.6)) / 2, (1 - np.sqrt(0.6)) / 2], abs=1e-15)


def test_the_search_is_reproducible_and_seeded():
    first, same, other = (solve(hilbert_schmidt(8), 6, space="symmetric", digits=20, seed=s) for s in (0, 0, 1))
    assert first == same
    assert first.node_decimals != other.node_decimals
    with ThreadPoolExecutor(2) as pool:
        elsewhere = solve(hilbert_schmidt(8), 6, space="symmetric", digits=20, executor=pool, jobs=2)
    assert elsewhere == first


def test_without_time_the_product_rule_is_folded():
    rule = solve(flat(3), 4, space="symmetric", digits=20, budget=1e-9)
    whole = sc.solve(flat(3), 4, digits=20, budget=1e-9)
    assert rule.provenance.method == "conical product"
    assert len(rule) <= len(whole)
    assert np.all(np.diff(rule.nodes, axis=1) <= 0)
    assert verify(rule).holds
    for measure, space in ((bures(3), "symmetric"), (hilbert_schmidt(40), "symmetric"), (flat(3), "ordered")):
        with pytest.raises(NothingFound):
            solve(measure, 6, space=space, budget=1e-9)


def test_patterns_are_the_multiplicities_of_the_density():
    # The mean density of a flat 2-component spectrum is uniform: Gauss–Legendre weights 5/18, 8/18, 5/18.
    assert density_shares(flat(2), 2) == pytest.approx([0.5, 0.5])
    assert density_shares(flat(5), 3).sum() == pytest.approx(1)
    measure = hilbert_schmidt(20)
    for number in (0, 1, 2):
        found = list(structures(measure, 11, 3, number, number + 1))
        assert all(sum(t.multiplicities) == 20 and min(t.multiplicities) >= 1 for _, c in found for t, _ in c)
        assert all(sum(count for _, count in c) == 3 for _, c in found)
        assert all(sum(count * t.unknowns for t, count in c) >= 11 for _, c in found)
        assert found == list(structures(measure, 11, 3, number, number + 1))
    assert all(len(c) == 1 for _, c in structures(measure, 11, 3, 0, 1))
    assert any(len(c) > 1 for _, c in structures(measure, 11, 3, 1, 2))


# Order statistics of a stick broken at random: mean of the k-th longest of N pieces is (1/N) Σ_{j ≥ k} 1/j
# (H. A. David, H. N. Nagaraja, Order Statistics, 2003, section 6.4).
def test_the_ordered_pieces_of_a_broken_stick():
    rule = solve(flat(3), 3, space="ordered", digits=30)
    assert rule.measure == flat(3)
    assert rule.average(lambda x: x) == pytest.approx([11 / 18, 5 / 18, 2 / 18], abs=1e-14)
    assert verify(rule, prove=True).proof.holds


def test_the_mean_of_the_largest_eigenvalue():
    rule = solve(hilbert_schmidt(3), 3, space="ordered", digits=30)
    exact = ordered(hilbert_schmidt(3))
    assert rule.average(lambda x: x[:, 0]) == pytest.approx(313 / 432, abs=1e-14)
    gap = exact.moment((2, 0, 0)) - 2 * exact.moment((1, 1, 0)) + exact.moment((0, 2, 0))
    assert rule.average(lambda x: (x[:, 0] - x[:, 1]) ** 2) == pytest.approx(float(gap), abs=1e-14)
    report = verify(rule, prove=True)
    assert report.holds
    assert report.proof.holds
    assert len(rule) >= report.verification.lower_bound == 4


@pytest.mark.parametrize("measure", [flat(2), dirichlet([2, 2]), hilbert_schmidt(2), induced(2, 5)], ids=str)
def test_ordered_pairs_are_a_gauss_rule_on_the_chamber(measure):
    rule = solve(measure, 4, space="ordered", digits=20, symmetry="none")
    assert (rule.degree, len(rule), rule.space) == (5, 3, "ordered")
    assert verify(rule, prove=True).proof.holds


def test_edge_midpoints_on_the_walls_of_the_chamber():
    # The ordered flat measure is flat on its chamber; the midpoints of the edges of a triangle average degree 2 (Hammer
    # & Stroud 1956, from memory). The third lies on the wall λ1 = λ2.
    half, fourth = Fraction(1, 2), Fraction(1, 4)
    nodes = [(3 * fourth, fourth, 0), (half + Fraction(1, 6), Fraction(1, 6), Fraction(1, 6))]
    nodes += [(Fraction(5, 12), Fraction(5, 12), Fraction(1, 6))]
    rule = by_hand(flat(3), 2, nodes, [Fraction(1, 3)] * 3, "ordered")
    zero = Fraction(0)
    middles = [half, half, zero], [half, zero, half], [zero, half, half]
    assert [spectrum(b) for b in middles] == [list(x) for x in nodes]
    report = verify(rule, prove=True)
    assert report.holds
    assert (report.exact_degree, report.proof.holds) == (2, True)


def test_a_node_out_of_order_is_refused():
    half = Fraction(1, 2)
    right = by_hand(flat(2), 1, [(1, 0), (half, half)], [half, half], "ordered")
    assert verify(right, prove=True).proof.holds
    wrong = by_hand(flat(2), 1, [(0, 1), (half, half)], [half, half], "ordered")
    report = verify(wrong, prove=True)
    assert not report.holds
    assert "node 1 is an ordered spectrum, but its coordinates are not in descending order" in report.reasons
    assert not report.proof.holds


def test_a_rule_for_unordered_polynomials_is_none_for_ordered_ones():
    rule = solve(flat(2), 3, space="symmetric")
    as_ordered = Rule(rule.measure, 3, rule.node_decimals, rule.weight_decimals, BY_HAND, "ordered", "none")
    assert not verify(as_ordered).holds
    assert not prove(as_ordered).holds


def test_the_chamber_as_a_measure():
    chamber = Chamber(ordered(hilbert_schmidt(3)))
    points = chamber.sample(np.random.default_rng(7), 20_000)
    assert points.min() >= 0
    assert points.sum(axis=1) == pytest.approx(np.ones(20_000))
    for a in ((1, 0, 0), (0, 1, 1), (0, 0, 2)):
        assert float(chamber.moment(a)) == pytest.approx((points ** np.array(a)).prod(axis=1).mean(), rel=0.03)
    # λ1 = Σ b_k/k, by the nested integral, which shares no formula with the chamber's.
    mean = sum((chamber.moment(tuple(int(i == k) for i in range(3))) / (k + 1) for k in range(3)), Fraction(0))
    assert mean == ordered(hilbert_schmidt(3)).moment((1, 0, 0), route="nested")


def test_what_the_spaces_refuse():
    with pytest.raises(InputError, match=r"ordered moments .* got bures\(N=3\)\. .* no exact moments .* symmetric"):
        solve(bures(3), 4, space="ordered")
    with pytest.raises(InputError, match="rules of space symmetric must be left their own symmetry; got cyclic"):
        solve(flat(3), 4, space="symmetric", symmetry="cyclic")
    with pytest.raises(InputError, match="rules of space ordered must be left their own symmetry; got cyclic"):
        solve(flat(3), 4, space="ordered", symmetry="cyclic")
    with pytest.raises(InputError, match="space must be one of all, symmetric, ordered; got some"):
        solve(flat(3), 4, space="some")


def test_where_no_structure_is_solved_walks_go_down_from_least_squares(monkeypatch):
    monkeypatch.setattr(patterns, "structures", lambda *_: iter(()))
    rule = solve(bures(3), 6, space="symmetric", digits=20)
    assert rule.provenance.method == "orbit search"
    assert len(rule) == 3
    assert verify(rule).holds
