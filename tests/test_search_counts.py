"""Numbers of orbits that can carry a rule: the listing against brute force, the conditions against hand counts."""

import itertools
import math

import pytest

from simplexcub.search.counts import conditions, fewest_nodes, possible_counts
from simplexcub.symmetry import named_group


def listed_by_hand(group, degree, nodes):
    """Every count vector of so many nodes that meets the conditions, by trying all."""
    types = group.types
    most = [1 if t.unknowns == 1 else nodes // t.size for t in types]
    for counts in itertools.product(*(range(m + 1) for m in most)):
        enough = all(
            sum(c * t.unknowns for c, t in zip(counts, types, strict=True) if t in seen_by) >= need
            for seen_by, need in conditions(group, degree)
        )
        if enough and sum(c * t.size for c, t in zip(counts, types, strict=True)) == nodes:
            yield tuple((t, c) for c, t in zip(counts, types, strict=True) if c)


@pytest.mark.parametrize(
    ("n", "name", "degree", "most"), [(3, "full", 6, 25), (4, "full", 6, 30), (3, "cyclic", 5, 20), (4, "klein", 3, 12)]
)
def test_possible_counts_are_all_that_meet_the_conditions(n, name, degree, most):
    group = named_group(name, n)
    listed = 0
    for nodes in range(1, most + 1):
        found = possible_counts(group, degree, nodes)
        assert len(set(found)) == len(found)
        assert set(found) == set(listed_by_hand(group, degree, nodes))
        listed += len(found)
    assert listed > 3


def test_conditions_for_the_triangle():
    # Flat triangle, degree 6, S_3: 7 invariants. (λ1−λ2)²(λ1−λ3)²(λ2−λ3)² has degree 6 and vanishes wherever two
    # coordinates agree, so a generic orbit is needed; 12 nodes with one such orbit is the published structure.
    group = named_group("full", 3)
    by_labels = {len(t.multiplicities): t for t in group.types}
    needs = conditions(group, 6)
    assert (frozenset(group.types), 7) in needs
    assert (frozenset({by_labels[3]}), 1) in needs
    assert (((by_labels[2], 2), (by_labels[3], 1))) in possible_counts(group, 6, 12)
    assert possible_counts(group, 6, 11) == []


def test_no_structure_is_below_the_linear_bound():
    for name in ("full", "cyclic", "none"):
        group = named_group(name, 3)
        for degree in range(1, 9):
            assert fewest_nodes(group, degree) == math.comb(degree // 2 + 2, 2)
