"""Sampling with exact moments as control variates: the way out where N is large or f is rough.

A least-squares fit of f by functions whose means are known exactly takes most of the variance away: power sums for
symmetric measures, components and their products otherwise. The fit is made on the first draw and used on all later
ones, so it adds no bias. The error is three standard errors, which a normal law stays within in 99.7 % of cases.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from itertools import combinations_with_replacement
from typing import Any

import numpy as np
from numpy.typing import NDArray

from simplexcub.average.integrand import Integrand, Space
from simplexcub.errors import InputError
from simplexcub.measures import Measure

FloatArray = NDArray[np.float64]
FIRST = 4096
DRAW = 16_384
STANDARD_ERRORS = 3.0
FUTILE = 200_000  # draws after which a tolerance that all of them would miss is given up
MOST_FEATURES = 60
_PARTS = ((2,), (3,), (4,), (2, 2), (5,), (3, 2))


@dataclass(frozen=True)
class Sampled:
    """Mean, error, number of draws, and whether the tolerance was found out of reach."""

    value: NDArray[Any]
    error: FloatArray
    draws: int
    given_up: bool


def sampled_mean(
    integrand: Integrand,
    measure: Measure,
    space: Space,
    *,
    tol: float,
    useful: float = math.inf,
    seed: int = 0,
    report: Callable[[int, float], None],
) -> Sampled | None:
    """The mean by sampling, until the error is within `tol` or cannot be; None where too few evaluations are left.

    What would still be above `useful`, an error that was reached before, when all evaluations are spent is given up at
    once; what would miss the tolerance, after `FUTILE` draws.
    """
    rng = np.random.default_rng(seed)
    first = min(FIRST, integrand.left // 3)
    if first < 64:
        return None
    features = _Features(measure)

    def draw(count: int) -> tuple[NDArray[Any], FloatArray]:
        points = measure.sample(rng, count)
        known = features(points)
        if space != "all":
            points = -np.sort(-points, axis=1)
        elif measure.is_symmetric:  # samplers give eigenvalues sorted
            points = rng.permuted(points, axis=1)
        return integrand(points), known

    values, known = draw(first)
    coefficients, *_ = np.linalg.lstsq(np.column_stack([np.ones(first), known]), values, rcond=None)
    slopes = coefficients[1:]
    count, total, squares = 0, np.zeros(values.shape[1], dtype=values.dtype), np.zeros(values.shape[1])
    centre = values.mean(axis=0) - known.mean(axis=0) @ slopes
    given_up, error = False, np.full(values.shape[1], math.inf)
    while (size := min(DRAW, integrand.left)) >= 64 and not given_up and error.max() > tol:
        values, known = draw(size)
        rest = values - known @ slopes - centre
        count += size
        total = total + rest.sum(axis=0)
        squares = squares + (np.abs(rest) ** 2).sum(axis=0)
        error = _error(count, total, squares)
        report(first + count, float(error.max()))
        at_end = float(error.max()) * math.sqrt(count / (count + integrand.left))
        given_up = error.max() > tol and (at_end > useful or (count >= FUTILE and at_end > tol))
    return Sampled(centre + total / max(count, 1), error, first + count, given_up)


def _error(count: int, total: NDArray[Any], squares: FloatArray) -> FloatArray:
    variance = np.maximum(squares / count - np.abs(total / count) ** 2, 0.0)
    return np.asarray(STANDARD_ERRORS * np.sqrt(variance / (count - 1)))


class _Features:
    """Functions of the points with mean 0."""

    def __init__(self, measure: Measure) -> None:
        self.parts: list[tuple[int, ...]] = []
        self.monomials: list[tuple[int, ...]] = []
        means = []
        if measure.is_symmetric:
            for parts in _PARTS:
                try:
                    means.append(float(measure.power_sum_moment(parts)))
                except InputError:  # beyond the reach of the measure's formulas
                    continue
                self.parts.append(parts)
        else:
            for degree in (1, 2):
                for picks in combinations_with_replacement(range(measure.N - 1), degree):
                    if len(self.monomials) < MOST_FEATURES:
                        exponents = tuple(picks.count(i) for i in range(measure.N))
                        self.monomials.append(exponents)
                        means.append(float(measure.moment(exponents)))
        self.means = np.array(means)

    def __call__(self, points: FloatArray) -> FloatArray:
        powers = {k: (points**k).sum(axis=1) for parts in self.parts for k in parts}
        columns = [np.prod([powers[k] for k in parts], axis=0) for parts in self.parts]
        columns += [np.prod(points ** np.array(exponents), axis=1) for exponents in self.monomials]
        return np.asarray(np.column_stack(columns) - self.means)
