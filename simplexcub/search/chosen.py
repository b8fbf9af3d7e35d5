"""Nodes that the caller chooses: their coordinates are given, on the boundary too, and only their weights are unknown.

A chosen set is cut into orbits of the group of the search. Each becomes an orbit type of its own with one unknown, so
that counting, elimination and Newton's method treat it as any other, but it is never left out.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from simplexcub.errors import InputError
from simplexcub.symmetry import Group, OrbitType, distinct_permutations

SETS = ("vertices", "centre", "edge-midpoints")
_LARGEST_N = 8
_Node = tuple[Fraction, ...]


@dataclass(frozen=True)
class Chosen(OrbitType):
    """An orbit with given coordinates.

    Attributes
    ----------
    coordinates : tuple of Fraction
        Distinct coordinates, by label of `pattern`.
    stratum : OrbitType
        The type of the group that it belongs to, for the counting of unknowns.
    """

    coordinates: tuple[Fraction, ...]
    stratum: OrbitType

    @property
    def unknowns(self) -> int:
        """Its weight."""
        return 1


def stratum(type_: OrbitType) -> OrbitType:
    """The orbit type of the group in which an orbit counts."""
    return type_.stratum if isinstance(type_, Chosen) else type_


def chosen_orbits(include: Sequence[str], group: Group) -> tuple[Chosen, ...]:
    """The orbits that named sets of nodes fall into.

    Parameters
    ----------
    include : sequence of {"vertices", "centre", "edge-midpoints"}
    group : Group

    Raises
    ------
    InputError
        An unknown set, or N above 8.
    """
    n = group.n
    for name in include:
        if name not in SETS:
            raise InputError(f"include must list some of {', '.join(SETS)}", repr(name))
    if include and n > _LARGEST_N:
        raise InputError(f"N must be at most {_LARGEST_N} for nodes to be chosen", n)
    one, half, zero = Fraction(1), Fraction(1, 2), Fraction(0)
    shapes = {
        "vertices": (*[zero] * (n - 1), one),
        "centre": (Fraction(1, n),) * n,
        "edge-midpoints": (half, half, *[zero] * (n - 2)),
    }
    nodes: dict[_Node, None] = {}
    for name in include:
        values = tuple(dict.fromkeys(shapes[name]))
        labels = [values.index(x) for x in shapes[name]]
        nodes.update(dict.fromkeys(tuple(values[j] for j in order) for order in distinct_permutations(labels)))
    found, seen = [], set()
    for node in nodes:
        if node not in seen:
            orbit = {tuple(node[i] for i in g) for g in group.elements}
            seen |= orbit
            found.append(_orbit(sorted(orbit), group))
    return tuple(found)


def _orbit(images: list[_Node], group: Group) -> Chosen:
    """With its labels in the order of falling multiplicity, as the types of S_N have them, where the group is S_N."""
    for type_ in group.types:
        for image in images:
            if all(image[i] == image[type_.pattern.index(label)] for i, label in enumerate(type_.pattern)):
                values = tuple(dict.fromkeys(image))
                pattern = tuple(values.index(x) for x in image)
                if group.is_full and image != _descending(image):
                    continue
                return Chosen(pattern, len(images), values, type_)
    raise InputError("every chosen node must belong to an orbit type of the group", group.name)


def _descending(node: _Node) -> _Node:
    order = sorted(dict.fromkeys(node), key=lambda x: (-node.count(x), x))
    return tuple(x for x in order for _ in range(node.count(x)))
