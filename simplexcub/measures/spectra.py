"""Eigenvalue measures of complex density matrices: Hilbert–Schmidt, induced, Bures and induced Bures–Hall."""

from __future__ import annotations

import math
from abc import abstractmethod
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np
from mpmath import mpf

from simplexcub.measures.base import FloatArray, Measure
from simplexcub.measures.sampling import bures_spectra, induced_spectra, sample_size
from simplexcub.measures.typeset import WRITTEN_OUT, pair_product, power_product, raised
from simplexcub.moments.alternant import (
    Kernel,
    alternant_moment,
    alternant_power_sum,
    alternant_terms,
    homogeneity,
)
from simplexcub.moments.cauchy import cauchy_moment, cauchy_power_sum
from simplexcub.moments.digamma import DigammaSum
from simplexcub.moments.dirichlet import rising
from simplexcub.moments.expansion import expansion_moment
from simplexcub.moments.loop import loop_moment, loop_power_sum
from simplexcub.moments.powersum import power_sum_moment
from simplexcub.moments.real import eigenvalue_inverse_mean, eigenvalue_log_mean, eigenvalue_power_mean
from simplexcub.moments.schur import schur_moment, schur_power_sum

FEW_COMPONENTS = 7
FEW_TERMS = 50_000  # beyond it the characters are quicker than the alternating sum


class Spectrum(Measure):
    """A measure ∝ Π λ_i^c Π_{i<j} (λ_i − λ_j) k(λ_i, λ_j), with the pair kernel x − y or (x − y)/(x + y)."""

    @property
    @abstractmethod
    def kernel(self) -> Kernel:
        """The pair kernel of the density and of its moments."""

    @property
    @abstractmethod
    def exponent(self) -> Fraction:
        """The exponent c of each eigenvalue."""

    @property
    def is_symmetric(self) -> bool:
        return True

    def default_route(self, exponents: tuple[int, ...]) -> str:
        few = self.N <= FEW_COMPONENTS or alternant_terms(exponents) <= FEW_TERMS
        return self.routes[0] if few else self.routes[-1]

    def _power_sum(self, parts: tuple[int, ...], route: str | None) -> Fraction:
        return alternant_power_sum(parts, self.N, self.exponent, self.kernel)

    def _pole(self) -> Fraction:
        return -(self.exponent + 1)

    def _power_mean(self, q: Fraction | mpf, dps: int) -> mpf:
        return eigenvalue_power_mean(q, self.N, self.exponent, self.kernel, dps)

    def _inverse_mean(self, k: int) -> Fraction:
        return eigenvalue_inverse_mean(k, self.N, self.exponent, self.kernel)

    def _log_mean(self, k: int) -> DigammaSum:
        return eigenvalue_log_mean(k, self.N, self.exponent, self.kernel)


@dataclass(frozen=True)
class Induced(Spectrum):
    """Eigenvalues of an N×N density matrix induced by tracing out a K-dimensional environment, K ≥ N.

    Density ∝ Π λ_i^(K−N) Π_{i<j} (λ_i − λ_j)². K = N is the Hilbert–Schmidt measure.
    """

    N: int
    K: int

    @property
    def routes(self) -> tuple[str, ...]:
        return ("alternant", "expansion", "loop", "schur")

    @property
    def family(self) -> str:
        return "hilbert-schmidt" if self.K == self.N else "induced"

    @property
    def kernel(self) -> Kernel:
        return Kernel.DIFFERENCE

    @property
    def exponent(self) -> Fraction:
        return Fraction(self.K - self.N)

    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction:
        ordered = tuple(sorted(exponents, reverse=True))
        if route == "schur":
            return schur_moment(ordered, self.K)
        if route == "loop":
            return loop_moment(ordered, Fraction(2), self.exponent)
        if route == "expansion":
            return expansion_moment(ordered, 2, self.exponent)
        return alternant_moment(ordered, self.exponent, self.kernel)

    def _power_sum(self, parts: tuple[int, ...], route: str | None) -> Fraction:
        if route == "schur":
            return schur_power_sum(parts, self.N, self.K)
        if route == "loop":
            return loop_power_sum(parts, self.N, Fraction(2), self.exponent)
        if route == "expansion":
            return power_sum_moment(lambda a: self.moment(a, route=route), self.N, parts)
        return super()._power_sum(parts, route)

    def parameters(self) -> dict[str, Any]:
        return {"family": self.family, "N": self.N, "K": self.K}

    def _constant(self) -> Fraction:
        """1/∫ of the unnormalised density (Życzkowski & Sommers 2001, eq. 4.1)."""
        value = Fraction(math.factorial(self.N * self.K - 1))
        for j in range(self.N):
            value /= math.factorial(self.K - j - 1) * math.factorial(self.N - j)
        return value

    def density(self) -> tuple[str, str]:
        power, tex_power = power_product(self.exponent, self.N)
        pairs, tex_pairs = pair_product("(λ{i}−λ{j})²", r"(\lambda_i-\lambda_j)^2", self.N)
        if self.N > WRITTEN_OUT:
            plain = f"Γ({self.N * self.K})/(Π_(j<{self.N}) Γ({self.K}−j) Γ({self.N + 1}−j)) ·"
            tex = (
                rf"\frac{{\Gamma({self.N * self.K})}}"
                rf"{{\prod_{{j=0}}^{{{self.N - 1}}}\Gamma({self.K}-j)\,\Gamma({self.N + 1}-j)}}"
            )
            return f"{plain} {power}{pairs}", rf"{tex}\,{tex_power}{tex_pairs}"
        constant = self._constant()
        return f"{constant} {power}{pairs}", rf"{constant}\,{tex_power}{tex_pairs}"

    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        return induced_spectra(rng, self.N, self.K, sample_size(size))

    def over_dirichlet(self) -> tuple[tuple[Fraction, ...], bool]:
        return (Fraction(self.K - self.N + 1),) * self.N, True


