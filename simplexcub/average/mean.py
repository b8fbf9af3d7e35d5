"""The mean of any function, by climbing a ladder of rules of rising degree until the estimated error is small enough.

The estimate is that of `simplexcub.average.convergence`.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np
from numpy.typing import NDArray

from simplexcub.average.convergence import STEPS, Rung, estimated_error
from simplexcub.average.exact import exact_mean
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.search import Progress, product_rule, solve
from simplexcub.table import load

PRODUCT_DEGREES = (1, 3, 5, 7, 11, 15, 23, 31, 47, 63, 95, 127, 191, 255)
SEARCHED_DEGREES = (1, 2, 3, 4)
SEARCHED_N = range(5, 8)  # below, products are cheap; above, listing the structures alone outlasts any budget
DIGITS = 30  # twice what float64 holds, since weights with a density in them are small before they are normalised


@dataclass(frozen=True)
class Mean:
    """A mean with what is known about its error.

    Attributes
    ----------
    value : float
    error : float
        Estimated bound on |value − E[f]|; 0 where the mean is exact, inf where too few rules were there to tell.
    evaluations : int
        Points at which f was evaluated.
    how : str
        What produced the value.
    exact : Fraction or None
        The mean itself, where the moments give it.
    """

    value: float
    error: float
    evaluations: int
    how: str
    exact: Fraction | None = None


def average(
    f: Callable[[NDArray[np.float64]], Any],
    measure: Measure,
    *,
    tol: float = 1e-6,
    budget: float = 60.0,
    progress: Callable[[Progress], None] | None = None,
) -> Mean:
    """The mean E[f], with an estimate of its error.

    Polynomials among the named functions are averaged exactly. For N = 2 the ladder consists of Gauss rules. For
    N ≥ 3 it is the rules that come with the package, then conical products, which cost more points but no search. For
    large N a few rules of low degree are searched, since products have thousands of points there.

    Parameters
    ----------
    f : callable
        Takes points, shape (M, N), and returns real values, shape (M,). See also
        :func:`simplexcub.average.functions.spectral_function`.
    measure : Measure
    tol : float
        Absolute tolerance; the climb ends as soon as the estimated error is no larger.
    budget : float
        Seconds after which no further rule is made.
    progress : callable, optional
        Called with a :class:`simplexcub.search.Progress` before each rule.

    Returns
    -------
    Mean
        With the best value there is, also where its error exceeds `tol`.

    Raises
    ------
    InputError
        `tol` is not positive; `f` returned another shape or a value that is not finite.
    NothingFound
        No rule at all could be had for the measure.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> mean = average(lambda x: x[:, 0] ** 4, flat(2))
    >>> abs(mean.value - 1 / 5) < 1e-15
    True
    """
    if not 0 < tol < math.inf:
        raise InputError("tol must be a positive number", tol)
    exact = exact_mean(f, measure)
    if exact is not None:
        return Mean(float(exact), 0.0, 0, "exact moments", exact)
    rungs: list[Rung] = []
    evaluations, how = 0, ""
    for rule in _ladder(measure, _Clock(budget, progress)):
        rungs.append(_evaluate(f, rule))
        evaluations += len(rule)
        how = f"{len(rungs)} rules of degree {rungs[0].degree} to {rule.degree}, the last by {rule.provenance.method}"
        if len(rungs) > STEPS and estimated_error(rungs) <= tol:
            break
    if not rungs:
        remedy = "Average f over points drawn by measure.sample instead."
        raise NothingFound(f"rule for {measure}", "N is too large for products and for the search", remedy)
    return Mean(rungs[-1].value, estimated_error(rungs), evaluations, how)


class _Clock:
    """What is left of the budget, and the way to tell the caller what is going on."""

    def __init__(self, budget: float, progress: Callable[[Progress], None] | None) -> None:
        self._start = time.monotonic()
        self._budget = budget
        self.progress = progress

    @property
    def left(self) -> float:
        return self._start + self._budget - time.monotonic()

    def say(self, text: str) -> None:
        if self.progress is not None:
            self.progress(Progress(text, self._budget - self.left))


def _evaluate(f: Callable[[NDArray[np.float64]], Any], rule: Rule) -> Rung:
    values = np.asarray(f(rule.nodes))
    if values.shape != (len(rule),) or not np.isrealobj(values):
        remedy = "f receives all points at once, shape (M, N); reduce over the last axis."
        raise InputError("f must return one real value per point", f"shape {values.shape}, {values.dtype}", remedy)
    if not np.all(np.isfinite(values)):
        k = int(np.argmin(np.isfinite(values)))
        raise InputError("f must be finite at every point", f"{values[k]} at {rule.nodes[k].tolist()}")
    size = float(rule.weights @ np.abs(values))
    return Rung(rule.degree, float(rule.weights @ values), 8 * float(np.finfo(np.float64).eps) * size)


def _ladder(measure: Measure, clock: _Clock) -> Iterator[Rule]:
    """Rules of strictly rising degree."""
    highest = 0
    for source in (_shipped, _searched, _products):
        for rule in source(measure, highest, clock):
            highest = rule.degree
            yield rule
            if clock.left <= 0:
                return


def _shipped(measure: Measure, above: int, clock: _Clock) -> Iterator[Rule]:
    if measure.N == 2:
        return  # Gauss rules of any degree cost nothing, and doubling degrees say more about convergence
    while True:
        clock.say(f"shipped rule above degree {above}")
        try:
            rule = load(measure, degree=above + 1)
        except NothingFound:
            return
        above = rule.degree
        yield rule


def _products(measure: Measure, above: int, clock: _Clock) -> Iterator[Rule]:
    for degree in PRODUCT_DEGREES:
        if degree > above:
            clock.say(f"product rule of degree {degree}")
            try:
                yield product_rule(measure, degree, digits=DIGITS)
            except NothingFound:
                return


def _searched(measure: Measure, above: int, clock: _Clock) -> Iterator[Rule]:
    if measure.N not in SEARCHED_N:
        return
    for degree in SEARCHED_DEGREES:
        if degree > above:
            try:
                yield solve(measure, degree, digits=DIGITS, budget=clock.left / 4, progress=clock.progress)
            except NothingFound:
                return
