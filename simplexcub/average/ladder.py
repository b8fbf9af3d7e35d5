"""The ladder: shipped rules of rising degree, or solved ones where none is shipped.

`_sources` is the one place that says which tables serve which functions. A rule for every polynomial serves symmetric
functions too: its nodes are then collapsed to one representative per orbit, largest component first.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from functools import lru_cache

import numpy as np

from simplexcub.average.integrand import FloatArray, Space
from simplexcub.errors import NothingFound
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.search import Progress, solve
from simplexcub.table import load

GROWTH = 1.35  # from one degree to the next
SOLVED_DEGREES = {2: (1, 3, 7, 11, 15, 21, 31)}
SEARCHED_DEGREES = (1, 2, 3, 4, 5)
SEARCHED_N = range(3, 8)  # above, listing the structures alone outlasts any budget
DIGITS = 30


class Step:
    """A rule made ready for a space: points (M, N), weights (M,), and where it came from."""

    def __init__(self, degree: int, points: FloatArray, weights: FloatArray, origin: str) -> None:
        self.degree, self.points, self.weights, self.origin = degree, points, weights, origin


def ladder(
    measure: Measure, space: Space, *, budget: float = 0.0, progress: Callable[[Progress], None] | None = None
) -> Iterator[Step]:
    """Rules of strictly rising degree that serve functions of this space.

    Parameters
    ----------
    measure : Measure
    space : {"all", "symmetric", "ordered"}
    budget : float
        Seconds in which rules are searched where none is shipped; Gauss rules for N = 2 need no search.
    progress : callable, optional
        Called by the search.
    """
    degree, wanted = 0, 1
    while True:
        step = _shipped(measure, space, wanted)
        if step is None:
            break
        yield step
        degree, wanted = step.degree, _next(step.degree)
    if degree or "all" not in _sources(space):
        return
    if measure.N == 2:
        for wanted in SOLVED_DEGREES[2]:
            yield _prepared(solve(measure, wanted, digits=DIGITS), space)
    elif budget > 0 and measure.N in SEARCHED_N:
        for wanted in SEARCHED_DEGREES:
            try:
                share = budget / len(SEARCHED_DEGREES)
                rule = solve(measure, wanted, digits=DIGITS, budget=share, progress=progress)
            except NothingFound:
                return
            yield _prepared(rule, space)


def _sources(space: Space) -> tuple[Space, ...]:
    """Spaces of the tables that serve a function of `space`, the cheapest first."""
    return {"all": ("all",), "symmetric": ("symmetric", "all"), "ordered": ("ordered",)}[space]  # type: ignore[return-value]


@lru_cache(maxsize=256)
def _shipped(measure: Measure, space: Space, degree: int) -> Step | None:
    for source in _sources(space):
        try:
            return _prepared(load(measure, degree=degree, space=source), space)
        except NothingFound:
            continue
    return None


def _prepared(rule: Rule, space: Space) -> Step:
    points, weights = rule.nodes, rule.weights
    if space != "all" and rule.space == "all":
        ordered = -np.sort(-points, axis=1)
        _, first, which = np.unique(np.round(ordered, 12), axis=0, return_index=True, return_inverse=True)
        weights = np.asarray(np.bincount(which.ravel(), weights=weights), dtype=np.float64)
        points = ordered[first]
        points.flags.writeable = weights.flags.writeable = False
    return Step(rule.degree, points, weights, rule.provenance.method)


def _next(degree: int) -> int:
    return max(degree + 1, round(degree * GROWTH))
