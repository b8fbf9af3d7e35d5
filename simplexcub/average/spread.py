"""More than the mean: variances, covariances, central moments and the distribution function of several f.

All means come from one set of evaluations: with pilot values c_i, the products of f_i − c_i up to the wanted order are
averaged together, and the central moments follow from theirs. The errors follow from those of the means by the
derivative of that step.

The distribution function is the mean of a jump, which rules and cells see poorly, so it is sampled, and its error is
three standard errors of a binomial law, (F (1 − F)/n)^{1/2}, with one success and one failure added so that it is never
0: with 10^5 samples, no better than 0.005 in the middle.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations_with_replacement
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from simplexcub.average.integrand import Function, Space
from simplexcub.average.mean import MAX_EVALUATIONS, average
from simplexcub.errors import InputError
from simplexcub.measures import Measure, Ordered

FloatArray = NDArray[np.float64]
HIGHEST_ORDER = 8
MOST_FUNCTIONS = 20
PILOTS = 64
SAMPLES = 100_000
STANDARD_ERRORS = 3.0


@dataclass(frozen=True)
class Distribution:
    """What one set of evaluations says about several functions; each figure with its estimated error.

    Attributes
    ----------
    names : tuple of str
        The functions, in the order of all arrays.
    mean, mean_error : ndarray, shape (n,)
    covariance, covariance_error : ndarray, shape (n, n)
        Variances on the diagonal.
    moments, moments_error : ndarray, shape (orders, n)
        Central moments of order 2, 3, … of each function.
    evaluations : int
    how : str
    reason : str
        Why the tolerance was not met for all means that went in; empty where it was.
    cdf, cdf_error : ndarray, shape (n, points)
        P(f ≤ point) by sampling, where points were given.
    samples : int
        Samples that went into `cdf`.
    """

    names: tuple[str, ...]
    mean: FloatArray
    mean_error: FloatArray
    covariance: FloatArray
    covariance_error: FloatArray
    moments: FloatArray
    moments_error: FloatArray
    evaluations: int
    how: str
    reason: str
    cdf: FloatArray
    cdf_error: FloatArray
    samples: int

    @property
    def variance(self) -> FloatArray:
        """Variances, shape (n,)."""
        return np.diag(self.covariance)

    @property
    def variance_error(self) -> FloatArray:
        """Estimated errors of the variances, shape (n,)."""
        return np.diag(self.covariance_error)


def distribution(
    functions: Function | Sequence[Function] | Mapping[str, Function],
    measure: Measure,
    *,
    orders: int = 2,
    points: Sequence[float] = (),
    samples: int = SAMPLES,
    tol: float = 1e-8,
    space: Literal["auto", "all", "symmetric", "ordered"] = "auto",
    max_evaluations: int = MAX_EVALUATIONS,
    seed: int = 0,
) -> Distribution:
    """Means, covariances and central moments of real functions, from one set of evaluations.

    Parameters
    ----------
    functions : callable, sequence or mapping of callables
        Each takes points, shape (M, N), and returns real values, shape (M,).
    measure : Measure
    orders : int
        Highest central moment, 2 to 8.
    points : sequence of float
        Where the distribution functions are wanted; they cost `samples` evaluations more.
    samples : int
        For the distribution functions.
    tol, space, max_evaluations, seed
        As for :func:`simplexcub.average.mean.average`; the tolerance is that of every product of deviations.

    Raises
    ------
    InputError
        No functions, too many, an order out of range; as for `average`.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> found = distribution(lambda x: (x**2).sum(axis=1), flat(2))
    >>> bool(abs(found.variance[0] - 1 / 45) < found.variance_error[0] + 1e-12)
    True
    """
    named = _named(functions)
    if isinstance(orders, bool) or not isinstance(orders, int) or not 2 <= orders <= HIGHEST_ORDER:
        raise InputError(f"orders must be an integer from 2 to {HIGHEST_ORDER}", orders)
    if isinstance(samples, bool) or not isinstance(samples, int) or samples < 2:
        raise InputError("samples must be an integer of at least 2", samples)
    at = np.asarray(points, dtype=np.float64)
    if at.ndim != 1 or not np.isfinite(at).all():
        raise InputError("points must be a list of finite numbers", points)
    n = len(named)
    shared = _shared_space(list(named.values()), space)
    together = _Together(list(named.values()), n)
    pilot = _sorted(_drawn(measure, np.random.default_rng(seed), PILOTS), measure, shared)
    together.centres = together.values(pilot).mean(axis=0)
    pairs = list(combinations_with_replacement(range(n), 2))

    def products(x: FloatArray) -> FloatArray:
        deviations = together.values(x) - together.centres
        columns = [deviations, np.stack([deviations[:, i] * deviations[:, j] for i, j in pairs], axis=1)]
        columns += [deviations**k for k in range(3, orders + 1)]
        return np.concatenate(columns, axis=1)

    found = average(products, measure, tol=tol, space=shared, max_evaluations=max_evaluations, seed=seed)
    shift, shift_error = found.value[:n], found.error[:n]
    covariance, covariance_error = np.empty((n, n)), np.empty((n, n))
    for (i, j), value, error in zip(pairs, found.value[n:], found.error[n:], strict=False):
        covariance[i, j] = covariance[j, i] = value - shift[i] * shift[j]
        covariance_error[i, j] = covariance_error[j, i] = (
            error + abs(shift[i]) * shift_error[j] + abs(shift[j]) * shift_error[i]
        )
    raw = _by_order(found.value, n, len(pairs), orders, pairs)
    raw_error = _by_order(found.error, n, len(pairs), orders, pairs)
    moments, moments_error = _central(raw, raw_error, orders)
    cdf = np.empty((n, 0)), np.empty((n, 0))
    drawn = 0
    if len(at):
        drawn = samples
        cdf = _cdf(together, measure, shared, at, samples, np.random.default_rng(seed + 1))
    return Distribution(
        tuple(named),
        together.centres + shift,
        shift_error,
        covariance,
        covariance_error,
        moments,
        moments_error,
        found.evaluations + PILOTS + drawn,
        found.how,
        found.reason,
        *cdf,
        drawn,
    )


class _Together:
    """Several functions as one table."""

    def __init__(self, functions: list[Function], n: int) -> None:
        self.functions = functions
        self.centres = np.zeros(n)

    def values(self, x: FloatArray) -> FloatArray:
        columns = [np.asarray(f(x)) for f in self.functions]
        for column in columns:
            if column.shape != (len(x),) or column.dtype.kind not in "biuf":
                shown = f"shape {column.shape}, {column.dtype}"
                raise InputError("every f must return one real number per point", shown)
        return np.stack(columns, axis=1).astype(np.float64)


def _named(functions: Any) -> dict[str, Function]:
    if callable(functions):
        functions = [functions]
    if not isinstance(functions, Mapping):
        given = list(functions)
        names = [str(getattr(f, "name", None) or getattr(f, "text", None) or f"f{i}") for i, f in enumerate(given, 1)]
        if len(set(names)) < len(names):
            names = [f"{name} ({i})" for i, name in enumerate(names, 1)]
        functions = dict(zip(names, given, strict=True))
    if not 1 <= len(functions) <= MOST_FUNCTIONS:
        raise InputError(f"there must be 1 to {MOST_FUNCTIONS} functions", len(functions))
    return dict(functions)


def _shared_space(functions: list[Function], asked: str) -> Any:
    if asked != "auto":
        return asked
    own = [getattr(f, "space", None) for f in functions]
    if all(space in ("symmetric", "ordered") for space in own):
        return "ordered" if "ordered" in own else "symmetric"
    return "all" if "all" in own else "auto"


def _drawn(measure: Measure, rng: np.random.Generator, count: int) -> FloatArray:
    points = measure.sample(rng, count)
    return rng.permuted(points, axis=1) if measure.is_symmetric else points


def _sorted(points: FloatArray, measure: Measure, space: Space | str) -> FloatArray:
    ordered = space in ("symmetric", "ordered") or isinstance(measure, Ordered)
    return -np.sort(-points, axis=1) if ordered else points


def _by_order(row: FloatArray, n: int, pairs: int, orders: int, which: list[tuple[int, int]]) -> list[FloatArray]:
    """Moments of order 1, 2, … about the pilot values, from the row of all products."""
    squares = [k for k, (i, j) in enumerate(which) if i == j]
    higher = [row[n + pairs + n * k : n + pairs + n * (k + 1)] for k in range(orders - 2)]
    return [row[:n], row[n : n + pairs][squares], *higher]


def _central(raw: list[FloatArray], error: list[FloatArray], orders: int) -> tuple[FloatArray, FloatArray]:
    """E[(d − E d)^k] = Σ_j C(k, j) E[d^j] (−E d)^{k−j}, and its error to first order."""
    shift, values, errors = raw[0], [], []
    powers = [np.ones_like(shift), *raw]
    slack = [np.zeros_like(shift), *error]
    for k in range(2, orders + 1):
        value, bound = np.zeros_like(shift), np.zeros_like(shift)
        for j in range(k + 1):
            c = math.comb(k, j)
            value = value + c * powers[j] * (-shift) ** (k - j)
            bound = bound + c * slack[j] * np.abs(shift) ** (k - j)
            if j < k:
                bound = bound + c * (k - j) * np.abs(powers[j]) * np.abs(shift) ** (k - j - 1) * slack[1]
        values.append(value)
        errors.append(bound)
    return np.array(values), np.array(errors)


def _cdf(
    together: _Together, measure: Measure, space: str, at: FloatArray, samples: int, rng: np.random.Generator
) -> tuple[FloatArray, FloatArray]:
    values = together.values(_sorted(_drawn(measure, rng, samples), measure, space))
    below = np.array([[(column <= point).sum() for point in at] for column in values.T], dtype=np.float64)
    share = (below + 1) / (samples + 2)
    return below / samples, STANDARD_ERRORS * np.sqrt(share * (1 - share) / samples)
