"""Densities of the user's own: a polynomial times a Dirichlet density."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from itertools import combinations
from typing import Any

import numpy as np
from mpmath import mpf

from simplexcub.errors import InputError
from simplexcub.measures.base import FloatArray, Measure
from simplexcub.measures.dirichlet import Dirichlet
from simplexcub.measures.sampling import sample_size
from simplexcub.moments.digamma import DigammaSum
from simplexcub.moments.dirichlet import rising
from simplexcub.moments.expansion import Terms, polynomial_integral, stick_integral
from simplexcub.moments.polynomial import polynomial_of, polynomial_text
from simplexcub.moments.real import dirichlet_component_power, stable_sum

SPOT_CHECKS = 4096


@dataclass(frozen=True)
class PolynomialDensity(Measure):
    """Density ∝ p(λ) Π λ_i^(α_i − 1) with a polynomial p; build it with :func:`polynomial_density`, which checks it."""

    alpha: tuple[Fraction, ...]
    terms: Terms

    @property
    def N(self) -> int:  # type: ignore[override]
        return len(self.alpha)

    @property
    def routes(self) -> tuple[str, ...]:
        return ("rising-factorial", "stick-breaking")

    @property
    def family(self) -> str:
        return "polynomial"

    @cached_property
    def is_symmetric(self) -> bool:
        terms = dict(self.terms)
        swaps = [(0, j) for j in range(1, self.N)]
        return len(set(self.alpha)) == 1 and all(
            terms.get(_swapped(a, i, j)) == x for a, x in terms.items() for i, j in swaps
        )

    @cached_property
    def _mass(self) -> Fraction:
        return polynomial_integral(self.alpha, self.terms, (0,) * self.N)

    @cached_property
    def _stick_mass(self) -> Fraction:
        return stick_integral(self.alpha, self.terms, (0,) * self.N)

    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction:
        if route == "stick-breaking":
            return stick_integral(self.alpha, self.terms, exponents) / self._stick_mass
        return polynomial_integral(self.alpha, self.terms, exponents) / self._mass

    @cached_property
    def _shares(self) -> dict[tuple[Fraction, Fraction], Fraction]:
        """The measure as a signed mixture: {(α_i + b_i, Σ(α + b)): total weight over components i and terms b}."""
        shares: dict[tuple[Fraction, Fraction], Fraction] = defaultdict(Fraction)
        whole = sum(self.alpha, Fraction(0))
        for b, d in self.terms:
            weight = d / rising(whole, sum(b)) / self._mass
            for a, k in zip(self.alpha, b, strict=True):
                weight *= rising(a, k)
            for a, k in zip(self.alpha, b, strict=True):
                shares[a + k, whole + sum(b)] += weight
        return {key: weight for key, weight in shares.items() if weight}

    def _pole(self) -> Fraction:
        return -min(a + min(b[i] for b, _ in self.terms) for i, a in enumerate(self.alpha))

    def _power_mean(self, q: Fraction | mpf, dps: int) -> mpf:
        return stable_sum(
            lambda: [
                mpf(w.numerator) / w.denominator * dirichlet_component_power(a, whole, q)
                for (a, whole), w in self._shares.items()
            ],
            dps,
        )

    def _inverse_mean(self, k: int) -> Fraction:
        return sum((w * rising(whole - k, k) / rising(a - k, k) for (a, whole), w in self._shares.items()), Fraction(0))

    def _log_mean(self, k: int) -> DigammaSum:
        digammas: dict[Fraction, Fraction] = defaultdict(Fraction)
        for (a, whole), weight in self._shares.items():
            mean = weight * rising(a, k) / rising(whole, k)
            digammas[a + k] += mean
            digammas[whole + k] -= mean
        return DigammaSum.of(0, digammas)

    def parameters(self) -> dict[str, Any]:
        return {
            "family": "polynomial",
            "alpha": [str(a) for a in self.alpha],
            "polynomial": polynomial_text(dict(self.terms)),
        }

    def density(self) -> tuple[str, str]:
        base, tex_base = Dirichlet(self.alpha).density()
        text = polynomial_text(dict(self.terms))
        tex = _polynomial_tex(self.terms)
        scale = 1 / self._mass
        plain_scale, tex_scale = ("", "") if scale == 1 else (f"{scale} ", rf"{scale}\,")
        return f"{plain_scale}({text}) · {base}", rf"{tex_scale}\left({tex}\right){tex_base}"

    def factor(self, points: FloatArray) -> FloatArray:
        """p at points of shape ``(M, N)``; shape ``(M,)``."""
        return _values(self.terms, points)

    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        """Rejection from the Dirichlet measure, under the bound Σ |coefficient| · max of each monomial."""
        size = sample_size(size)
        alpha = [float(a) for a in self.alpha]
        bound = sum(abs(float(x)) * _largest(b) for b, x in self.terms)
        kept = [np.empty((0, self.N))]
        missing, batch = size, max(64, min(size, 100_000))
        while missing > 0:
            points = rng.dirichlet(alpha, batch)
            accepted = points[rng.random(batch) * bound < _values(self.terms, points)][:missing]
            kept.append(accepted)
            missing -= len(accepted)
        joined: FloatArray = np.concatenate(kept)
        return joined


def polynomial_density(
    base: Measure, polynomial: str | Mapping[tuple[int, ...], int | str | Fraction]
) -> PolynomialDensity:
    """A polynomial times a Dirichlet density, normalised.

    Parameters
    ----------
    base : Measure
        A flat or Dirichlet measure; a polynomial density multiplies further.
    polynomial : str or mapping
        Text such as ``"(x1 - x2)^2 * x3"``, or {exponents: coefficient}. That it is non-negative on the simplex is the
        caller's promise; it is checked at vertices, centres of faces and 4096 seeded points.

    Raises
    ------
    InputError
        Another base, a polynomial that does not parse, one that is negative somewhere or zero everywhere.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> polynomial_density(flat(2), "(x1 - x2)^2").moment((2, 0))  # Hilbert–Schmidt, N = 2
    Fraction(2, 5)
    """
    if isinstance(base, PolynomialDensity):
        alpha, first = base.alpha, dict(base.terms)
    elif isinstance(base, Dirichlet):
        alpha, first = base.alpha, None
    else:
        raise InputError("base must be a flat, Dirichlet or polynomial measure", base)
    n = len(alpha)
    found = polynomial_of(polynomial, n)
    if first is not None:
        found = polynomial_of(f"({polynomial_text(first)})*({polynomial_text(found)})", n)
    terms: Terms = tuple(found.items())
    _refuse_negative(terms, n)
    if not terms or polynomial_integral(alpha, terms, (0,) * n) <= 0:
        raise InputError("the density must have a positive integral", polynomial_text(found))
    return PolynomialDensity(alpha, terms)


def _refuse_negative(terms: Terms, n: int) -> None:
    rng = np.random.default_rng(0)
    faces = [face for size in range(1, min(n, 4) + 1) for face in combinations(range(n), size)][:SPOT_CHECKS]
    centres = np.zeros((len(faces), n))
    for row, face in zip(centres, faces, strict=True):
        row[list(face)] = 1 / len(face)
    points = np.concatenate([centres, *(rng.dirichlet([a] * n, SPOT_CHECKS // 2) for a in (1.0, 0.3))])
    for i in np.argsort(_values(terms, points))[:16]:
        # the float points only suggest where to look; an exact value decides
        exact = [Fraction(float(x)).limit_denominator(10**6) for x in points[i]]
        total = sum(exact)
        at = [x / total for x in exact]
        value = sum((x * math.prod(p**a for p, a in zip(at, b, strict=True)) for b, x in terms), Fraction(0))
        if value < 0:
            where = ", ".join(f"{float(x):.4g}" for x in at)
            raise InputError("the density must not be negative", f"{float(value):.4g} at ({where})")


def _values(terms: Terms, points: FloatArray) -> FloatArray:
    total = np.zeros(len(points))
    for b, x in terms:
        total += float(x) * np.prod(points ** np.array(b), axis=1)
    return total


def _largest(b: tuple[int, ...]) -> float:
    """Maximum of the monomial on the simplex, at λ_i = b_i/|b|."""
    degree = sum(b)
    return math.prod((k / degree) ** k for k in b if k)


def _swapped(a: tuple[int, ...], i: int, j: int) -> tuple[int, ...]:
    moved = list(a)
    moved[i], moved[j] = moved[j], moved[i]
    return tuple(moved)


def _polynomial_tex(terms: Terms) -> str:
    text = ""
    for b, x in terms:
        factors = "".join(rf"\lambda_{{{i}}}" + (f"^{{{k}}}" if k > 1 else "") for i, k in enumerate(b, 1) if k)
        size = abs(x)
        number = (
            ""
            if size == 1 and factors
            else str(size)
            if size.denominator == 1
            else rf"\tfrac{{{size.numerator}}}{{{size.denominator}}}"
        )
        text += ("-" if x < 0 else "+" if text else "") + number + factors
    return text
