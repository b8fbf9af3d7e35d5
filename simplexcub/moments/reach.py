"""Limits that keep a question from running for ever: how many partitions or terms a formula may list."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import accumulate

from simplexcub.errors import InputError
from simplexcub.moments.partitions import count_partitions

MOST_SHAPES = 20_000


def check_reach(degree: int, n: int, most: int = MOST_SHAPES) -> None:
    """Refuse a degree whose partitions are too many to list.

    Raises
    ------
    InputError
        More than `most` partitions of `degree` into at most N parts.
    """
    # the count grows with the degree, and from three parts on it passes the limit well before degree 1000
    if count_partitions(min(degree, 1000) if n > 2 else degree, n) > most:
        raise InputError(
            f"the degree must have at most {most} partitions into {n} parts or fewer",
            f"degree {degree}",
            "Ask for a lower degree.",
        )


def check_strips(parts: Sequence[int], n: int, most: int = MOST_SHAPES) -> None:
    """Refuse power sums that expand into too many Schur functions, counting at most N border strips per part.

    Raises
    ------
    InputError
        More than `most` shapes.
    """
    shapes = 1
    for length in accumulate(parts):
        shapes *= min(length, n)
        if shapes > most:
            check_reach(sum(parts), n, most)
            return