@dataclass(frozen=True)
class BuresHall(Spectrum):
    """Bures–Hall measure: density ∝ Π λ_i^c Π_{i<j} (λ_i − λ_j)²/(λ_i + λ_j), c > −1.

    c = −1/2 is the Bures measure; c = K − N − 1/2 is induced by an environment of K dimensions.
    """

    N: int
    c: Fraction

    @property
    def routes(self) -> tuple[str, ...]:
        return ("alternant", "cauchy")

    @property
    def family(self) -> str:
        return "bures" if self.c == Fraction(-1, 2) else "bures-hall"

    @property
    def kernel(self) -> Kernel:
        return Kernel.RATIO

    @property
    def exponent(self) -> Fraction:
        return self.c

    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction:
        ordered = tuple(sorted(exponents, reverse=True))
        if route == "cauchy":
            return cauchy_moment(ordered, self.c)
        return alternant_moment(ordered, self.c, self.kernel)

    def _power_sum(self, parts: tuple[int, ...], route: str | None) -> Fraction:
        return cauchy_power_sum(parts, self.N, self.c) if route == "cauchy" else super()._power_sum(parts, route)

    def parameters(self) -> dict[str, Any]:
        if self.family == "bures":
            return {"family": "bures", "N": self.N}
        k = self.N + self.c + Fraction(1, 2)
        if k.denominator == 1 and k >= self.N:
            return {"family": "bures-hall", "N": self.N, "K": int(k)}
        return {"family": "bures-hall", "N": self.N, "exponent": str(self.c)}

    def _mass(self) -> Fraction:
        """∫ of the unnormalised density, times Γ(T)/Γ(c + 1)^N."""
        mass = Fraction(math.factorial(self.N))
        places = [s + self.c + 1 for s in range(self.N)]
        for s, x in enumerate(places):
            mass *= rising(self.c + 1, s)
            for y in places[:s]:
                mass *= (x - y) / (x + y)
        return mass

    def density(self) -> tuple[str, str]:
        """Schur's Pfaffian gives the constant (Sommers & Życzkowski 2003 for c = −1/2)."""
        total = homogeneity(self.N, self.c, self.kernel)
        power, tex_power = power_product(self.c, self.N)
        pairs, tex_pairs = pair_product(
            "(λ{i}−λ{j})²/(λ{i}+λ{j})", r"\frac{(\lambda_i-\lambda_j)^2}{\lambda_i+\lambda_j}", self.N
        )
        low = self.c + 1
        if self.N > WRITTEN_OUT:
            plain = f"Γ({total}) Π_(j<{self.N}) Γ({2 * low}+2j)/(Γ({low}+j) Γ({2 * low}+j) Γ(2+j)) ·"
            tex = (
                rf"\Gamma({total})\prod_{{j=0}}^{{{self.N - 1}}}\frac{{\Gamma({2 * low}+2j)}}"
                rf"{{\Gamma({low}+j)\,\Gamma({2 * low}+j)\,\Gamma(2+j)}}"
            )
            return f"{plain} {power}{pairs}", rf"{tex}\,{tex_power}{tex_pairs}"
        mass = self._mass()
        rational, tex_rational = ("", "") if mass == 1 else (f"{1 / mass} ", rf"{1 / mass}\,")
        return (
            f"{rational}Γ({total})/Γ({low}){raised(Fraction(self.N))} · {power}{pairs}",
            rf"{tex_rational}\frac{{\Gamma({total})}}{{\Gamma({low})^{{{self.N}}}}}\,{tex_power}{tex_pairs}",
        )

    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        return bures_spectra(rng, self.N, float(self.c), sample_size(size))
