"""Permutations acting on the simplex: orbit types of S_N and the nodes of an orbit."""

from __future__ import annotations

import math
from collections.abc import Iterator

from simplexcub.moments.schur import distinct_permutations

__all__ = ["distinct_permutations", "orbit_size", "orbit_types"]


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


def orbit_types(n: int) -> list[tuple[int, ...]]:
    """The types of S_N orbits, as partitions of N by multiplicity of equal coordinates, smallest orbit first.

    Examples
    --------
    >>> orbit_types(3)
    [(3,), (2, 1), (1, 1, 1)]
    """
    return sorted(_partitions(n, n), key=lambda type_: (orbit_size(type_), len(type_)))


def _partitions(n: int, largest: int) -> Iterator[tuple[int, ...]]:
    if n == 0:
        yield ()
    for part in range(min(n, largest), 0, -1):
        for rest in _partitions(n - part, part):
            yield (part, *rest)
