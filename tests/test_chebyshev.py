"""Equal weights in one variable: which numbers of nodes exist, and the rules where they do."""

from __future__ import annotations

from fractions import Fraction
from math import comb

import numpy as np
import pytest
from conftest import Call

import simplexcub as sc
from simplexcub.measures import Measure, bures, dirichlet, flat, hilbert_schmidt, induced
from simplexcub.search.chebyshev import chebyshev_nodes
from simplexcub.search.sturm import count_zeros, isolate, narrow, sturm_sequence

# Abramowitz & Stegun, table 25.5, abscissas on [-1, 1], from memory.
TABLE_25_5 = {
    2: (0.5773502692,),
    3: (0.0, 0.7071067812),
    4: (0.1875924741, 0.7946544723),
    5: (0.0, 0.3745414096, 0.8324974870),
    6: (0.2666354015, 0.4225186538, 0.8662468181),
    7: (0.0, 0.3239118105, 0.5296567753, 0.8838617008),
    9: (0.0, 0.1679061842, 0.5287617831, 0.6010186554, 0.9115893077),
}


@pytest.mark.parametrize(
    ("measure", "up_to", "existing"),
    [
        (flat(2), 30, [1, 2, 3, 4, 5, 6, 7, 9]),  # Bernstein 1937; Abramowitz & Stegun 25.4.28
        (hilbert_schmidt(2), 14, [1, 2, 3, 4, 6]),  # common practice, no source
    ],
)
def test_which_numbers_of_nodes_exist(measure: Measure, up_to: int, existing: list[int]) -> None:
    assert [n for n in range(1, up_to + 1) if sc.chebyshev(measure, n).exists] == existing


@pytest.mark.parametrize("measure", [flat(2), hilbert_schmidt(2), bures(2), induced(2, 4), dirichlet(["1/3", 2])])
@pytest.mark.parametrize("n", range(1, 13))
def test_the_count_is_that_of_floating_point_zeros(measure: Measure, n: int) -> None:
    """Power sums to elementary symmetric functions by the exponential series, zeros by the companion matrix."""
    series = [Fraction(1)]
    for k in range(1, n + 1):
        series.append(sum(-n * measure.moment((j, 0)) * series[k - j] for j in range(1, k + 1)) / k)
    zeros = np.roots([float(c) for c in series])
    real = zeros[np.abs(zeros.imag) < 1e-5].real
    assert sc.chebyshev(measure, n).inside == int(((real > -1e-9) & (real < 1 + 1e-9)).sum())


@pytest.mark.parametrize("n", sorted(TABLE_25_5))
def test_nodes_of_the_published_table(n: int) -> None:
    nodes = chebyshev_nodes(sc.chebyshev(flat(2), n), 30)
    assert len(nodes) == n
    np.testing.assert_allclose([float(2 * x - 1) for x in nodes[n // 2 :]], TABLE_25_5[n], atol=2e-10)


def test_the_degree_follows_from_the_coefficients() -> None:
    """Gauss–Chebyshev has equal weights and degree 2n − 1 (Abramowitz & Stegun 25.4.38)."""
    assert [sc.chebyshev(dirichlet(["1/2", "1/2"]), n).degree for n in range(1, 12)] == list(range(1, 23, 2))
    assert [sc.chebyshev(flat(2), n).degree for n in range(1, 10)] == [1, 3, 3, 5, 5, 7, 7, 0, 9]


@pytest.mark.parametrize("measure", [flat(2), hilbert_schmidt(2), bures(2), dirichlet([1, 2]), dirichlet(["1/2"] * 2)])
def test_the_rule_is_verified_and_proven(measure: Measure) -> None:
    report = sc.verify(sc.solve(measure, 3, equal_weights=True), prove=True)
    assert report.holds
    assert report.rule.equal_weights
    assert report.proof is not None
    assert report.proof.holds
    assert report.proof.equations <= report.proof.unknowns <= len(report.rule)


def test_the_command_says_why_and_gives_the_next(call: Call) -> None:
    status, out, err = call("solve", "flat", "-N", 2, "-t", 8, "--equal-weights")
    assert status == 0
    (line,) = err
    assert "8 nodes of equal weight and degree 8 do not exist: 2 of 8 zeros real and on [0, 1]" in line
    assert "here are 9 nodes of equal weight, degree 9" in line
    assert any("positive, all equal" in text for text in out)
    assert "degree 9, 9 nodes" in out[0]


def test_sturm_counts_and_separates_known_zeros() -> None:
    wilkinson = [1]
    for zero in range(1, 11):  # Π (12 x − zero)
        wilkinson = [12 * a - zero * b for a, b in zip([0, *wilkinson], [*wilkinson, 0], strict=True)]
    sequence = sturm_sequence(wilkinson)
    assert count_zeros(sequence, Fraction(0), Fraction(1, 2)) == 6
    intervals = [narrow(wilkinson, i, 30) for i in isolate(sequence, Fraction(0), Fraction(1))]
    assert all(low <= Fraction(k, 12) <= high for k, (low, high) in enumerate(intervals, 1))
    assert len(intervals) == 10
    no_real = [comb(4, k) + (k == 0) for k in range(5)]  # (1 + x)⁴ + 1
    assert count_zeros(sturm_sequence(no_real), Fraction(-10), Fraction(10)) == 0


@pytest.mark.parametrize("arguments", [(flat(3), 2), (flat(2), 0), (flat(2), 101), (flat(2), 2.0)])
def test_bad_arguments_are_refused(arguments: tuple[Measure, int]) -> None:
    with pytest.raises(sc.InputError, match="must be"):
        sc.chebyshev(*arguments)
