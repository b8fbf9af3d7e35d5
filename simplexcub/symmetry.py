"""Permutation groups acting on the simplex: their orbit types and the nodes of an orbit.

An orbit type is a pattern of equal coordinates that the group cannot tell apart from more equality: the points fixed by
a stabiliser subgroup form one stratum, and every orbit lies in exactly one of them.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property, lru_cache
from itertools import pairwise

from simplexcub.errors import InputError
from simplexcub.moments.schur import distinct_permutations

__all__ = ["Group", "OrbitType", "Spectra", "distinct_permutations", "named_group", "orbit_size", "spectra"]

Permutation = tuple[int, ...]
NAMES = ("full", "alternating", "dihedral", "cyclic", "klein", "stabiliser", "product-A-B-…", "alpha", "none")
_MOST_ELEMENTS = 5040


@dataclass(frozen=True)
class OrbitType:
    """A kind of orbit: components with the same label in `pattern` are equal; the orbit has `size` nodes.

    Labels count from 0 in order of first appearance.
    """

    pattern: tuple[int, ...]
    size: int

    @cached_property
    def multiplicities(self) -> tuple[int, ...]:
        """How many components carry each label."""
        return tuple(self.pattern.count(j) for j in range(max(self.pattern) + 1))

    @property
    def unknowns(self) -> int:
        """Unknowns of one orbit: its weight and its free coordinates."""
        return len(self.multiplicities)


@dataclass(frozen=True)
class Group:
    """A subgroup of S_n, given by generators; components count from 0 and (g x)_i = x_{g(i)}."""

    name: str
    n: int
    generators: tuple[Permutation, ...]

    @cached_property
    def is_full(self) -> bool:
        return self.name == "full"

    @cached_property
    def elements(self) -> tuple[Permutation, ...]:
        """All elements, by closure under the generators."""
        identity = tuple(range(self.n))
        seen, fresh = {identity}, [identity]
        while fresh:
            new = {tuple(g[i] for i in h) for h in fresh for g in self.generators} - seen
            seen |= new
            fresh = list(new)
            if len(seen) > _MOST_ELEMENTS:
                raise InputError(f"the group must have at most {_MOST_ELEMENTS} elements", self.name)
        return tuple(sorted(seen))

    @cached_property
    def types(self) -> list[OrbitType]:
        """Every orbit type, smallest orbit first."""
        if self.is_full:
            blocks = [tuple(j for j, m in enumerate(p) for _ in range(m)) for p in _partitions(self.n, self.n)]
            found = [OrbitType(p, orbit_size(OrbitType(p, 1).multiplicities)) for p in blocks]
        else:
            found = self._strata()
        return sorted(found, key=lambda type_: (type_.size, type_.unknowns, type_.pattern))

    def _strata(self) -> list[OrbitType]:
        found: dict[tuple[int, ...], OrbitType] = {}
        for pattern in _set_partitions(self.n):
            images = [_relabel(tuple(pattern[i] for i in g)) for g in self.elements]
            if min(images) != pattern:
                continue  # one representative per class under the group
            stabiliser = [g for g in self.elements if all(pattern[i] == p for i, p in zip(g, pattern, strict=True))]
            merged = _orbit_labels(stabiliser, self.n)
            if merged == pattern:
                found[pattern] = OrbitType(pattern, len(self.elements) // len(stabiliser))
        return list(found.values())

    def arrangements(self, type_: OrbitType) -> list[tuple[int, ...]]:
        """The label patterns of all nodes of an orbit; shape (size, n)."""
        if self.is_full:
            return list(distinct_permutations(type_.pattern))
        return sorted({tuple(type_.pattern[i] for i in g) for g in self.elements})


@dataclass(frozen=True)
class Spectra(Group):
    """S_N for functions of the spectrum: one representative stands for each orbit, and counts as one node.

    The generic type, all coordinates apart, is the only one listed: it has the most unknowns at the same price. Nothing
    here lists permutations or partitions, so N may be large.
    """

    @cached_property
    def is_full(self) -> bool:
        return True

    @cached_property
    def types(self) -> list[OrbitType]:
        return [OrbitType(tuple(range(self.n)), 1)]

    def arrangements(self, type_: OrbitType) -> list[tuple[int, ...]]:
        return [type_.pattern]


def spectra(n: int) -> Spectra:
    """S_n on representatives of its orbits."""
    return Spectra("spectra", n, named_group("full", n).generators)


@lru_cache(maxsize=128)
def named_group(name: str, n: int, alpha: tuple[object, ...] = ()) -> Group:
    """The group that `--symmetry` names, on n components.

    ``full`` S_n; ``alternating`` even permutations; ``dihedral`` and ``cyclic`` of the components in their order;
    ``klein`` double transpositions (n = 4); ``stabiliser`` all that fix the last component; ``product-2-1`` and the
    like, permutations within consecutive blocks; ``alpha``, permutations among components of equal `alpha`; ``none``.

    Raises
    ------
    InputError
        An unknown name, or one that does not fit n.
    """
    turn = (*range(1, n), 0)
    flip = tuple(reversed(range(n)))
    if name == "full":
        return Group(name, n, (_swap(n, 0, 1), turn))
    if name == "none":
        return Group(name, n, ())
    if name == "cyclic":
        return Group(name, n, (turn,))
    if name == "dihedral":
        return Group(name, n, (turn, flip))
    if name == "alternating":
        cycles = tuple(_cycle3(n, 0, 1, k) for k in range(2, n))
        return Group(name, n, cycles)
    if name == "klein":
        if n != 4:
            raise InputError("symmetry klein needs N = 4", n)
        return Group(name, n, ((1, 0, 3, 2), (2, 3, 0, 1)))
    if name == "stabiliser":
        return Group(name, n, _block_swaps(n, [list(range(n - 1))]))
    if name == "alpha":
        labels = alpha or (0,) * n
        blocks = [[i for i, a in enumerate(labels) if a == value] for value in dict.fromkeys(labels)]
        return Group(name, n, _block_swaps(n, blocks))
    if name.startswith("product-"):
        return Group(name, n, _block_swaps(n, _parse_blocks(name, n)))
    raise InputError(f"symmetry must be one of {', '.join(NAMES)}", name)


def _parse_blocks(name: str, n: int) -> list[list[int]]:
    try:
        sizes = [int(text) for text in name.split("-")[1:]]
    except ValueError:
        sizes = []
    if not sizes or min(sizes) < 1 or sum(sizes) != n:
        raise InputError(f"the block sizes of a product must be positive and sum to N = {n}", name)
    starts = [sum(sizes[:i]) for i in range(len(sizes))]
    return [list(range(s, s + size)) for s, size in zip(starts, sizes, strict=True)]


def _block_swaps(n: int, blocks: list[list[int]]) -> tuple[Permutation, ...]:
    return tuple(_swap(n, a, b) for block in blocks for a, b in pairwise(block))


def _swap(n: int, a: int, b: int) -> Permutation:
    order = list(range(n))
    order[a], order[b] = b, a
    return tuple(order)


def _cycle3(n: int, a: int, b: int, c: int) -> Permutation:
    order = list(range(n))
    order[a], order[b], order[c] = b, c, a
    return tuple(order)


def orbit_size(multiplicities: tuple[int, ...]) -> int:
    """Number of nodes in an S_N orbit whose coordinates take len(multiplicities) distinct values.

    Examples
    --------
    >>> orbit_size((2, 1))
    3
    """
    size = math.factorial(sum(multiplicities))
    for m in multiplicities:
        size //= math.factorial(m)
    return size


def _partitions(n: int, largest: int) -> Iterator[tuple[int, ...]]:
    if n == 0:
        yield ()
    for part in range(min(n, largest), 0, -1):
        for rest in _partitions(n - part, part):
            yield (part, *rest)


def _set_partitions(n: int) -> Iterator[tuple[int, ...]]:
    """Every partition of n components into blocks, as labels in order of first appearance."""
    if n == 0:
        yield ()
        return
    for head in _set_partitions(n - 1):
        for label in range(max(head, default=-1) + 2):
            yield (*head, label)


def _relabel(labels: tuple[int, ...]) -> tuple[int, ...]:
    order: dict[int, int] = {}
    return tuple(order.setdefault(label, len(order)) for label in labels)


def _orbit_labels(elements: list[Permutation], n: int) -> tuple[int, ...]:
    """The partition of the components into orbits of a subgroup given by all its elements."""
    return _relabel(tuple(min(g[i] for g in elements) for i in range(n)))
