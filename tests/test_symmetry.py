"""Permutation groups: orders, orbit types against hand counts, nodes of an orbit."""

import itertools
import math

import numpy as np
import pytest

from simplexcub.errors import InputError
from simplexcub.symmetry import Group, OrbitType, named_group, orbit_size

ORDERS = {
    ("full", 2): 2,
    ("full", 3): 6,
    ("full", 5): 120,
    ("alternating", 3): 3,
    ("alternating", 4): 12,
    ("alternating", 5): 60,
    ("dihedral", 3): 6,
    ("dihedral", 4): 8,
    ("dihedral", 6): 12,
    ("cyclic", 3): 3,
    ("cyclic", 6): 6,
    ("klein", 4): 4,
    ("stabiliser", 3): 2,
    ("stabiliser", 5): 24,
    ("product-2-2", 4): 4,
    ("product-3-2-1", 6): 12,
    ("product-1-1-1", 3): 1,
    ("product-4", 4): 24,
    ("none", 3): 1,
    ("none", 7): 1,
    ("alpha", 4): 24,
}
SUBGROUPS = [(name, n) for name, n in ORDERS if ORDERS[name, n] <= 24]

# (size of the orbit, unknowns: its weight and free coordinates), smallest first.
TYPES = {
    # Every point is an orbit of its own: one type, all coordinates free.
    ("none", 3): [(1, 3)],
    ("none", 5): [(1, 5)],
    # A rotation fixes the centre only.
    ("cyclic", 3): [(1, 1), (3, 3)],
    ("alternating", 3): [(1, 1), (3, 3)],
    # Centre; a b a b, fixed by the half turn; generic.
    ("cyclic", 4): [(1, 1), (2, 2), (4, 4)],
    # Five partitions of 4: 4, 3+1, 2+2, 2+1+1, 1+1+1+1.
    ("full", 4): [(1, 1), (4, 2), (6, 2), (12, 3), (24, 4)],
    ("full", 3): [(1, 1), (3, 2), (6, 3)],
    # A 3-cycle fixes a a a b, a double transposition a a b b; no even permutation fixes just a a b c.
    ("alternating", 4): [(1, 1), (4, 2), (6, 2), (12, 4)],
    # Centre; the axes of the three double transpositions; generic.
    ("klein", 4): [(1, 1), (2, 2), (2, 2), (2, 2), (4, 4)],
    # The square: centre; a b a b; reflections through edges, a a b b; through corners, a b a c; generic.
    ("dihedral", 4): [(1, 1), (2, 2), (4, 2), (4, 3), (8, 4)],
    # Permutations of the first two or three components beside the last.
    ("stabiliser", 3): [(1, 2), (2, 3)],
    ("stabiliser", 4): [(1, 2), (3, 3), (6, 4)],
    # Each pair equal or not.
    ("product-2-2", 4): [(1, 2), (2, 3), (2, 3), (4, 4)],
}


@pytest.mark.parametrize(("name", "n"), ORDERS)
def test_orders(name, n):
    elements = named_group(name, n).elements
    assert len(elements) == len(set(elements)) == ORDERS[name, n]


@pytest.mark.parametrize(("name", "n"), SUBGROUPS)
def test_elements_form_a_group(name, n):
    elements = set(named_group(name, n).elements)
    assert tuple(range(n)) in elements
    assert all(sorted(g) == list(range(n)) for g in elements)
    for g, h in itertools.product(elements, repeat=2):
        assert tuple(g[i] for i in h) in elements


def test_names_mean_what_they_say():
    even = {
        p
        for p in itertools.permutations(range(4))
        if sum(p[i] > p[j] for i, j in itertools.combinations(range(4), 2)) % 2 == 0
    }
    assert set(named_group("alternating", 4).elements) == even
    assert set(named_group("klein", 4).elements) <= even
    assert all(g[3] == 3 for g in named_group("stabiliser", 4).elements)
    assert all({g[0], g[1]} == {0, 1} for g in named_group("product-2-3", 5).elements)
    assert set(named_group("cyclic", 4).elements) == {tuple((i + k) % 4 for i in range(4)) for k in range(4)}
    assert set(named_group("cyclic", 4).elements) < set(named_group("dihedral", 4).elements)
    exchange = named_group("alpha", 4, (2, "1/2", 2, "1/2")).elements
    assert set(exchange) == {(0, 1, 2, 3), (2, 1, 0, 3), (0, 3, 2, 1), (2, 3, 0, 1)}
    assert named_group("alpha", 3, (1, 2, 3)).elements == ((0, 1, 2),)


