"""Rules with chosen nodes: published ones come out, the nodes are there under every symmetry, weights are positive."""

from __future__ import annotations

from fractions import Fraction
from itertools import combinations, permutations
from pathlib import Path

import numpy as np
import pytest
from conftest import Call

import simplexcub as sc
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure, bures, dirichlet, flat, hilbert_schmidt
from simplexcub.rule import Rule
from simplexcub.search.counts import possible_counts
from simplexcub.search.wish import Wish
from simplexcub.symmetry import named_group


def by_node(rule: Rule) -> dict[tuple[float, ...], float]:
    return {tuple(node): weight for node, weight in zip(rule.nodes.tolist(), rule.weights.tolist(), strict=True)}


def test_simpson() -> None:
    """Nodes 0, 1/2, 1 with weights 1/6, 4/6, 1/6, degree 3 (Simpson's rule)."""
    rule = sc.solve(flat(2), 3, include=["vertices", "centre"])
    assert by_node(rule) == pytest.approx({(0, 1): 1 / 6, (0.5, 0.5): 4 / 6, (1, 0): 1 / 6})
    proof = sc.verify(rule, prove=True).proof
    assert proof is not None
    assert proof.holds
    assert set(proof.weights) == {Fraction(1, 6), Fraction(2, 3)}


def test_hilbert_schmidt_of_degree_2() -> None:
    """Vertices 2/5 in all, centre 3/5 (common practice, no source; it follows from E[Σλ²] = 3/5, Lubkin 1978)."""
    rule = sc.solve(hilbert_schmidt(3), 2, include=["vertices", "centre"])
    assert sorted((orbit.multiplicities, round(float(orbit.weight), 12)) for orbit in rule.orbits) == [
        ((2, 1), 0.4),
        ((3,), 0.6),
    ]


@pytest.mark.parametrize("n", [4, 5])
def test_lobatto(n: int) -> None:
    """Both ends given, degree 2n − 3: interior nodes are the zeros of P′_{n−1}, weights 1/(n(n−1)) P_{n−1}^{−2}.

    M. Abramowitz, I. A. Stegun, 25.4.32, on [−1, 1] with weights that sum to 2.
    """
    legendre = np.polynomial.legendre.Legendre.basis(n - 1)
    inner = np.sort(legendre.deriv().roots())
    nodes = np.array([-1, *inner, 1])
    rule = sc.solve(flat(2), 2 * n - 3, include="vertices")
    order = np.argsort(rule.nodes[:, 0])
    np.testing.assert_allclose(rule.nodes[order, 0], (nodes + 1) / 2, atol=1e-14)
    np.testing.assert_allclose(rule.weights[order], 1 / (n * (n - 1) * legendre(nodes) ** 2), rtol=1e-13)


@pytest.mark.parametrize(
    ("measure", "degree", "include", "symmetry"),
    [
        (flat(3), 3, ("vertices", "centre"), "cyclic"),
        (flat(3), 3, ("vertices",), "none"),
        (bures(3), 5, ("edge-midpoints",), "full"),
        (hilbert_schmidt(4), 3, ("vertices", "edge-midpoints"), "full"),
        (dirichlet([1, 1, 2]), 3, ("vertices",), "full"),
        (flat(3), 3, ("vertices", "edge-midpoints"), "stabiliser"),
    ],
)
def test_the_nodes_are_there_with_positive_weights(
    measure: Measure, degree: int, include: tuple[str, ...], symmetry: str
) -> None:
    rule = sc.solve(measure, degree, include=include, symmetry=symmetry, budget=3)
    n = measure.N
    wanted = {
        "vertices": {tuple(float(i == k) for i in range(n)) for k in range(n)},
        "centre": {(1 / n,) * n},
        "edge-midpoints": {tuple(0.5 * (i in pair) for i in range(n)) for pair in combinations(range(n), 2)},
    }
    for name in include:
        assert wanted[name] <= by_node(rule).keys()
    report = sc.verify(rule, prove=True)
    assert report.holds, report.reasons
    assert report.verification.positive
    assert report.proof is not None
    assert report.proof.holds
    assert all(x in (0, 1) or 0 < x < 1 for node in report.proof.nodes for x in node)  # zeros stay zero
    assert ", ".join(include) in rule.provenance.method


def test_structures_count_the_chosen_nodes() -> None:
    group = named_group("full", 3)
    chosen = Wish(flat(3), 5, ("vertices", "centre")).problem(group).chosen
    assert possible_counts(group, 5, 3, chosen) == []
    for counts in possible_counts(group, 5, 10, chosen):
        assert sum(c * t.size for t, c in counts) == 10
        assert sum(t in chosen for t, _ in counts) == 2
        assert all(t in chosen or t.unknowns > 1 for t, _ in counts)  # no second centre


def test_edges_of_two_components_have_the_centre_as_their_midpoint() -> None:
    group = named_group("full", 2)
    (midpoint,) = Wish(flat(2), 3, ("edge-midpoints", "centre")).problem(group).chosen
    assert (midpoint.size, midpoint.coordinates) == (1, (Fraction(1, 2),))


@pytest.mark.parametrize("name", ["full", "cyclic", "dihedral", "klein", "stabiliser", "product-2-2", "none"])
def test_chosen_orbits_fill_the_sets_under_every_group(name: str) -> None:
    group = named_group(name, 4)
    found = Wish(flat(4), 3, ("vertices", "edge-midpoints")).problem(group).chosen
    nodes = [tuple(o.coordinates[label] for label in p) for o in found for p in group.arrangements(o)]
    assert len(nodes) == len(set(nodes)) == sum(o.size for o in found) == 4 + 6
    assert set(nodes) == {p for shape in ((1, 0, 0, 0), (Fraction(1, 2),) * 2 + (0, 0)) for p in permutations(shape)}


def test_what_cannot_be_included_says_so() -> None:
    with pytest.raises(InputError, match="include must list some of vertices, centre, edge-midpoints; got 'corners'"):
        sc.solve(flat(3), 3, include="corners")
    with pytest.raises(InputError, match="N must be at most 8"):
        sc.solve(flat(9), 2, include="vertices")
    with pytest.raises(NothingFound, match="vertices among its nodes found: in 1e-09 s no weights came out positive"):
        sc.solve(flat(3), 7, include="vertices", budget=1e-9)


def test_the_option_of_the_command(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "simpson.json"
    assert call("solve", "flat", "-N", 2, "-t", 3, "--include", "vertices,centre", "-o", path)[0] == 0
    assert len(sc.read(path)) == 3
    status, _, err = call("solve", "flat", "-N", 2, "-t", 3, "--include", "vertex")
    assert (status, len(err)) == (2, 1)
    assert "include must list some of" in err[0]


def test_a_resumed_search_gives_the_same_rule(tmp_path: Path) -> None:
    options = {"include": ["vertices"], "digits": 20, "budget": 20.0}
    first = sc.solve(flat(3), 4, resume=tmp_path, **options)
    count = len(list(tmp_path.iterdir()))
    again = sc.solve(flat(3), 4, resume=tmp_path, **options)
    assert again.node_decimals == first.node_decimals
    assert len(list(tmp_path.iterdir())) == count > 0
    plain = sc.solve(flat(3), 4, resume=tmp_path, digits=20)
    assert len(plain) == 6 < len(first)


def test_a_set_of_nodes_is_named_once() -> None:
    with pytest.raises(InputError, match="named once; got vertices, vertices"):
        sc.solve(flat(3), 3, include=("vertices", "vertices"))
