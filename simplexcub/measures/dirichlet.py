"""Dirichlet measures, the flat measure among them."""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np
from mpmath import mpf

from simplexcub.measures.base import FloatArray, Measure
from simplexcub.measures.sampling import sample_size
from simplexcub.measures.typeset import raised
from simplexcub.moments.digamma import DigammaSum
from simplexcub.moments.dirichlet import rising, rising_factorial_moment, stick_breaking_moment
from simplexcub.moments.powersum import dirichlet_power_sum
from simplexcub.moments.real import dirichlet_log_mean, dirichlet_power_mean

LONGEST_FACTORIAL = 20  # beyond it the volume is left as a factorial


@dataclass(frozen=True)
class Dirichlet(Measure):
    """Dirichlet(α): density ∝ Π λ_i^(α_i − 1). All α_i = 1 is the flat measure."""

    alpha: tuple[Fraction, ...]

    @property
    def N(self) -> int:  # type: ignore[override]
        return len(self.alpha)

    @property
    def routes(self) -> tuple[str, ...]:
        return ("rising-factorial", "stick-breaking")

    @property
    def family(self) -> str:
        return "flat" if all(a == 1 for a in self.alpha) else "dirichlet"

    @property
    def is_symmetric(self) -> bool:
        return len(set(self.alpha)) == 1

    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction:
        formula = rising_factorial_moment if route == "rising-factorial" else stick_breaking_moment
        return formula(self.alpha, exponents)

    def _power_sum(self, parts: tuple[int, ...], route: str | None) -> Fraction:
        if route == "stick-breaking":
            return super()._power_sum(parts, route)
        return dirichlet_power_sum(parts, self.alpha)

    def _pole(self) -> Fraction:
        return -min(self.alpha)

    def _power_mean(self, q: Fraction | mpf, dps: int) -> mpf:
        return dirichlet_power_mean(self.alpha, q, dps)

    def _inverse_mean(self, k: int) -> Fraction:
        whole = sum(self.alpha, Fraction(0))
        return rising(whole - k, k) * sum((1 / rising(a - k, k) for a in self.alpha), Fraction(0))

    def _log_mean(self, k: int) -> DigammaSum:
        return dirichlet_log_mean(self.alpha, k)

    def parameters(self) -> dict[str, Any]:
        if self.family == "flat":
            return {"family": "flat", "N": self.N}
        return {"family": "dirichlet", "alpha": [str(a) for a in self.alpha]}

    def density(self) -> tuple[str, str]:
        if self.family == "flat":
            volume = str(math.factorial(self.N - 1)) if self.N <= LONGEST_FACTORIAL else f"{self.N - 1}!"
            return volume, volume
        plain = " ".join(f"λ{i}{raised(a - 1)}" for i, a in enumerate(self.alpha, 1) if a != 1)
        latex = r"\,".join(rf"\lambda_{{{i}}}^{{{a - 1}}}" for i, a in enumerate(self.alpha, 1) if a != 1)
        total = sum(self.alpha)
        gammas = " ".join(f"Γ({a})" for a in self.alpha)
        tex_gammas = "".join(rf"\Gamma({a})" for a in self.alpha)
        return f"Γ({total})/({gammas}) · {plain}", rf"\frac{{\Gamma({total})}}{{{tex_gammas}}}\,{latex}"

    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        return rng.dirichlet([float(a) for a in self.alpha], sample_size(size))

    def over_dirichlet(self) -> tuple[tuple[Fraction, ...], bool]:
        return self.alpha, False
