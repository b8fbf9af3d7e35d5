"""How far the values of a sequence of rules can still be from the mean, judged by how fast they settle.

Ladder (`estimated_error`). Let v_t be the value at degree t and δ_t = |v_t − v_s| / (t − s) the change per degree since
the rung s before. Where δ_t falls like 1/t^q, what is missing after degree t is Σ_{r>t} δ_t (t/r)^q < δ_t t / (q − 1).
The order q is the smallest one that neighbouring steps show, kept between 2, which is what a kink gives, and 8, so that
no run of luck is extrapolated far. The last four steps all predict δ_t at that order, and the largest prediction
counts: one accidental agreement between neighbours does not pass for convergence. The outcome is doubled, and the
rounding of the sum added.

Products (`settling_error`). Nodes per axis grow by a fifth to a half from rule to rule, and inside the cube the
integrand is as smooth as f, so the changes Δ fall geometrically or faster. ρ is the slowest of the last three ratios of
changes, kept above `FASTEST`. The last changes, brought down by ρ as often as there were steps since, all predict the
present one, and the largest Δ counts; what is missing is put at Δ ρ / (1 − ρ), doubled, with a ρ there no smaller than
an error ∝ n^{−6} would show. Where ρ is above `STALLED` there is no such sum, and the error is ten times the larger of
the last two changes.

These are estimates and no bounds: a function whose features fall between the points of every rule tried escapes them.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from itertools import pairwise
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

LOWEST_ORDER, HIGHEST_ORDER = 2.0, 8.0
STEPS = 4
FEWEST_STEPS = 3
SAFETY = 2.0
FASTEST, STALLED = 0.05, 0.7
ALGEBRAIC = 6.0
SLOW = 0.5


class Rung(NamedTuple):
    """What one rule gave: its degree or number of nodes per axis, the value, and the rounding error of the sum."""

    degree: int
    value: Any
    rounding: Any


def estimated_error(rungs: Sequence[Rung]) -> float:
    """Estimated |value − mean| of the last rung of a ladder; inf for fewer than four rungs.

    Examples
    --------
    >>> rungs = [Rung(t, 1 + 1 / t**3, 0.0) for t in (3, 7, 15, 31)]
    >>> 1 < estimated_error(rungs) * 31**3 < 30
    True
    """
    if len(rungs) <= FEWEST_STEPS:
        return math.inf
    changes = [
        (after.degree, max(0.0, abs(after.value - before.value) - after.rounding) / (after.degree - before.degree))
        for before, after in pairwise(rungs[-STEPS - 1 :])
    ]
    seen = [_order(*earlier, *later) for earlier, later in pairwise(changes)]
    order = min(HIGHEST_ORDER, max(LOWEST_ORDER, min(seen)))
    last = rungs[-1]
    change: float = max(delta * (t / last.degree) ** order for t, delta in changes)
    return float(SAFETY * change * last.degree / (order - 1) + last.rounding)


def settling_error(rungs: Sequence[Rung]) -> float:
    """Estimated |value − mean| of the last of a sequence of products; inf for fewer than four.

    Examples
    --------
    >>> rungs = [Rung(n, 1 + 0.1**n, 0.0) for n in (3, 4, 6, 8)]
    >>> 0.1**8 <= settling_error(rungs) < 0.1**4
    True
    """
    if len(rungs) <= FEWEST_STEPS:
        return math.inf
    changes = [float(abs(b.value - a.value)) for a, b in pairwise(rungs[-STEPS - 1 :])]
    rounding = float(rungs[-1].rounding)
    if max(changes[-2:]) <= rounding:
        return 4 * rounding
    rates = [b / a if a > 0 else 1.0 for a, b in pairwise(changes)]
    seen = max(FASTEST, *rates)
    rate = max(seen, (rungs[-2].degree / rungs[-1].degree) ** ALGEBRAIC)
    if rate > STALLED:
        return 10 * max(changes[-2:]) + rounding
    change = max(delta * seen**since for since, delta in enumerate(reversed(changes)))
    return float(SAFETY * change * rate / (1 - rate) + rounding)


def has_stalled(rungs: Sequence[Rung]) -> bool:
    """Whether the changes between products shrank by less than `SLOW` per step over the last three steps."""
    if len(rungs) <= STEPS:
        return False
    changes = [float(np.abs(b.value - a.value).max()) for a, b in pairwise(rungs[-STEPS - 1 :])]
    return changes[-1] > SLOW ** (STEPS - 1) * changes[0] and changes[-1] > float(np.max(rungs[-1].rounding))


def per_component(estimate: Callable[[Sequence[Rung]], float], rungs: Sequence[Rung]) -> NDArray[np.float64]:
    """The estimate for each component of values of shape (C,)."""
    count = len(rungs[0].value) if rungs else 1
    return np.array([estimate([Rung(r.degree, r.value[c], r.rounding[c]) for r in rungs]) for c in range(count)])


def _order(s: int, earlier: float, t: int, later: float) -> float:
    """The q with later/earlier = (s/t)^q."""
    if later == 0:
        return HIGHEST_ORDER
    return math.log(earlier / later) / math.log(t / s) if earlier else LOWEST_ORDER
