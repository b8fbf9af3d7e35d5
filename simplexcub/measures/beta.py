"""Fixed-trace β-ensembles: real (β = 1) and quaternion (β = 4) density matrices, and every other β > 0."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np
from mpmath import mpf

from simplexcub.measures.base import FloatArray, Measure
from simplexcub.measures.polynomial import PolynomialDensity
from simplexcub.measures.sampling import beta_spectra, sample_size
from simplexcub.measures.typeset import pair_product, power_product, raised
from simplexcub.moments.digamma import DigammaSum
from simplexcub.moments.expansion import expansion_moment, vandermonde_power
from simplexcub.moments.jack import jack_moment, jack_power_sum
from simplexcub.moments.loop import loop_moment, loop_power_sum
from simplexcub.moments.powersum import power_sum_moment


@dataclass(frozen=True)
class BetaEnsemble(Measure):
    """Density ∝ Π λ_i^c Π_{i<j} |λ_i − λ_j|^β, with rational β > 0 and c > −1.

    β = 1 with c = (K − N − 1)/2 are real density matrices, β = 4 with c = 2(K − N) + 1 quaternion ones, both with an
    environment of K dimensions. Moments are exact up to the degree that the Jack polynomials reach: 16 for every N,
    more for N ≤ 5. Real powers and logarithms have a closed form for even β and small N.
    """

    N: int
    beta: Fraction
    c: Fraction

    @property
    def routes(self) -> tuple[str, ...]:
        return ("jack", "expansion", "loop") if self.beta % 2 == 0 else ("jack", "loop")

    @property
    def _environment(self) -> Fraction:
        return self.N - 1 + 2 * (self.c + 1) / self.beta

    @property
    def family(self) -> str:
        name = {Fraction(1): "orthogonal", Fraction(4): "symplectic"}.get(self.beta, "beta")
        k = self._environment
        return name if k.denominator == 1 and k >= self.N else "beta"

    @property
    def is_symmetric(self) -> bool:
        return True

    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction:
        ordered = tuple(sorted(exponents, reverse=True))
        if route == "loop":
            return loop_moment(ordered, self.beta, self.c)
        if route == "expansion":
            return expansion_moment(ordered, int(self.beta), self.c)
        return jack_moment(ordered, self.beta, self.c)

    def _power_sum(self, parts: tuple[int, ...], route: str | None) -> Fraction:
        if route == "loop":
            return loop_power_sum(parts, self.N, self.beta, self.c)
        if route == "expansion":
            return power_sum_moment(lambda a: self.moment(a, route=route), self.N, parts)
        return jack_power_sum(parts, self.N, self.beta, self.c)

    def parameters(self) -> dict[str, Any]:
        if self.family != "beta":
            return {"family": self.family, "N": self.N, "K": int(self._environment)}
        return {"family": "beta", "N": self.N, "beta": str(self.beta), "exponent": str(self.c)}

    def _expanded(self) -> PolynomialDensity:
        if self.beta % 2:
            raise self._no_closed_form()
        terms = vandermonde_power(self.N, int(self.beta))
        return PolynomialDensity((self.c + 1,) * self.N, tuple((b, Fraction(d)) for b, d in terms.items()))

    def _pole(self) -> Fraction:
        if self.beta % 2:
            raise self._no_closed_form()
        return -(self.c + 1)

    def _power_mean(self, q: Fraction | mpf, dps: int) -> mpf:
        return self._expanded().power_mean(q, dps=dps)

    def _inverse_mean(self, k: int) -> Fraction:
        return self._expanded().power_mean_exact(-k)

    def _log_mean(self, k: int) -> DigammaSum:
        return self._expanded().log_mean(k)

    def density(self) -> tuple[str, str]:
        """Selberg's integral gives the constant (Mehta 2004, eq. 17.6.5)."""
        half = self.beta / 2
        total = self.N * (self.c + 1) + self.N * (self.N - 1) * half
        power, tex_power = power_product(self.c, self.N)
        pairs, tex_pairs = pair_product(
            f"|λ{{i}}−λ{{j}}|{raised(self.beta)}", rf"|\lambda_i-\lambda_j|{_tex(self.beta)}", self.N
        )
        low, step = self.c + 1, 1 + half
        plain = f"Γ({total}) Π_(j<{self.N}) Γ({step})/(Γ({low}+{half}j) Γ({step}+{half}j)) · {power}{pairs}"
        tex = (
            rf"\Gamma({total})\prod_{{j=0}}^{{{self.N - 1}}}\frac{{\Gamma({step})}}"
            rf"{{\Gamma({low}+{half}j)\,\Gamma({step}+{half}j)}}\,{tex_power}{tex_pairs}"
        )
        return plain, tex

    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        return beta_spectra(rng, self.N, float(self.beta), float(self.c), sample_size(size))


def _tex(x: Fraction) -> str:
    return "" if x == 1 else f"^{{{x}}}"
