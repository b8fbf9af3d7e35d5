"""The formula behind a value, in one line of plain text with the measure's parameters filled in."""

from __future__ import annotations

from fractions import Fraction

from simplexcub.measures.base import Measure
from simplexcub.measures.beta import BetaEnsemble
from simplexcub.measures.dirichlet import Dirichlet
from simplexcub.measures.ordered import Ordered
from simplexcub.measures.polynomial import PolynomialDensity
from simplexcub.measures.spectra import Spectrum
from simplexcub.moments.alternant import Kernel, homogeneity

_BY_PARTS = {
    "stick-breaking": "E[λ^a] as a product of Beta means along the broken stick",
    "expansion": "E[λ^a] = Σ_b d_b D(a+b) / Σ_b d_b D(b), Π_(i<j) (λi − λj)^β = Σ_b d_b λ^b, D a Dirichlet moment",
    "loop": "E[p_k F] = (c + k − kβ/2) E[p_(k−1) F] + β/2 Σ_(m<k) E[p_m p_(k−1−m) F] "
    "+ Σ_j m_j E[p_(m_j+k−1) F/p_(m_j)]",
    "jack": "E[P_κ] = P_κ(1^N) Π_((i,j)∈κ) (c + 1 + (N−i)/α + j − 1) / (T)_|κ|, α = 2/β, for Jack polynomials P_κ",
    "schur": "E[p_μ] = Σ_ν χ^ν_μ s_ν(1^N) Π_((i,j)∈ν) (K + j − i) / (NK)_|ν|, and E[λ^a] from power sums",
    "cauchy": "Wishart matrices of scale 1/(1+H²) with Cauchy distributed H: "
    "E[s_ν] = E_H[s_ν(1/(1+H²))] Π_((i,j)∈ν) (κ + j − i) / (T)_|ν|",
    "chamber": "λi = Σ_(k≥i) b_k/k with barycentric b; density and monomial expanded in b, E[b^m] ∝ Π m_k!",
    "nested": "integrals over the largest eigenvalue first, ∫_y^∞ x^m e^(−jx) dx = e^(−jy) Σ_(k≤m) m!/k! y^k/j^(m−k+1)",
}


def moment_formula(measure: Measure, route: str) -> str:
    """The formula for E[λ^a] by one of the measure's routes.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> moment_formula(flat(3), "rising-factorial")
    'E[λ^a] = Π (α_i)_(a_i) / (3)_|a|, (x)_k = x(x+1)…(x+k−1), α = 1, 1, 1'
    """
    if isinstance(measure, PolynomialDensity):
        by = "rising factorials" if route == "rising-factorial" else "the broken stick"
        return f"E[λ^a] = Σ_b d_b D(a+b) / Σ_b d_b D(b), density Σ_b d_b λ^b times Dirichlet, D by {by}"
    if isinstance(measure, Dirichlet) and route == "rising-factorial":
        return f"E[λ^a] = Π (α_i)_(a_i) / ({sum(measure.alpha)})_|a|, (x)_k = x(x+1)…(x+k−1), α = {_alpha(measure)}"
    if isinstance(measure, Spectrum) and route == "alternant":
        return (
            f"E[λ^a] = M(a)/M(0)/({_trace(measure)})_|a|, M(a) = Σ_σ sgn(σ) Π_i Γ(x_i) Π_(i>j) k(x_i, x_j), "
            f"x_i = a_i + σ_i + {measure.exponent + 1}, k(x, y) = {_kernel(measure)}"
        )
    return _BY_PARTS[route] + _values(measure, route)


def power_sum_formula(measure: Measure, route: str | None) -> str:
    """The formula for E[Π p_k], by the quickest way or a route."""
    if isinstance(measure, Ordered) and route is None:
        return power_sum_formula(measure.base, None)
    chosen = measure.routes[0] if route is None else route
    if isinstance(measure, PolynomialDensity) or chosen in ("stick-breaking", "expansion", "chamber", "nested"):
        return "Π p_k expanded in monomials; " + moment_formula(measure, chosen)
    if isinstance(measure, Dirichlet):
        total = sum(measure.alpha)
        return f"E[Π p_k] = E[Π Σ_i g_i^k] / ({total})_|μ|, g_i independent Gamma variables of shapes {_alpha(measure)}"
    if isinstance(measure, Spectrum) and chosen == "alternant":
        return (
            f"E[p_μ] = Σ_ν χ^ν_μ E[s_ν], E[s_ν] = Π_i Γ(x_i) Π_(i>j) k(x_i, x_j) / (same at ν = 0) "
            f"/ ({_trace(measure)})_|ν|, x_i = ν_i + {measure.N} − i + {measure.exponent + 1}, "
            f"k(x, y) = {_kernel(measure)}"
        )
    return moment_formula(measure, chosen)


def real_power_formula(measure: Measure) -> str:
    """The closed form of E[Σ λ_i^q], of which the mean logarithms are derivatives."""
    if isinstance(measure, Ordered):
        return real_power_formula(measure.base)
    if isinstance(measure, Spectrum):
        low = measure.exponent + 1
        factor = " (y_s+y_j)/(q+y_s+y_j)" if measure.kernel is Kernel.RATIO else ""
        return (
            f"E[Σ λ^q] = 1/({_trace(measure)})_q Σ_(s<{measure.N}) (y_s)_q Π_(j≠s) (q+s−j)/(s−j){factor}, "
            f"y_s = s + {low}, (y)_q = Γ(y+q)/Γ(y)"
        )
    if isinstance(measure, Dirichlet):
        return f"E[Σ λ^q] = Σ_i (α_i)_q / ({sum(measure.alpha)})_q, (y)_q = Γ(y+q)/Γ(y), α = {_alpha(measure)}"
    return "E[Σ λ^q] = Σ_b w_b Σ_i (α_i+b_i)_q / (Σα+|b|)_q, the density Σ_b w_b times Dirichlet(α+b)"


def log_formula(measure: Measure, k: int) -> str:
    """The mean of Σ λ_i^k ln λ_i as a derivative of the mean power."""
    return f"d/dq at q = {k} of " + real_power_formula(measure)


def _alpha(measure: Dirichlet) -> str:
    shown = [str(a) for a in measure.alpha]
    return ", ".join(shown if len(shown) <= 8 else [*shown[:3], "…", shown[-1]])


def _kernel(measure: Spectrum) -> str:
    return measure.kernel.value.replace("-", "−")


def _trace(measure: Spectrum) -> Fraction:
    return homogeneity(measure.N, measure.exponent, measure.kernel)


def _values(measure: Measure, route: str) -> str:
    if isinstance(measure, BetaEnsemble):
        total = measure.N * (measure.c + 1) + measure.beta * measure.N * (measure.N - 1) / 2
        return f"; β = {measure.beta}, c = {measure.c}, T = {total}"
    if isinstance(measure, Spectrum):
        if route == "cauchy":
            return f"; κ = {measure.N + measure.exponent + Fraction(1, 2)}, T = {_trace(measure)}"
        return f"; β = 2, c = {measure.exponent}, T = {_trace(measure)}"
    return ""
