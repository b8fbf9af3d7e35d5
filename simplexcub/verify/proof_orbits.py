"""The structure of a printed node set, found on its decimals: its symmetry group, its orbits, its free coordinates.

Nothing that a table claims is used. A permutation g belongs to the group G if it leaves the measure unchanged and maps
the set of printed (node, weight) pairs to itself, digit for digit. In a node x the coordinates that some g ∈ G with
g x = x carries into each other stay equal in every rule with this symmetry; they are one *block*. A block that is
printed as exactly 0 stays 0. Of the others one is given by Σ λ_i = 1, and the rest are free.
"""

from __future__ import annotations

import itertools
import math
from collections import Counter, defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from simplexcub.errors import NothingFound
from simplexcub.measures import Measure
from simplexcub.rule import Space
from simplexcub.symmetry import orbit_size
from simplexcub.verify.printed import Printed

Node = tuple[int, ...]
Permutation = tuple[int, ...]

MOST_ENUMERATED = 6  # components up to which all N! permutations are tried


@dataclass(frozen=True)
class Orbit:
    """One orbit of the printed nodes.

    Attributes
    ----------
    first : int
        Position of its first node in the table.
    weight : int
        Printed weight of that node, in the table's units; in space ``symmetric`` it is that of the whole orbit.
    values, multiplicities : tuple of int
        Printed value of each block, and how many coordinates of a node it fills.
    images : tuple of tuple of int
        The blocks that stand in each coordinate, for every node of the orbit; empty for the full group.
    size : int
        Nodes in the orbit.
    dependent : int
        The block that follows from Σ λ_i = 1.
    free : tuple of int
        The blocks that are unknowns.
    """

    first: int
    weight: int
    values: tuple[int, ...]
    multiplicities: tuple[int, ...]
    images: tuple[tuple[int, ...], ...]
    size: int
    dependent: int
    free: tuple[int, ...]


@dataclass(frozen=True)
class Structure:
    """A node set with its group: the name, whether it is all of S_N, its elements otherwise, and the orbits."""

    group: str
    full: bool
    permutations: tuple[Permutation, ...]
    orbits: tuple[Orbit, ...]


def find_structure(printed: Printed, measure: Measure, space: Space) -> Structure:
    """The largest group under which the printed set and the measure are invariant, and the orbits of the nodes."""
    if space == "symmetric":
        orbits = tuple(
            _full_orbit(k, node, w) for k, (node, w) in enumerate(zip(printed.nodes, printed.weights, strict=True))
        )
        return Structure("full", True, (), orbits)
    if space == "ordered":
        # Components that are printed equal stay so: the node keeps to its wall of the chamber.
        single = tuple(
            _single(k, node, w) for k, (node, w) in enumerate(zip(printed.nodes, printed.weights, strict=True))
        )
        return Structure("none", False, (tuple(range(measure.N)),), single)
    n = len(printed.nodes[0])
    if measure.is_symmetric and _is_full(printed):
        firsts: dict[Node, int] = {}
        for k, node in enumerate(printed.nodes):
            firsts.setdefault(tuple(sorted(node)), k)
        whole = tuple(_full_orbit(k, printed.nodes[k], printed.weights[k]) for k in firsts.values())
        return Structure("full", True, (), whole)
    group = _group(printed, measure)
    return Structure(_name(group, n), False, group, tuple(_orbits(printed, group)))


def _is_full(printed: Printed) -> bool:
    """Whether the different orderings of every node are all there, once each and with one weight."""
    listed: dict[Node, Counter[int]] = defaultdict(Counter)
    for node, weight in zip(printed.nodes, printed.weights, strict=True):
        listed[tuple(sorted(node))][weight] += 1
    if len(set(printed.nodes)) < len(printed.nodes):
        return False
    return all(
        len(weights) == 1 and weights.total() == orbit_size(tuple(Counter(node).values()))
        for node, weights in listed.items()
    )


