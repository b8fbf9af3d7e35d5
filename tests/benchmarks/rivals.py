"""What `averages.py` and `spectra.py` compare with: sampling, quasi-random points, cubature, nquad, products."""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from functools import lru_cache
from itertools import combinations
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.integrate import cubature, nquad
from scipy.special import betaincinv, ndtri, roots_jacobi
from scipy.stats import qmc

from simplexcub.average.functions import spectral_function
from simplexcub.measures import Measure

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
SEQUENCES = {"Sobol": qmc.Sobol, "Halton": qmc.Halton}
SECONDS = 4.0
Cost = tuple[float, float] | None  # evaluations and seconds; None where the tolerance was not reached


class OutOfTime(Exception):
    pass


def timed(work: Callable[[], Any]) -> tuple[Any, float]:
    best, result = math.inf, work()
    for _ in range(3):
        start = time.perf_counter()
        result = work()
        best = min(best, time.perf_counter() - start)
    return result, best


def density(x: FloatArray, is_bures: bool) -> FloatArray:
    """Unnormalised, over the flat measure."""
    value = np.ones(len(x))
    for i, j in combinations(range(x.shape[1]), 2):
        value *= (x[:, i] - x[:, j]) ** 2
        if is_bures:
            value /= x[:, i] + x[:, j]
    return np.asarray(value / np.sqrt(x.prod(axis=1)) if is_bures else value)


