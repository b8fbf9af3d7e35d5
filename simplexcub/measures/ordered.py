"""Ordered spectra λ_1 ≥ … ≥ λ_N of a symmetric measure."""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np
from mpmath import mpf

from simplexcub.errors import InputError
from simplexcub.measures.base import FloatArray, Measure
from simplexcub.measures.beta import BetaEnsemble
from simplexcub.measures.dirichlet import Dirichlet
from simplexcub.measures.spectra import Induced
from simplexcub.moments.chamber import chamber_moment, nested_moment
from simplexcub.moments.digamma import DigammaSum


@dataclass(frozen=True)
class Ordered(Measure):
    """The law of the components of `base`, sorted with the largest first; build it with :func:`ordered`."""

    base: Measure
    beta: int
    c: int

    @property
    def N(self) -> int:  # type: ignore[override]
        return self.base.N

    @property
    def routes(self) -> tuple[str, ...]:
        return ("chamber", "nested")

    @property
    def family(self) -> str:
        return "ordered"

    @property
    def is_symmetric(self) -> bool:
        return False

    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction:
        formula = nested_moment if route == "nested" else chamber_moment
        return formula(exponents, self.beta, self.c)

    def _power_sum(self, parts: tuple[int, ...], route: str | None) -> Fraction:
        if route is None:
            return self.base.power_sum_moment(parts)
        return super()._power_sum(parts, route)

    def _pole(self) -> Fraction:
        return self.base._pole()

    def _power_mean(self, q: Fraction | mpf, dps: int) -> mpf:
        return self.base._power_mean(q, dps)

    def _inverse_mean(self, k: int) -> Fraction:
        return self.base._inverse_mean(k)

    def _log_mean(self, k: int) -> DigammaSum:
        return self.base.log_mean(k)

    def parameters(self) -> dict[str, Any]:
        return {"family": "ordered", "of": self.base.parameters()}

    def density(self) -> tuple[str, str]:
        plain, tex = self.base.density()
        orders = math.factorial(self.N)
        return (
            f"{orders} · {plain} on λ1 ≥ … ≥ λ{self.N}",
            rf"{orders}\cdot {tex}\ \text{{on}}\ \lambda_1\ge\dots\ge\lambda_{{{self.N}}}",
        )

    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        points: FloatArray = -np.sort(-self.base.sample(rng, size), axis=1)
        return points

    def __str__(self) -> str:
        return f"ordered {self.base}"


def ordered(measure: Measure) -> Ordered:
    """The ordered spectrum λ_1 ≥ … ≥ λ_N of a measure, with exact moments: largest and smallest eigenvalue, gaps.

    Parameters
    ----------
    measure : Measure
        Flat, Dirichlet with equal integer α, Hilbert–Schmidt, induced, or a β-ensemble with integer β and exponent.

    Raises
    ------
    InputError
        Another measure, or one whose expanded density is too large (from N = 6 on for Hilbert–Schmidt).

    Examples
    --------
    >>> from simplexcub.measures import hilbert_schmidt
    >>> ordered(hilbert_schmidt(3)).moment((1, 0, 0))  # mean of the largest eigenvalue
    Fraction(313, 432)
    """
    beta, c = Fraction(0), Fraction(-1)
    if isinstance(measure, Dirichlet) and measure.is_symmetric:
        beta, c = Fraction(0), measure.alpha[0] - 1
    elif isinstance(measure, Induced):
        beta, c = Fraction(2), measure.exponent
    elif isinstance(measure, BetaEnsemble):
        beta, c = measure.beta, measure.c
    if beta.denominator != 1 or c.denominator != 1 or c < 0:
        raise InputError(
            "ordered moments must be of a symmetric measure with a polynomial density on the chamber",
            measure,
            "These are flat, equal integer alpha, hilbert-schmidt, induced, and orthogonal with K - N odd; for others"
            " there are no exact moments here. Space symmetric serves functions that do not depend on the order.",
        )
    return Ordered(measure, int(beta), int(c))