@pytest.mark.parametrize(("name", "n"), TYPES)
def test_orbit_types_against_hand_counts(name, n):
    types = named_group(name, n).types
    assert [(t.size, t.unknowns) for t in types] == TYPES[name, n]
    assert all(sum(t.multiplicities) == n for t in types)


@pytest.mark.parametrize("n", range(2, 8))
def test_full_symmetry_has_a_type_for_every_partition(n):
    # Partition numbers p(2) … p(7): Abramowitz & Stegun, table 24.5.
    types = named_group("full", n).types
    assert len(types) == {2: 2, 3: 3, 4: 5, 5: 7, 6: 11, 7: 15}[n]
    for t in types:
        assert (
            t.size
            == orbit_size(t.multiplicities)
            == math.factorial(n) // math.prod(map(math.factorial, t.multiplicities))
        )


@pytest.mark.parametrize("n", [3, 4, 5])
def test_full_symmetry_has_the_types_that_the_general_way_finds(n):
    # The same group under another name is not recognised, so that its strata are worked out.
    full = named_group("full", n)
    assert {(t.size, t.multiplicities) for t in full.types} == {
        (t.size, tuple(sorted(t.multiplicities, reverse=True))) for t in Group("other", n, full.generators).types
    }


@pytest.mark.parametrize(("name", "n"), SUBGROUPS)
def test_every_point_lies_in_exactly_one_type(name, n):
    group = named_group(name, n)
    rng = np.random.default_rng(1)
    points = [rng.integers(0, 3, n) for _ in range(30)] + [rng.permutation(n), np.zeros(n, dtype=int)]
    for point in points:
        orbit = {tuple(int(point[i]) for i in g) for g in group.elements}
        # Equal on the classes of a pattern and no larger an orbit: then the pattern's stabiliser is the point's own.
        holders = [
            t
            for t in group.types
            if len(orbit) == t.size
            and any(all(len(set(point[np.array(p) == k])) == 1 for k in p) for p in group.arrangements(t))
        ]
        assert len(holders) == 1


@pytest.mark.parametrize(("name", "n"), SUBGROUPS)
def test_arrangements_are_the_orbit(name, n):
    group = named_group(name, n)
    values = np.random.default_rng(2).random(n)
    for t in group.types:
        arrangements = group.arrangements(t)
        assert len(arrangements) == len(set(arrangements)) == t.size
        assert t.pattern in arrangements
        node = tuple(values[label] for label in t.pattern)
        orbit = {tuple(node[i] for i in g) for g in group.elements}
        assert {tuple(values[label] for label in p) for p in arrangements} == orbit


def test_orbit_type_counts_labels():
    t = OrbitType((0, 1, 0, 2), 4)
    assert t.multiplicities == (2, 1, 1)
    assert t.unknowns == 3


@pytest.mark.parametrize(
    ("name", "n", "words"),
    [
        ("round", 3, "symmetry must be one of full, alternating, dihedral, cyclic, klein, stabiliser, product"),
        ("best", 3, "symmetry must be one of"),
        ("klein", 5, "symmetry klein needs N = 4; got 5"),
        ("product-2-2", 5, "sum to N = 5; got product-2-2"),
        ("product-", 3, "sum to N = 3"),
        ("product-3-0", 3, "positive"),
        ("product-4--1", 3, "block sizes"),
        ("product-x", 3, "block sizes"),
    ],
)
def test_bad_names(name, n, words):
    with pytest.raises(InputError, match=words):
        named_group(name, n)


def test_groups_too_large_to_list_are_refused():
    assert len(named_group("full", 8).types) == 22
    with pytest.raises(InputError, match="at most 5040 elements; got alternating"):
        _ = named_group("alternating", 9).elements
