"""How far the values of a ladder of rules can still be from the mean, judged by how fast they settle.

Let v_t be the value at degree t and δ_t = |v_t − v_s| / (t − s) the change per degree since the rung s before it.
Where δ_t falls like 1/t^q, what is missing after degree t is Σ_{r>t} δ_t (t/r)^q < δ_t t / (q − 1). The order q is the
smallest one that neighbouring steps show, kept between 2, which is what a kink gives, and 4, so that no run of luck is
extrapolated far. The last four steps all predict δ_t at that order, and the largest prediction counts: one accidental
agreement between neighbours does not pass for convergence. The outcome is doubled, and the rounding of the sum added.

This is an estimate and no bound: a function whose features fall between the points of every rule tried escapes it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import pairwise
from typing import NamedTuple

LOWEST_ORDER, HIGHEST_ORDER = 2.0, 4.0
STEPS = 4
FEWEST_STEPS = 3
SAFETY = 2.0


class Rung(NamedTuple):
    """What one rule of the ladder gave: its degree, the value, and the rounding error of the sum."""

    degree: int
    value: float
    rounding: float


def estimated_error(rungs: Sequence[Rung]) -> float:
    """Estimated |value − mean| of the last rung; inf for fewer than four rungs.

    Examples
    --------
    >>> rungs = [Rung(t, 1 + 1 / t**3, 0.0) for t in (3, 7, 15, 31)]
    >>> 1 < estimated_error(rungs) * 31**3 < 30
    True
    """
    if len(rungs) <= FEWEST_STEPS:
        return math.inf
    changes = [
        (after.degree, abs(after.value - before.value) / (after.degree - before.degree))
        for before, after in pairwise(rungs[-STEPS - 1 :])
    ]
    seen = [_order(*earlier, *later) for earlier, later in pairwise(changes)]
    order = min(HIGHEST_ORDER, max(LOWEST_ORDER, min(seen)))
    last = rungs[-1]
    change: float = max(delta * (t / last.degree) ** order for t, delta in changes)
    return SAFETY * change * last.degree / (order - 1) + last.rounding


def _order(s: int, earlier: float, t: int, later: float) -> float:
    """The q with later/earlier = (s/t)^q."""
    if later == 0:
        return HIGHEST_ORDER
    return math.log(earlier / later) / math.log(t / s) if earlier else LOWEST_ORDER
