"""Lower bounds on the number of nodes: values recomputed from Möller's 1979 rank form, and rules that attain them."""

import pytest

from simplexcub.errors import InputError
from simplexcub.measures import bures, dirichlet, flat, hilbert_schmidt, induced
from simplexcub.symmetry import named_group
from simplexcub.verify import lower_bound
from simplexcub.verify.bounds import LARGEST_BASIS, dimension

# H. M. Möller, Numerische Integration, ISNM 45 (1979) 221-230, rank form, for the flat measure; degrees 1, 2, 3, ...
MOELLER_1979 = {
    3: (1, 3, 4, 6, 7, 10, 12, 15, 17, 21, 24, 28, 31, 36, 40, 45, 49, 55, 60, 66),
    4: (1, 4, 5, 10, 12, 20, 24, 35, 41, 56, 65, 84, 96, 120),
    5: (1, 5, 6, 15, 18, 35, 42, 70, 83, 126),
    6: (1, 6, 7, 21, 25, 56, 67, 126),
    7: (1, 7, 8, 28, 33, 84, 100, 210),
}


@pytest.mark.parametrize("n", MOELLER_1979)
def test_moeller_rank_form_for_the_flat_measure(n):
    found = tuple(lower_bound(flat(n), t) for t in range(1, len(MOELLER_1979[n]) + 1))
    assert found == MOELLER_1979[n]


@pytest.mark.parametrize("t", range(1, 30))
def test_two_components_have_the_gauss_bound(t):
    assert lower_bound(flat(2), t) == t // 2 + 1
    assert lower_bound(hilbert_schmidt(2), t) == t // 2 + 1


def test_symmetric_bound_counts_partitions():
    # For N ≥ s it is the partition number p(s), here p(0) … p(6) (Abramowitz & Stegun, table 24.5).
    assert [lower_bound(flat(8), 2 * s, "symmetric") for s in range(7)] == [1, 1, 2, 3, 5, 7, 11]
    # For N = 3, parts 2 and 3 only: 0, 2, 3, 2+2, 2+3, 2+2+2, 3+3.
    assert [lower_bound(hilbert_schmidt(3), t, "symmetric") for t in range(14)] == [
        1,
        1,
        1,
        1,
        2,
        2,
        3,
        3,
        4,
        4,
        5,
        5,
        7,
        7,
    ]


@pytest.mark.parametrize("n", range(2, 9))
def test_partitions_with_parts_up_to_n_are_as_many_as_orbit_types(n):
    # The partitions of n, counted by another routine: those with parts ≥ 2 of all integers ≤ n, and ones to fill up.
    assert dimension(n, n, "symmetric") == len(named_group("full", n).types)


def test_no_higher_degree_has_a_lower_bound():
    for measure in (flat(4), hilbert_schmidt(4), induced(3, 5), dirichlet(["1/2", 2, "1/3", 1])):
        bounds = [lower_bound(measure, t) for t in range(10)]
        assert bounds == sorted(bounds)
        assert bounds[::2] == [dimension(measure.N, s, "all") for s in range(5)]


def test_degree_three_needs_one_node_more_than_the_linear_bound_in_every_measure():
    # Möller 1979: the commutator of a measure that is not centrally symmetric does not vanish.
    for measure in (flat(3), hilbert_schmidt(3), induced(4, 6), dirichlet([1, 2, 3])):
        assert lower_bound(measure, 3) == measure.N + 1


def test_linear_bound_beyond_the_size_of_the_rank_form():
    t = 53
    assert dimension(3, t // 2, "all") > LARGEST_BASIS
    assert lower_bound(flat(3), t) == dimension(3, t // 2, "all") == 378
    assert lower_bound(hilbert_schmidt(8), 3) == 8


def test_ordered_space_has_the_bound_of_its_chamber():
    # In barycentric coordinates of the chamber the ordered flat measure is flat again, so both have the same bounds.
    assert [lower_bound(flat(3), t, "ordered") for t in range(1, 8)] == [lower_bound(flat(3), t) for t in range(1, 8)]
    assert lower_bound(flat(3), 7, "ordered") == 12
    with pytest.raises(InputError, match=r"ordered moments must be of .* got bures\(N=3\)"):
        lower_bound(bures(3), 3, "ordered")


def test_bad_input():
    with pytest.raises(InputError, match="degree must be at least 0; got -1"):
        lower_bound(flat(3), -1)
    with pytest.raises(InputError, match="space must be one of all, symmetric, ordered; got odd"):
        lower_bound(flat(3), 2, "odd")
