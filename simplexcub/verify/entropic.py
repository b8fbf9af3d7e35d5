r"""Functions besides polynomials, held against a second formula for their means.

Hilbert–Schmidt and induced measures: with L_k^c the Laguerre polynomials of the weight x^c e^{−x}, c = K − N,

    E[Σ λ_i^q] = Γ(T)/Γ(T + q) Σ_{k<N} k!/Γ(k + c + 1) ∫ x^{c+q} e^{−x} L_k^c(x)² dx,    T = N K,

the integral a double sum of Gamma functions, and Σ λ^q ln λ by its derivative. Bures–Hall measures: the alternating sum
over all N! permutations with real exponents, and its difference quotient in 3 times as many digits. Dirichlet measures:
integrals over the Beta marginals, by tanh-sinh quadrature. For other measures, and Bures–Hall ones of N > 6, the closed
form of the measure itself has to serve.

References: M. L. Mehta, *Random Matrices* (2004), chapter 19; S. K. Foong, S. Kanno, Phys. Rev. Lett. 72 (1994) 1148.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache

from mpmath import mp, mpf

from simplexcub.entropic import Named, named
from simplexcub.measures import Dirichlet, Measure
from simplexcub.measures.spectra import BuresHall, Induced
from simplexcub.rule import Rule
from simplexcub.verify.printed import Printed

MOST_PERMUTED = 6  # components up to which all permutations are summed
SPARE = 20


@dataclass(frozen=True)
class AlsoCheck:
    """The comparison of one function's printed sum with its mean.

    Attributes
    ----------
    name : str
    residual : str
        |Σ w f − E[f]|, two digits; empty for a function of which only the name is known.
    ratio : float
        The same over what the last printed digits can do to the sum.
    """

    name: str
    residual: str
    ratio: float


def check_also(rule: Rule, measure: Measure, printed: Printed) -> tuple[AlsoCheck, ...]:
    """Compare every function that the rule names with its mean over `measure`."""
    return tuple(_check(named(name), measure, printed) for name in rule.also)


def also_faults(rule: Rule, measure: Measure, printed: Printed) -> Iterator[str]:
    """One sentence for each function whose mean is wrong."""
    for check in check_also(rule, measure, printed):
        if not check.ratio <= 1:
            yield f"the mean of {named(check.name).formula} is claimed, but is off by {check.residual}"


def _check(label: Named, measure: Measure, printed: Printed) -> AlsoCheck:
    if label.power is None:
        return AlsoCheck(label.name, "", 0.0)
    if label.power <= 0 and any(x == 0 for node in printed.nodes for x in node):
        return AlsoCheck(label.name, "infinity", math.inf)
    dps = printed.places + SPARE
    with mp.workdps(dps):
        one, total, slack = mpf(printed.one), mpf(0), mpf(0)
        rows = zip(printed.nodes, printed.weights, printed.node_units, printed.weight_units, strict=True)
        for node, weight, units, weight_unit in rows:
            w = weight / one
            inside = [(x / one, float(u)) for x, u in zip(node, units, strict=True) if x]
            value = mp.fsum(trace_term(label, x) for x, _ in inside)
            total += w * value
            slack += abs(value) * float(weight_unit) + abs(w) * mp.fsum(
                abs(slope_term(label, x)) * u for x, u in inside
            )
        off = abs(total - mean_of(label, measure, dps))
        ratio = off * mpf(10) ** printed.digits / slack if slack else mp.inf
        return AlsoCheck(label.name, mp.nstr(off, 2), float(ratio))


def trace_term(label: Named, x: mpf) -> mpf:
    """h(x) of the trace Σ h(λ_i), x > 0."""
    q = _real(label)
    return x**q * mp.log(x) if label.logarithm else x**q


def slope_term(label: Named, x: mpf) -> mpf:
    """h′(x), x > 0."""
    q = _real(label)
    return x ** (q - 1) * (q * mp.log(x) + 1) if label.logarithm else q * x ** (q - 1)


def _real(label: Named) -> mpf:
    q = label.power or Fraction(0)
    return mpf(q.numerator) / q.denominator


@lru_cache(maxsize=256)
def mean_of(label: Named, measure: Measure, dps: int) -> mpf:
    """E[Σ h(λ_i)] to `dps` digits, by the formulas above."""
    q = label.power or Fraction(0)
    if isinstance(measure, Dirichlet):
        return _by_marginals(label, measure, dps)
    if isinstance(measure, Induced):
        return _by_laguerre(label, measure, dps)
    if isinstance(measure, BuresHall) and measure.N <= MOST_PERMUTED:
        return _by_permutations(label, measure, dps)
    return measure.log_mean(int(q)).value(dps) if label.logarithm else measure.power_mean(q, dps=dps)


def _by_marginals(label: Named, measure: Dirichlet, dps: int) -> mpf:
    """Each half of a Beta integral in the power of the variable that takes the singularity from its end."""
    whole, total = sum(measure.alpha, Fraction(0)), mpf(0)
    with mp.workdps(dps + 15):
        q = _real(label)
        for a in sorted(set(measure.alpha)):
            low, rest = mpf(a.numerator) / a.denominator, mpf((whole - a).numerator) / (whole - a).denominator
            below, half = low + q, mpf(1) / 2

            def lower(y: mpf, p: mpf = below, r: mpf = rest) -> mpf:
                return (1 - y ** (1 / p)) ** (r - 1) * (mp.log(y) / p if label.logarithm else 1) / p

            def upper(y: mpf, p: mpf = below, r: mpf = rest) -> mpf:
                x = 1 - y ** (1 / r)
                return x ** (p - 1) * (mp.log(x) if label.logarithm else 1) / r

            part = mp.quad(lower, [0, half**below]) + mp.quad(upper, [0, half**rest])
            total += measure.alpha.count(a) * part / mp.beta(low, rest)
        return +total


def _by_laguerre(label: Named, measure: Induced, dps: int) -> mpf:
    n, c = measure.N, measure.K - measure.N
    with mp.workdps(dps + 15 + 3 * n):  # the double sum cancels
        q, trace = _real(label), mpf(n * measure.K)
        scale = mp.gammaprod([trace], [trace + q])
        total = mpf(0)
        for k in range(n):
            row = [(-1) ** j * mp.binomial(k + c, k - j) / mp.factorial(j) for j in range(k + 1)]
            norm = mp.factorial(k) / mp.gamma(k + c + 1)
            for i, j in itertools.product(range(k + 1), repeat=2):
                s = q + c + i + j + 1
                term = norm * row[i] * row[j] * mp.gamma(s) * scale
                total += term * (mp.digamma(s) - mp.digamma(trace + q)) if label.logarithm else term
        return +total


def _by_permutations(label: Named, measure: BuresHall, dps: int) -> mpf:
    if not label.logarithm:
        with mp.workdps(dps + 15 + 2 * measure.N):
            return _permuted(measure, _real(label))
    with mp.workdps(3 * dps + 30):
        h = mpf(10) ** (-dps - 5)
        q = _real(label)
        return (_permuted(measure, q + h) - _permuted(measure, q - h)) / (2 * h)


def _permuted(measure: BuresHall, q: mpf) -> mpf:
    n = measure.N
    c = mpf(measure.c.numerator) / measure.c.denominator
    trace = n * (c + 1) + mpf(n * (n - 1)) / 2

    def alternating(first: mpf) -> mpf:
        gammas = {(i, s): mp.gamma((first if i == 0 else 0) + s + c + 1) for i in (0, 1) for s in range(n)}
        total = mpf(0)
        for order in itertools.permutations(range(n)):
            x = [(first if i == 0 else 0) + s + c + 1 for i, s in enumerate(order)]
            term = mp.fprod(gammas[min(i, 1), s] for i, s in enumerate(order))
            for i in range(n):
                for j in range(i):
                    term *= (x[i] - x[j]) / (x[i] + x[j])
            inversions = sum(a > b for a, b in itertools.combinations(order, 2))
            total += (-1) ** inversions * term
        return total

    return n * alternating(q) / alternating(mpf(0)) * mp.gammaprod([trace], [trace + q])
