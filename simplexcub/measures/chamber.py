"""The ordered spectrum in coordinates of its chamber, where it is an ordinary measure on a simplex.

The chamber λ_1 ≥ … ≥ λ_N is the simplex with vertices v_k = (1/k, …, 1/k, 0, …, 0). In barycentric coordinates
b_k = k (λ_k − λ_{k+1}), with λ_{N+1} = 0, a polynomial of the ordered spectrum is a polynomial of the same degree.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np

from simplexcub.measures.base import FloatArray, Measure
from simplexcub.measures.ordered import Ordered
from simplexcub.moments.chamber import barycentric_moment


@dataclass(frozen=True)
class Chamber(Measure):
    """The law of the barycentric coordinates b of an ordered spectrum."""

    of: Ordered

    @property
    def N(self) -> int:  # type: ignore[override]
        return self.of.N

    @property
    def routes(self) -> tuple[str, ...]:
        return ("chamber",)

    @property
    def family(self) -> str:
        return "chamber"

    @property
    def is_symmetric(self) -> bool:
        return False

    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction:
        return barycentric_moment(exponents, self.of.beta, self.of.c)

    def parameters(self) -> dict[str, Any]:
        return {"family": "chamber", "of": self.of.parameters()}

    def density(self) -> tuple[str, str]:
        plain, tex = self.of.density()
        return f"{plain}, λi = Σ_(k≥i) bk/k", rf"{tex},\ \lambda_i=\sum_{{k\ge i}} b_k/k"

    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        spectra = self.of.sample(rng, size)
        gaps: FloatArray = -np.diff(spectra, axis=1, append=0.0) * np.arange(1, self.N + 1)
        return gaps

    def __str__(self) -> str:
        return f"chamber of {self.of}"


def spectrum(coordinates: Sequence[Fraction]) -> list[Fraction]:
    """λ_i = Σ_{k ≥ i} b_k/k, exactly.

    Examples
    --------
    >>> [str(x) for x in spectrum([Fraction(1, 2), Fraction(1, 2)])]
    ['3/4', '1/4']
    """
    found, total = [], Fraction(0)
    for k in range(len(coordinates), 0, -1):
        total += coordinates[k - 1] / k
        found.append(total)
    return found[::-1]
