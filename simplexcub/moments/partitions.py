"""Partitions and multisets: the index sets of symmetric functions.

A partition is a tuple of positive integers, largest first; the empty tuple is the partition of 0.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from functools import lru_cache


def partitions(total: int, most_parts: int, largest: int | None = None) -> Iterator[tuple[int, ...]]:
    """Partitions of `total` into at most `most_parts` parts, in reverse lexicographic order.

    Examples
    --------
    >>> list(partitions(4, 2))
    [(4,), (3, 1), (2, 2)]
    """
    if total == 0:
        yield ()
        return
    if most_parts == 0:
        return
    top = total if largest is None else min(total, largest)
    for part in range(top, 0, -1):
        if part * most_parts < total:
            return
        for rest in partitions(total - part, most_parts - 1, part):
            yield (part, *rest)


@lru_cache(maxsize=65536)
def count_partitions(total: int, most_parts: int) -> int:
    """How many partitions :func:`partitions` lists, without listing them.

    Examples
    --------
    >>> count_partitions(100, 4)
    8037
    """
    if most_parts <= 2:
        return (total // 2 if most_parts == 2 else 0) + (1 if most_parts or not total else 0)
    ways = [1] + [0] * total
    for part in range(1, min(most_parts, total) + 1):
        for size in range(part, total + 1):
            ways[size] += ways[size - part]
    return ways[total]


def orderings(exponents: Sequence[int], places: int | None = None) -> int:
    """Number of different ways to write the non-zero `exponents` over `places` positions.

    Examples
    --------
    >>> orderings((2, 1, 0)), orderings((1, 1), places=4)
    (6, 6)
    """
    parts = [e for e in exponents if e]
    count = math.perm(len(exponents) if places is None else places, len(parts))
    for part in set(parts):
        count //= math.factorial(parts.count(part))
    return count


def distinct_permutations(items: Sequence[int]) -> Iterator[tuple[int, ...]]:
    """Every different ordering of a multiset once, in lexicographic order.

    Examples
    --------
    >>> list(distinct_permutations((1, 0, 0)))
    [(0, 0, 1), (0, 1, 0), (1, 0, 0)]
    """
    order = sorted(items)
    while True:
        yield tuple(order)
        i = len(order) - 2
        while i >= 0 and order[i] >= order[i + 1]:
            i -= 1
        if i < 0:
            return
        j = len(order) - 1
        while order[j] <= order[i]:
            j -= 1
        order[i], order[j] = order[j], order[i]
        order[i + 1 :] = reversed(order[i + 1 :])


def set_partitions(items: tuple[int, ...]) -> Iterator[list[tuple[int, ...]]]:
    """Every way to split `items`, taken as different, into blocks.

    Examples
    --------
    >>> list(set_partitions((2, 3)))
    [[(2,), (3,)], [(2, 3)]]
    """
    if not items:
        yield []
        return
    first, rest = items[0], items[1:]
    for blocks in set_partitions(rest):
        yield [(first,), *blocks]
        for i, block in enumerate(blocks):
            yield [*blocks[:i], (first, *block), *blocks[i + 1 :]]
