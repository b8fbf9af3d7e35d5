"""Densities as numbers, up to a factor, for shading; the exact ones are those of the measures themselves."""

from __future__ import annotations

from collections.abc import Callable
from itertools import combinations

import numpy as np

from simplexcub.measures import Dirichlet, Measure
from simplexcub.measures.beta import BetaEnsemble
from simplexcub.measures.ordered import Ordered
from simplexcub.measures.polynomial import PolynomialDensity
from simplexcub.measures.spectra import Spectrum
from simplexcub.moments.alternant import Kernel
from simplexcub.picture.style import FloatArray

Density = Callable[[FloatArray], FloatArray]
_STEPS = 4_000


def density(measure: Measure) -> Density | None:
    """A function proportional to the density, taking points inside the simplex, shape (M, N); None if none is known."""
    if isinstance(measure, Ordered):
        return density(measure.base)
    if isinstance(measure, Dirichlet):
        powers = np.array([float(a) - 1 for a in measure.alpha])
        return lambda x: np.asarray(np.prod(x**powers, axis=1))
    if isinstance(measure, Spectrum):
        ratio = measure.kernel is Kernel.RATIO
        c = float(measure.exponent)
        return lambda x: np.prod(x**c, axis=1) * _pairs(x, 2.0, ratio=ratio)
    if isinstance(measure, BetaEnsemble):
        c, beta = float(measure.c), float(measure.beta)
        return lambda x: np.prod(x**c, axis=1) * _pairs(x, beta, ratio=False)
    if isinstance(measure, PolynomialDensity):
        powers = np.array([float(a) - 1 for a in measure.alpha])
        terms = [(np.array(b), float(coefficient)) for b, coefficient in measure.terms]
        return lambda x: np.prod(x**powers, axis=1) * sum(d * np.prod(x**b, axis=1) for b, d in terms)
    return None


def _pairs(x: FloatArray, power: float, *, ratio: bool) -> FloatArray:
    product = np.ones(len(x))
    for i, j in combinations(range(x.shape[1]), 2):
        product *= np.abs(x[:, i] - x[:, j]) ** power
        if ratio:
            product /= x[:, i] + x[:, j]
    return product


def on_the_line(f: Density, low: float) -> tuple[FloatArray, FloatArray]:
    """λ_1 from `low` to 1 and the density of (λ_1, 1 − λ_1), with integral 1.

    Points are dense at the ends, x = sin²θ, so that an inverse square root there is integrated well.
    """
    start = np.arcsin(np.sqrt(low))
    step = (np.pi / 2 - start) / _STEPS
    angle = start + step * (np.arange(_STEPS) + 0.5)
    x = np.sin(angle) ** 2
    values = f(np.stack([x, np.cos(angle) ** 2], axis=1))
    mass = float((values * 2 * np.sin(angle) * np.cos(angle)).sum()) * step
    return x, values / mass