def broken_stick(y: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Points of the simplex and the Jacobian, for y in the cube."""
    n = y.shape[1] + 1
    left, jacobian, parts = np.ones(len(y)), np.ones(len(y)), []
    for k in range(n - 1):
        parts.append(left * y[:, k])
        jacobian *= (1 - y[:, k]) ** (n - 2 - k)
        left = left * (1 - y[:, k])
    return np.stack([*parts, left], axis=1), jacobian


def spectra_of(g: ComplexArray, other: ComplexArray | None) -> FloatArray:
    """Spectra of density matrices from Ginibre matrices: one for Hilbert–Schmidt, two for Bures."""
    if other is not None:
        q, r = np.linalg.qr(other)
        phases = np.diagonal(r, axis1=1, axis2=2)
        g = g + (q * (phases / np.abs(phases))[:, None, :]) @ g
    values = np.linalg.eigvalsh(g @ g.conj().transpose(0, 2, 1))
    return np.asarray(values / values.sum(axis=1, keepdims=True))


@lru_cache(maxsize=1)
def draws(measure: Measure, is_bures: bool) -> tuple[FloatArray, float]:
    """Spectra by numpy alone, and seconds per draw."""
    n, size = measure.N, 20_000
    rng = np.random.default_rng(0)

    def ginibre() -> ComplexArray:
        return rng.standard_normal((size, n, n)) + 1j * rng.standard_normal((size, n, n))

    def spectra() -> FloatArray:
        return spectra_of(ginibre(), ginibre() if is_bures else None)

    found, seconds = timed(spectra)
    return found, seconds / size


def quasi_random(measure: Measure, is_bures: bool, sequence: str, size: int, seed: int) -> FloatArray:
    """Spectra from a scrambled sequence in the cube, mapped to the measure itself, so that all weigh the same.

    Hilbert–Schmidt takes 2N − 2 dimensions: the squared entries of the bidiagonal matrix of I. Dumitriu and A. Edelman
    (J. Math. Phys. 43 (2002) 5830) over their sum are Dirichlet, a product of Beta variables. Bures takes 4N²: normal
    variables, as entries of two Ginibre matrices.
    """
    n = measure.N
    with np.errstate(all="ignore"):
        u = SEQUENCES[sequence](4 * n * n if is_bures else 2 * n - 2, seed=seed).random(size)
        u = np.clip(u, 1e-12, 1 - 1e-12)
        if is_bures:
            z = ndtri(u).reshape(size, 2, 2, n, n)
            first, second = (z[:, k, 0] + 1j * z[:, k, 1] for k in range(2))
            return spectra_of(first, second)
        alpha = np.array([*range(n, 0, -1), *range(n - 1, 0, -1)], dtype=np.float64)
        after = alpha[::-1].cumsum()[::-1][1:]
        parts, _ = broken_stick(betaincinv(alpha[:-1], after, u))
    rows = np.arange(n)
    matrix = np.zeros((size, n, n))
    matrix[:, rows, rows] = np.sqrt(parts[:, :n])
    matrix[:, rows[1:], rows[:-1]] = np.sqrt(parts[:, n:])
    return np.asarray(np.linalg.svd(matrix, compute_uv=False) ** 2)


def by_numpy(name: str, measure: Measure, is_bures: bool, tol: float, truth: float) -> Cost:
    found, seconds = draws(measure, is_bures)
    values, more = timed(lambda: spectral_function(name)(found))
    needed = max(1.0, (values.std() / tol) ** 2)
    return needed, needed * (seconds + more / len(found))


def by_sobol(name: str, measure: Measure, is_bures: bool, tol: float, truth: float) -> Cost:
    f = spectral_function(name)
    cost: Cost = None
    for power in range(18, 3, -1):

        def work(power: int = power) -> float:
            u = qmc.Sobol(measure.N - 1, seed=1).random_base2(power)
            cuts = np.sort(u, axis=1)
            x = np.diff(cuts, axis=1, prepend=0.0, append=1.0)
            weights = density(x, is_bures)
            return float(weights @ f(x) / weights.sum())

        start = time.perf_counter()
        value = work()
        seconds = time.perf_counter() - start
        if abs(value - truth) > tol:
            break
        cost = (2.0**power, seconds)
    return cost


def by_cubature(name: str, measure: Measure, is_bures: bool, tol: float, truth: float) -> Cost:
    f = spectral_function(name)
    d, count = measure.N - 1, 0

    def work() -> float:
        nonlocal count
        count, start = 0, time.perf_counter()

        def integrand(y: FloatArray) -> FloatArray:
            nonlocal count
            count += len(y)
            if time.perf_counter() - start > SECONDS:
                raise OutOfTime
            x, jacobian = broken_stick(y)
            weight = density(x, is_bures) * jacobian
            return np.stack([weight * f(x), weight], axis=1)

        scale = mass(measure, is_bures)
        rule = "gk21" if d == 1 else "genz-malik"
        found = cubature(integrand, [0] * d, [1] * d, rule=rule, atol=tol * scale, rtol=0, max_subdivisions=200_000)
        return float(found.estimate[0] / found.estimate[1])

    try:
        start = time.perf_counter()
        value = work()
        seconds = time.perf_counter() - start
    except OutOfTime:
        return None
    return (count, seconds) if abs(value - truth) <= tol else None


@lru_cache(maxsize=16)
def mass(measure: Measure, is_bures: bool) -> float:
    points, weights = conical(measure.N, is_bures, 40)
    return float((weights * rest(points, is_bures)).sum())


def by_nquad(name: str, measure: Measure, is_bures: bool, tol: float, truth: float) -> Cost:
    f = spectral_function(name)
    n, count, start = measure.N, 0, time.perf_counter()

    def point(*parts: float) -> FloatArray:
        nonlocal count
        count += 1
        if time.perf_counter() - start > SECONDS:
            raise OutOfTime
        return np.maximum(np.array([[*parts, 1 - sum(parts)]]), 1e-300)

    limits = [lambda *outer: (0.0, max(0.0, 1 - sum(outer)))] * (n - 1)
    options = {"epsabs": tol * mass(measure, is_bures), "epsrel": 0}

    def weighted(*parts: float) -> float:
        x = point(*parts)
        return float(density(x, is_bures)[0] * f(x)[0])

    try:
        top = nquad(weighted, limits, opts=[options] * (n - 1))[0]
        value = top / mass(measure, is_bures)
    except OutOfTime:
        return None
    return (count, time.perf_counter() - start) if abs(value - truth) <= tol else None


def conical(n: int, is_bures: bool, size: int) -> tuple[FloatArray, FloatArray]:
    a = 0.5 if is_bures else 1.0
    axes = [roots_jacobi(size, a * (n - 1 - k) - 1, a - 1) for k in range(n - 1)]
    grids = np.meshgrid(*[(x + 1) / 2 for x, _ in axes], indexing="ij")
    weights = np.ones(())
    for k, (_, w) in enumerate(axes):
        weights = np.multiply.outer(weights, w / 2 ** (a * (n - 1 - k) + a - 1))
    return broken_stick(np.stack([g.ravel() for g in grids], axis=1))[0], weights.ravel()


def rest(x: FloatArray, is_bures: bool) -> FloatArray:
    """The density without its Dirichlet part."""
    return density(x, is_bures) * np.sqrt(x.prod(axis=1)) if is_bures else density(x, is_bures)


def conical_spectra(n: int, is_bures: bool, size: int, *, chamber: bool) -> tuple[FloatArray, FloatArray]:
    """Points and weights for the measure: on the simplex, or with flat rules on the chamber of ordered spectra."""
    x, weights = conical(n, is_bures and not chamber, size)
    if not chamber:
        weights = weights * rest(x, is_bures)
        return x, weights / weights.sum()
    corners = np.tril(np.ones((n, n))) / np.arange(1, n + 1)[:, None]
    x = x @ corners
    weights = weights * density(x, is_bures)
    return x, weights / weights.sum()


def by_conical(name: str, measure: Measure, is_bures: bool, tol: float, truth: float) -> Cost:
    f = spectral_function(name)

    def work() -> tuple[float, int]:
        size, count, before = 2, 0, math.inf
        while size ** (measure.N - 1) <= 200_000 and size < 1000:
            x, weights = conical_spectra(measure.N, is_bures, size, chamber=False)
            value = float(weights @ f(x))
            count += len(x)
            if abs(value - before) <= tol:
                return value, count
            before, size = value, max(size + 1, round(size * 7 / 6))
        return math.inf, count

    start = time.perf_counter()
    value, count = work()
    seconds = time.perf_counter() - start
    if abs(value - truth) > tol:
        return None
    return count, min(seconds, timed(work)[1] if seconds < 0.1 else seconds)


RIVALS = {"numpy": by_numpy, "Sobol": by_sobol, "cubature": by_cubature, "nquad": by_nquad, "conical": by_conical}
