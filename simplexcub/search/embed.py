"""A second set of weights on the nodes of a rule, exact to as high a degree as leaves them different from the first.

At a degree d whose conditions do not determine the weights of the orbits, those that satisfy them are the weights of
the rule plus a kernel. Of the non-negative ones a vertex is taken, with some orbits left out, on which functions of
degree d + 1 are most wrong; so the difference of the two means shows what degree d misses. Equal weights within an
orbit keep the symmetry of the rule.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction

import numpy as np
from mpmath import mp, mpf
from numpy.typing import NDArray
from scipy.optimize import linprog

from simplexcub.decimals import to_decimal
from simplexcub.embedded import Embedded
from simplexcub.errors import InputError, NothingFound
from simplexcub.invariants import Basis, invariant_basis
from simplexcub.measures import Dirichlet
from simplexcub.rule import Rule
from simplexcub.symmetry import Group, OrbitType, named_group

FloatArray = NDArray[np.float64]

_RANK_TOLERANCE = 1e-10
_ZERO = 1e-9  # a weight that the vertex leaves out
_MOST_PASSES = 40
_LARGEST_N = 8  # for orbits of all permutations; fewer for other groups


@dataclass(frozen=True)
class _Orbit:
    """One orbit: its type, the distinct coordinates of a node, its weight, and where its nodes stand in the table."""

    type: OrbitType
    values: tuple[Fraction, ...]
    weight: Fraction
    places: tuple[int, ...]


def embed(rule: Rule) -> Rule:
    """The same rule with embedded weights, from which :meth:`Rule.estimate` tells an error.

    Parameters
    ----------
    rule : Rule
        In space ``all`` or ``symmetric``.

    Returns
    -------
    Rule
        Its verification is dropped, since that said nothing of the new weights.

    Raises
    ------
    InputError
        Another space, or no degree.
    NothingFound
        The weights are determined by degree 0: the rule has one orbit only.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> from simplexcub.search import solve
    >>> rule = embed(solve(flat(2), degree=5, digits=10))
    >>> rule.embedded.degree, rule.embedded.weight_decimals  # those of the midpoint rule
    (1, ('1.000000000', '0', '0'))
    """
    if rule.space not in ("all", "symmetric") or rule.degree < 1:
        raise InputError("a rule must be exact for (symmetric) polynomials to be embedded in", rule)
    orbits = _orbits(rule)
    group = _group(rule)
    for degree in range(rule.degree - 1, -1, -1):
        basis = invariant_basis(group, degree)
        if len(basis) - 1 > len(orbits) * group.n:
            continue
        values = _columns(basis, orbits)
        singular = np.linalg.svd(values, compute_uv=False)
        if int((singular > _RANK_TOLERANCE * singular[0]).sum()) < len(orbits):
            weights = _vertex(values, _columns(invariant_basis(group, degree + 1), orbits)[len(basis) :], orbits)
            exact = _refined(basis, orbits, weights, rule)
            return replace(rule, embedded=_written(exact, orbits, rule, degree), verification=None)
    raise NothingFound(
        f"embedded weights for this rule of degree {rule.degree}",
        "even degree 0 leaves no choice, since the rule has one orbit only",
        "Take a rule of higher degree.",
    )


def _group(rule: Rule) -> Group:
    if rule.space == "symmetric":
        return named_group("full", rule.measure.N)
    alpha = rule.measure.alpha if isinstance(rule.measure, Dirichlet) else ()
    return named_group(rule.symmetry, rule.measure.N, alpha)


def _orbits(rule: Rule) -> list[_Orbit]:
    """The orbits of the printed nodes under the group that the rule names, each node found by its decimals."""
    group = _group(rule)
    if group.n > _LARGEST_N and rule.space == "all":
        raise InputError(f"N must be at most {_LARGEST_N} for orbits to be told apart", group.n)
    nodes = [tuple(Fraction(x) for x in node) for node in rule.node_decimals]
    weights = [Fraction(w) for w in rule.weight_decimals]
    if rule.space == "symmetric":
        return [_orbit(group, [node], [k], w) for k, (node, w) in enumerate(zip(nodes, weights, strict=True))]
    places = {node: k for k, node in enumerate(nodes)}
    if len(places) < len(nodes):
        raise InputError("the nodes of a rule must differ for it to be embedded in", "a node that occurs twice")
    found, seen = [], set()
    for node in nodes:
        if node not in seen:
            images = sorted({tuple(node[i] for i in g) for g in group.elements})
            if not places.keys() >= set(images):
                raise InputError(f"the nodes must be invariant under the symmetry {rule.symmetry}", "others")
            seen.update(images)
            here = [places[image] for image in images]
            found.append(_orbit(group, images, here, sum((weights[k] for k in here), Fraction(0))))
    return found


def _orbit(group: Group, images: Sequence[tuple[Fraction, ...]], places: Sequence[int], weight: Fraction) -> _Orbit:
    """With the smallest type that some image fits; for a lone spectrum any order of coordinates is an image."""
    for type_ in group.types:
        if group.is_full:
            counts = sorted(((images[0].count(v), v) for v in dict.fromkeys(images[0])), key=lambda c: -c[0])
            if tuple(c for c, _ in counts) == type_.multiplicities:
                return _Orbit(type_, tuple(v for _, v in counts), weight, tuple(places))
            continue
        for image in images:
            firsts = [type_.pattern.index(label) for label in range(type_.unknowns)]
            if all(image[i] == image[firsts[label]] for i, label in enumerate(type_.pattern)):
                return _Orbit(type_, tuple(image[i] for i in firsts), weight, tuple(places))
    raise InputError("every node must belong to an orbit type of the group", group.name)


def _columns(basis: Basis, orbits: Sequence[_Orbit]) -> FloatArray:
    """Mean of each function over each orbit; shape (E, orbits)."""
    columns = [basis.jet(np.array([[float(v) for v in o.values]]), o.type)[0, 0] for o in orbits]
    return np.array(columns).T


def _vertex(values: FloatArray, above: FloatArray, orbits: Sequence[_Orbit]) -> FloatArray:
    """Of the vertices in the directions of the functions one degree above, the one on which they differ most."""
    first = np.array([float(o.weight) for o in orbits])
    *_, rows = np.linalg.svd(values)
    kernel = rows[int((np.linalg.svd(values, compute_uv=False) > _RANK_TOLERANCE).sum()) :]
    directions = [*(above @ kernel.T @ kernel), *kernel]
    best, farthest = first, 0.0
    for direction in directions:
        for sign in (1, -1):
            # Steps s along the kernel: first + s kernel ≥ 0. Weights may be negative in the rule itself.
            found = linprog(
                sign * (kernel @ direction),
                A_ub=-kernel.T,
                b_ub=np.maximum(first, 0.0),
                bounds=(None, None),
                method="highs",
            )
            if found.status != 0:
                continue
            moved = first + found.x @ kernel
            distance = float(np.linalg.norm(above @ (moved - first)) + 1e-3 * np.linalg.norm(moved - first))
            if distance > farthest * (1 + 1e-9):
                best, farthest = moved, distance
    return best


def _refined(basis: Basis, orbits: Sequence[_Orbit], start: FloatArray, rule: Rule) -> list[mpf]:
    """Weights of the orbits to all digits: the kept ones solve the conditions, the others are 0."""
    kept = [i for i, w in enumerate(start) if abs(w) > _ZERO]
    bits = math.ceil((rule.digits + 15) * math.log2(10))
    inverse = np.linalg.pinv(_columns(basis, [orbits[i] for i in kept]))
    means = basis.means_fixed(rule.measure, bits)
    weights = np.array([int(math.ldexp(start[i], 60)) << (bits - 60) for i in kept], dtype=object)
    for _ in range(_MOST_PASSES):
        residual = -means
        for i, weight in zip(kept, weights, strict=True):
            values = np.array([[int(v * 2**bits) for v in orbits[i].values]], dtype=object)
            residual = residual + basis.sums_fixed(values, np.array([weight], dtype=object), orbits[i].type, bits)
        size = max(abs(int(r)) for r in residual)
        # What the last printed digits of the nodes do to the means cannot be mended by weights.
        if size < 1 << (bits - math.ceil((rule.digits + 6) * math.log2(10))):
            break
        shift = max(size.bit_length() - 60, 0)
        step = inverse @ np.array([float(int(r) >> shift) for r in residual])
        weights = weights - np.array([int(s) << shift for s in step], dtype=object)
    found = [mpf(0)] * len(orbits)
    with mp.workprec(bits + 10):
        for i, weight in zip(kept, weights, strict=True):
            found[i] = mpf(int(weight)) / (1 << bits)
    return found


def _written(exact: Sequence[mpf], orbits: Sequence[_Orbit], rule: Rule, degree: int) -> Embedded:
    decimals = [""] * len(rule)
    with mp.workdps(rule.digits + 10):
        for weight, orbit in zip(exact, orbits, strict=True):
            share = to_decimal(weight / len(orbit.places), rule.digits) if weight else "0"
            for place in orbit.places:
                decimals[place] = share
    return Embedded(degree, tuple(decimals))
