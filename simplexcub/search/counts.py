"""Which numbers of orbits of each type can possibly carry a rule, cheapest first.

A count vector is dropped when it has fewer unknowns than equations, on the whole space or on the polynomials that
vanish on a union of strata: those are seen by the other orbits only (consistency conditions, Mantel & Rabinowitz,
SIAM J. Numer. Anal. 14 (1977) 391). Ranks are counted numerically at random points of the strata.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import lru_cache
from itertools import islice, pairwise
from math import comb

import numpy as np

from simplexcub.moments.partitions import count_partitions
from simplexcub.search.chosen import Chosen, stratum
from simplexcub.search.extended import invariant_extension
from simplexcub.search.extra import Extra
from simplexcub.symmetry import Group, OrbitType, Spectra

Counts = tuple[tuple[OrbitType, int], ...]  # (orbit type, how many orbits), types with none left out
Condition = tuple[frozenset[OrbitType], int]

_RANK_TOLERANCE = 1e-9
_MOST_UNIONS = 5_000  # of strata; further ones would only repeat what these ask
_MOST_STRUCTURES = 2_000  # of one node count


def node_count(counts: Counts) -> int:
    """Number of nodes of a rule with these orbits."""
    return sum(c * t.size for t, c in counts)


def random_values(type_: OrbitType, points: np.ndarray) -> np.ndarray:
    """Distinct coordinates of random orbits of a type: block means of points of the simplex; shape (…, k)."""
    order = np.argsort(type_.pattern, kind="stable")
    edges = np.cumsum((0, *type_.multiplicities))
    return np.stack([points[..., order[a:b]].mean(axis=-1) for a, b in pairwise(edges)], axis=-1)


@lru_cache(maxsize=256)
def conditions(group: Group, degree: int, also: tuple[Extra, ...] = ()) -> list[Condition]:
    """(types, need): the orbits of these types together must have at least `need` unknowns."""
    types = group.types
    if isinstance(group, Spectra):
        return [(frozenset(types), count_partitions(degree, group.n))]
    basis = invariant_extension(group, degree, also)
    rng = np.random.default_rng(0)
    spans = {}
    for t in types:
        values = basis.jet(random_values(t, rng.dirichlet(np.ones(group.n), 2 * len(basis) + 10)), t)[:, 0]
        spans[t] = _row_space(values)
    needs: dict[frozenset[OrbitType], int] = {}
    for union in _closed_unions(group):
        top = [t for t in union if not any(t is not o and _in_closure(group, t, o) for o in union)]
        rank = len(_row_space(np.concatenate([spans[t] for t in top]))) if top else 0
        others = frozenset(types) - union
        needs[others] = max(needs.get(others, 0), len(basis) - rank)
    # A condition follows from another that asks as much of fewer types.
    implied = {s for s, need in needs.items() if any(o < s and more >= need for o, more in needs.items())}
    return [(s, need) for s, need in needs.items() if need and s not in implied]


def allowed(counts: Counts, wanted: list[Condition]) -> bool:
    """Whether a count vector meets every condition."""
    return all(sum(c * t.unknowns for t, c in counts if stratum(t) in s) >= need for s, need in wanted)


def possible_counts(
    group: Group,
    degree: int,
    nodes: int,
    chosen: tuple[Chosen, ...] = (),
    *,
    fixed_weights: bool = False,
    also: tuple[Extra, ...] = (),
) -> list[Counts]:
    """Count vectors of exactly `nodes` nodes that pass every condition, those with most freedom first.

    Freedom is the least excess of unknowns over any condition. At most ``_MOST_STRUCTURES`` are listed. The `chosen`
    orbits are part of all of them. Fixed weights are no unknowns, but sum to 1 by themselves.
    """
    unknowns = {t: t.unknowns - fixed_weights for t in group.types}
    given = tuple((t, 1) for t in chosen)
    nodes -= node_count(given)
    if nodes < 0:
        return []
    wanted = [(s, need - sum(stratum(t) in s for t in chosen)) for s, need in conditions(group, degree, also)]
    if fixed_weights:
        wanted = [(s, need - (len(s) == len(group.types))) for s, need in wanted]
    taken = {stratum(t) for t in chosen if stratum(t).unknowns == 1}  # a stratum of one point, which is chosen
    types = list(reversed(group.types))
    masks = [[t in s for t in types] for s, _ in wanted]
    # The most unknowns that one node can bring to a condition, among the types from position i on.
    rates = [[0.0] for _ in masks]
    for t, flags in zip(types[::-1], zip(*(mask[::-1] for mask in masks), strict=True), strict=True):
        for rate, counts_here in zip(rates, flags, strict=True):
            rate.insert(0, max(rate[0], counts_here * unknowns[t] / t.size))

    def extend(i: int, left: int, lacks: tuple[int, ...]) -> Iterator[tuple[int, ...]]:
        if any(lack > rate[i] * left + 1e-9 for lack, rate in zip(lacks, rates, strict=True)):
            return
        if i == len(types):
            if left == 0:
                yield ()
            return
        t = types[i]
        most = left // t.size
        if t.unknowns == 1:
            most = min(most, 0 if t in taken else 1)  # a stratum of one point
        for c in range(most, -1, -1):
            rest = tuple(lack - c * unknowns[t] * mask[i] for lack, mask in zip(lacks, masks, strict=True))
            for tail in extend(i + 1, left - c * t.size, rest):
                yield (c, *tail)

    listed = islice(extend(0, nodes, tuple(need for _, need in wanted)), _MOST_STRUCTURES)
    found = [tuple((t, c) for t, c in zip(group.types, reversed(cs), strict=True) if c) for cs in listed]

    def freedom(counts: Counts) -> int:
        return min(sum(c * unknowns[t] for t, c in counts if t in s) - need for s, need in wanted)

    return [cs + given for cs in sorted(found, key=lambda cs: (-freedom(cs), sum(c * t.unknowns for t, c in cs)))]


def fewest_nodes(group: Group, degree: int) -> int:
    """No positive rule inside has fewer nodes: the dimension of the polynomials of half the degree, or symmetric ones.

    Reference: A. H. Stroud, *Approximate Calculation of Multiple Integrals* (1971), 3.15.
    """
    if isinstance(group, Spectra):
        return count_partitions(degree // 2, group.n)  # parts of 1 stand for what is missing to the degree
    return comb(degree // 2 + group.n - 1, group.n - 1)


def _row_space(values: np.ndarray) -> np.ndarray:
    _, singular, rows = np.linalg.svd(values, full_matrices=False)
    found: np.ndarray = rows[singular > _RANK_TOLERANCE * singular[0]]
    return found


def _in_closure(group: Group, special: OrbitType, general: OrbitType) -> bool:
    """Whether some node of a `special` orbit has all the equalities of `general`."""
    labels = general.pattern
    return any(
        all(image[i] == image[labels.index(label)] for i, label in enumerate(labels))
        for image in group.arrangements(special)
    )


def _closed_unions(group: Group) -> Iterator[frozenset[OrbitType]]:
    """Unions of strata closed under taking limits, the small ones first, up to a fixed number."""
    types = group.types
    below = {t: frozenset(s for s in types if _in_closure(group, s, t)) for t in types}
    seen: dict[frozenset[OrbitType], None] = {frozenset(): None}
    for t in types:
        for union in list(seen):
            if len(seen) < _MOST_UNIONS:
                seen.setdefault(union | below[t])
    yield from seen