def _full_orbit(first: int, node: Node, weight: int) -> Orbit:
    counts = Counter(node)
    values, multiplicities = tuple(counts), tuple(counts.values())
    return _orbit(first, weight, values, multiplicities, (), orbit_size(multiplicities))


def _single(first: int, node: Node, weight: int) -> Orbit:
    counts = Counter(node)
    values = tuple(counts)
    image = tuple(values.index(v) for v in node)
    return _orbit(first, weight, values, tuple(counts.values()), (image,), 1)


def _orbit(
    first: int,
    weight: int,
    values: tuple[int, ...],
    multiplicities: tuple[int, ...],
    images: tuple[tuple[int, ...], ...],
    size: int,
) -> Orbit:
    nonzero = [b for b, v in enumerate(values) if v] or [0]
    dependent = max(nonzero, key=lambda b: values[b])
    free = tuple(b for b in nonzero if b != dependent)
    return Orbit(first, weight, values, multiplicities, images, size, dependent, free)


def _group(printed: Printed, measure: Measure) -> tuple[Permutation, ...]:
    n = len(printed.nodes[0])
    identity = tuple(range(n))
    if n > MOST_ENUMERATED or len(set(printed.nodes)) < len(printed.nodes):
        return (identity,)
    listed = dict(zip(printed.nodes, printed.weights, strict=True))
    labels = _labels(measure)

    def belongs(g: Permutation) -> bool:
        if tuple(labels[i] for i in g) != labels:
            return False
        return all(listed.get(tuple(node[i] for i in g)) == weight for node, weight in listed.items())

    return tuple(g for g in itertools.permutations(range(n)) if belongs(g))


def _labels(measure: Measure) -> tuple[object, ...]:
    """One label per component; the measure is invariant under permutations among equal labels."""
    if measure.is_symmetric:
        return (0,) * measure.N
    try:
        return tuple(measure.over_dirichlet()[0])
    except NothingFound:
        return tuple(range(measure.N))


def _orbits(printed: Printed, group: Sequence[Permutation]) -> Iterable[Orbit]:
    seen: set[Node] = set()
    for k, (node, weight) in enumerate(zip(printed.nodes, printed.weights, strict=True)):
        if node in seen and len(group) > 1:
            continue
        blocks = _blocks(node, group)
        values = tuple(node[blocks.index(b)] for b in range(max(blocks) + 1))
        multiplicities = tuple(blocks.count(b) for b in range(len(values)))
        moved = {tuple(node[i] for i in g): tuple(blocks[i] for i in g) for g in group}
        seen.update(moved)
        yield _orbit(k, weight, values, multiplicities, tuple(moved.values()), len(moved))


def _blocks(node: Node, group: Sequence[Permutation]) -> tuple[int, ...]:
    """The block of each coordinate: positions joined by a permutation that leaves the node unchanged.

    Zeros form blocks of their own kind, joined since all of them stay 0.
    """
    n = len(node)
    label = list(range(n))
    zeros = [i for i in range(n) if node[i] == 0]
    joined = [(zeros[0], i) for i in zeros[1:]]
    for g in group:
        if all(node[g[i]] == node[i] for i in range(n)):
            joined += list(enumerate(g))
    for i, j in joined:
        a, b = label[i], label[j]
        label = [a if x == b else x for x in label]
    order = list(dict.fromkeys(label))
    return tuple(order.index(x) for x in label)


def _name(group: Sequence[Permutation], n: int) -> str:
    order = len(group)
    shift = (*range(1, n), 0)
    if order == 1:
        return "none"
    if order == math.factorial(n):
        return "full"
    if order == n and shift in group:
        return "cyclic"
    if 2 * order == math.factorial(n) and all(_is_even(g) for g in group):
        return "alternating"
    if order == math.factorial(n - 1) and any(all(g[i] == i for g in group) for i in range(n)):
        return "stabiliser"
    return f"a group of order {order}"


def _is_even(g: Permutation) -> bool:
    return sum(a > b for a, b in itertools.combinations(g, 2)) % 2 == 0
