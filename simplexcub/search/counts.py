"""Which numbers of orbits of each type can possibly carry a rule, cheapest first.

A count vector is dropped when it has fewer unknowns than equations, on the whole space or on the polynomials that
vanish on a union of strata: those are seen by the other orbits only (consistency conditions, Mantel & Rabinowitz,
SIAM J. Numer. Anal. 14 (1977) 391). Ranks are counted numerically at random points of the strata.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from functools import lru_cache
from itertools import combinations, pairwise

import numpy as np

from simplexcub.basis import symmetric_basis
from simplexcub.symmetry import orbit_size, orbit_types

Type = tuple[int, ...]
Counts = tuple[tuple[Type, int], ...]  # (orbit type, how many orbits), types with none left out

_RANK_TOLERANCE = 1e-9


def unknowns(type_: Type) -> int:
    """Unknowns of one orbit: its weight and its free coordinates."""
    return len(type_)


def node_count(counts: Counts) -> int:
    """Number of nodes of a rule with these orbits."""
    return sum(c * orbit_size(t) for t, c in counts)


@lru_cache(maxsize=256)
def _conditions(n: int, degree: int) -> list[tuple[frozenset[Type], int]]:
    """(types, need): the orbits of these types together must have at least `need` unknowns."""
    types = orbit_types(n)
    basis = symmetric_basis(n, degree)
    rng = np.random.default_rng(0)
    values = {}
    for t in types:
        points = rng.dirichlet(np.ones(n), 4 * len(basis))
        blocks = np.cumsum((0, *t))
        means = np.stack([points[:, a:b].mean(axis=1) for a, b in pairwise(blocks)], axis=1)
        values[t] = basis.jet(means, t)[:, 0]
    needs: dict[frozenset[Type], int] = {}
    for size in range(len(types)):
        for chosen in combinations(types, size):
            rank = 0
            if chosen:
                singular = np.linalg.svd(np.concatenate([values[t] for t in chosen]), compute_uv=False)
                rank = int((singular > _RANK_TOLERANCE * singular[0]).sum())
            others = frozenset(types) - frozenset(chosen)
            needs[others] = max(needs.get(others, 0), len(basis) - rank)
    # A condition follows from another when it asks no more of more types.
    return [
        (s, need)
        for s, need in needs.items()
        if need and not any(o < s and other >= need for o, other in needs.items())
    ]


def possible_counts(n: int, degree: int, *, most_nodes: int) -> Iterator[Counts]:
    """Count vectors that pass every condition, by rising number of nodes, those with most unknowns first."""
    types = orbit_types(n)
    sizes = [orbit_size(t) for t in types]
    conditions = _conditions(n, degree)
    for nodes in range(1, most_nodes + 1):
        found = []
        for counts in _compositions(sizes, nodes):
            if counts[0] > 1:
                continue  # there is one centre
            of = dict(zip(types, counts, strict=True))
            if all(sum(of[t] * unknowns(t) for t in s) >= need for s, need in conditions):
                found.append(tuple((t, c) for t, c in of.items() if c))
        yield from sorted(found, key=lambda cs: -sum(c * unknowns(t) for t, c in cs))


def _compositions(sizes: Sequence[int], total: int) -> Iterator[tuple[int, ...]]:
    if len(sizes) == 1:
        if total % sizes[0] == 0:
            yield (total // sizes[0],)
        return
    for c in range(total // sizes[-1], -1, -1):
        for rest in _compositions(sizes[:-1], total - c * sizes[-1]):
            yield (*rest, c)
