"""Lower bounds on the number of nodes of a rule, whatever its weights and wherever its nodes.

Linear bound. If a rule of degree 2s had fewer nodes than dim P_s, some p ≠ 0 in P_s would vanish on all of them, and
the rule would average p² to 0, but E[p²] > 0. So M ≥ dim P_s for degrees 2s and 2s+1, with

    space ``all``, ``ordered``  dim P_s = C(s + N − 1, N − 1),
    space ``symmetric``         dim P_s = number of partitions of integers ≤ s into parts from {2, …, N}.

Rank form of Möller's bound, for degree 2s+1 and spaces ``all`` and ``ordered``. Let V hold a basis of P_s orthonormal
for the measure at the nodes and W the weights, so that Vᵀ W V = 1, and let X_u be the diagonal matrix of a linear
coordinate u at the nodes. The multiplication operators compressed to P_s, J_u = Vᵀ W X_u V, are known from moments of
degree 2s+1. With the projector Π = V Vᵀ W of rank D = dim P_s,

    [J_u, J_v] = Vᵀ W ( X_v (1 − Π) X_u − X_u (1 − Π) X_v ) V,

since X_u and X_v commute. 1 − Π has rank M − D, hence rank [J_u, J_v] ≤ 2 (M − D), that is

    M ≥ D + ½ rank [J_u, J_v].

For N = 2 there is one coordinate only and the second term is absent. In any basis with Gram matrix G and
H_u = E[u b bᵀ], the rank is that of H_u G⁻¹ H_v − H_v G⁻¹ H_u. It is computed modulo a prime p that divides no
denominator and not det G; reduction modulo p cannot raise a rank, so the bound is certain even if an unlucky p made
it smaller than it might be.

References: H. M. Möller, *Lower bounds for the number of nodes in cubature formulae*, in Numerische Integration,
ISNM 45 (1979) 221–230; R. Cools, Acta Numerica 6 (1997) 1–54, section 8; Y. Xu, *Common Zeros of Polynomials in Several
Variables and Higher Dimensional Quadrature* (1994).
"""

from __future__ import annotations

import math
from fractions import Fraction
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from simplexcub.errors import InputError
from simplexcub.measures import Measure, ordered
from simplexcub.rule import Space
from simplexcub.verify.residuals import compositions, mean

PRIME = 2**31 - 1  # products of two residues fit in 64 bits
LARGEST_BASIS = 350
MOST_MOMENTS = 4000
LARGEST_SPECTRUM = 5  # means over spectra cost more than those of Dirichlet measures

IntArray = NDArray[np.int64]


@lru_cache(maxsize=1024)
def lower_bound(measure: Measure, degree: int, space: Space = "all") -> int:
    """No rule of this degree has fewer nodes than this.

    For odd degrees and spaces ``all`` and ``ordered`` it is Möller's bound in its rank form as long as dim P_s ≤
    350, at most 4000 moments are needed and, for eigenvalue measures, N ≤ 5; beyond these sizes, and otherwise, the
    linear bound.

    Parameters
    ----------
    measure : Measure
    degree : int
        At least 0.
    space : {"all", "symmetric", "ordered"}
        For ``symmetric`` it counts representatives, one for each orbit.

    Returns
    -------
    int

    Raises
    ------
    InputError
        A negative degree, an unknown space, or a measure without exact moments of its ordered spectrum.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> [lower_bound(flat(3), t) for t in range(1, 8)]
    [1, 3, 4, 6, 7, 10, 12]
    """
    if degree < 0:
        raise InputError("degree must be at least 0", degree)
    if space not in ("all", "symmetric", "ordered"):
        raise InputError("space must be one of all, symmetric, ordered", space)
    s = degree // 2
    linear = dimension(measure.N, s, space)
    if degree % 2 == 0 or space == "symmetric" or measure.N == 2:
        return linear
    if space == "ordered":
        measure = ordered(measure)
    moments = math.comb(degree + measure.N - 1, measure.N - 1)
    if linear > LARGEST_BASIS or moments > MOST_MOMENTS:
        return linear
    if measure.N > LARGEST_SPECTRUM and measure.family not in ("flat", "dirichlet"):
        return linear
    return linear + (_commutator_rank(measure, s) + 1) // 2


def dimension(n: int, degree: int, space: Space) -> int:
    """Dimension of the polynomials of at most this degree on the simplex of `n` components, within `space`.

    Examples
    --------
    >>> dimension(3, 4, "all"), dimension(3, 4, "symmetric")
    (15, 4)
    """
    if space != "symmetric":
        return math.comb(degree + n - 1, n - 1)
    counts = [1] + [0] * degree
    for part in range(2, n + 1):
        for total in range(part, degree + 1):
            counts[total] += counts[total - part]
    return sum(counts)


def _commutator_rank(measure: Measure, s: int) -> int:
    """rank [J_u, J_v] modulo a prime, for two coordinates in general position; 0 where the prime does not serve."""
    n = measure.N
    # On the simplex monomials of degree exactly s are a basis of P_s, and Σ λ_i = 1 may be put in anywhere.
    basis = np.array(list(compositions(s, n)))
    try:
        residues = {a: _residue(mean(measure, a)) for t in (2 * s, 2 * s + 1) for a in compositions(t, n)}
    except ValueError:
        return 0
    pairs = basis[:, None, :] + basis[None, :, :]
    size = len(basis)
    gram = np.array([[residues[tuple(a)] for a in row] for row in pairs.tolist()], dtype=np.int64)
    along = np.zeros((2, size, size), dtype=np.int64)
    for i in range(n - 1):
        step = np.eye(n, dtype=np.int64)[i]
        block = np.array([[residues[tuple(a)] for a in row] for row in (pairs + step).tolist()], dtype=np.int64)
        for direction, factor in enumerate((i + 1, (i + 1) ** 2 + 1)):
            along[direction] = (along[direction] + factor * block) % PRIME
    solved = _solve(gram, along[1])
    if solved is None:
        return 0
    product = _multiply(along[0], solved)
    return _rank((product - product.T) % PRIME)


def _residue(value: Fraction) -> int:
    return value.numerator * pow(value.denominator, -1, PRIME) % PRIME


def _multiply(a: IntArray, b: IntArray) -> IntArray:
    total = np.zeros((a.shape[0], b.shape[1]), dtype=np.int64)
    for k in range(a.shape[1]):
        total = (total + a[:, k, None] * b[None, k] % PRIME) % PRIME
    return total


def _eliminate(matrix: IntArray, columns: int) -> int:
    """Reduce the first `columns` columns to echelon form modulo the prime, in place; gives their rank."""
    row = 0
    for column in range(columns):
        candidates = np.flatnonzero(matrix[row:, column])
        if not candidates.size:
            continue
        pivot = row + int(candidates[0])
        matrix[[row, pivot]] = matrix[[pivot, row]]
        matrix[row] = matrix[row] * pow(int(matrix[row, column]), -1, PRIME) % PRIME
        factors = matrix[:, column].copy()
        factors[row] = 0
        matrix[:] = (matrix - factors[:, None] * matrix[row] % PRIME) % PRIME
        row += 1
        if row == len(matrix):
            break
    return row


def _solve(a: IntArray, b: IntArray) -> IntArray | None:
    """a⁻¹ b modulo the prime; None where a is singular modulo it."""
    joined = np.hstack([a, b])
    if _eliminate(joined, len(a)) < len(a):
        return None
    return joined[:, len(a) :]


def _rank(matrix: IntArray) -> int:
    return _eliminate(matrix.copy(), matrix.shape[1])
