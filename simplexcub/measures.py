"""The measures that are averaged over. Every one is a probability measure: E[1] = 1.

A measure knows its exact moments by two routes or more, its density, how to sample itself, and how it reads in a table.
"""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations
from typing import Any, ClassVar

import numpy as np
from numpy.typing import NDArray

from simplexcub.errors import InputError
from simplexcub.moments.alternant import alternant_moment, difference
from simplexcub.moments.dirichlet import rising_factorial_moment, stick_breaking_moment
from simplexcub.moments.powersum import power_sum_moment
from simplexcub.moments.schur import schur_moment

FloatArray = NDArray[np.float64]
Rational = int | str | Fraction


class Measure(ABC):
    """A probability measure on {λ ∈ R^N : λ_i ≥ 0, Σ λ_i = 1}."""

    N: int
    routes: ClassVar[tuple[str, ...]]

    @property
    @abstractmethod
    def family(self) -> str:
        """Name of the family, as on the command line."""

    @property
    @abstractmethod
    def is_symmetric(self) -> bool:
        """Whether the measure is invariant under all permutations of the components."""

    @abstractmethod
    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction: ...

    @abstractmethod
    def parameters(self) -> dict[str, Any]:
        """The record that stands in a table's ``measure`` field."""

    @abstractmethod
    def density(self) -> tuple[str, str]:
        """The normalised density with respect to dλ_1 … dλ_{N−1}, as plain text and as LaTeX."""

    @abstractmethod
    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        """Draw `size` independent points; shape ``(size, N)``."""

    @abstractmethod
    def over_dirichlet(self) -> tuple[tuple[Fraction, ...], bool]:
        """(α, v): the density is Dirichlet(α), times Π (λ_i − λ_j)² where v is true."""

    def moment(self, exponents: Sequence[int], *, route: str | None = None) -> Fraction:
        """Exact mean E[Π λ_i^{a_i}].

        Parameters
        ----------
        exponents : sequence of int
            One non-negative exponent per component.
        route : str, optional
            Which formula computes it; one of ``routes``, the first by default. All give the same number.

        Raises
        ------
        InputError
            Wrong length, a negative or non-integer exponent, an unknown route.

        Examples
        --------
        >>> hilbert_schmidt(3).moment((2, 1, 0))
        Fraction(1, 33)
        """
        powers = tuple(exponents)
        if len(powers) != self.N:
            raise InputError(f"exponents must have one entry per component, {self.N} here", powers)
        if any(isinstance(a, bool) or not isinstance(a, int | np.integer) or a < 0 for a in powers):
            raise InputError("exponents must be non-negative integers", powers)
        chosen = self.routes[0] if route is None else route
        if chosen not in self.routes:
            raise InputError(f"route must be one of {', '.join(self.routes)}", chosen)
        return self._moment(tuple(int(a) for a in powers), chosen)

    def power_sum_moment(self, parts: Sequence[int]) -> Fraction:
        """Exact mean E[Π p_k] over k in `parts`, p_k = Σ λ_i^k, for a symmetric measure.

        Examples
        --------
        >>> hilbert_schmidt(3).power_sum_moment((2,))
        Fraction(3, 5)
        """
        if not self.is_symmetric:
            raise InputError("power sums need a symmetric measure", self)
        return power_sum_moment(self.moment, self.N, parts)

    def __str__(self) -> str:
        inner = ", ".join(f"{k}={v}" for k, v in self.parameters().items() if k != "family")
        return f"{self.family}({inner})"


@dataclass(frozen=True)
class Dirichlet(Measure):
    """Dirichlet(α): density ∝ Π λ_i^(α_i − 1). All α_i = 1 is the flat measure."""

    alpha: tuple[Fraction, ...]
    routes: ClassVar[tuple[str, ...]] = ("rising-factorial", "stick-breaking")

    @property
    def N(self) -> int:  # type: ignore[override]
        return len(self.alpha)

    @property
    def family(self) -> str:
        return "flat" if all(a == 1 for a in self.alpha) else "dirichlet"

    @property
    def is_symmetric(self) -> bool:
        return len(set(self.alpha)) == 1

    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction:
        formula = rising_factorial_moment if route == "rising-factorial" else stick_breaking_moment
        return formula(self.alpha, exponents)

    def parameters(self) -> dict[str, Any]:
        if self.family == "flat":
            return {"family": "flat", "N": self.N}
        return {"family": "dirichlet", "alpha": [str(a) for a in self.alpha]}

    def density(self) -> tuple[str, str]:
        if self.family == "flat":
            volume = math.factorial(self.N - 1)
            return str(volume), str(volume)
        plain = " ".join(f"λ{i}^({a - 1})" for i, a in enumerate(self.alpha, 1) if a != 1)
        latex = r"\,".join(rf"\lambda_{{{i}}}^{{{a - 1}}}" for i, a in enumerate(self.alpha, 1) if a != 1)
        total = sum(self.alpha)
        gammas = " ".join(f"Γ({a})" for a in self.alpha)
        tex_gammas = "".join(rf"\Gamma({a})" for a in self.alpha)
        return f"Γ({total})/({gammas}) · {plain}", rf"\frac{{\Gamma({total})}}{{{tex_gammas}}}\,{latex}"

    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        return rng.dirichlet([float(a) for a in self.alpha], size)

    def over_dirichlet(self) -> tuple[tuple[Fraction, ...], bool]:
        return self.alpha, False


@dataclass(frozen=True)
class Induced(Measure):
    """Eigenvalues of an N×N density matrix induced by tracing out a K-dimensional environment, K ≥ N.

    Density ∝ Π λ_i^(K−N) Π_{i<j} (λ_i − λ_j)². K = N is the Hilbert–Schmidt measure.
    """

    N: int
    K: int
    routes: ClassVar[tuple[str, ...]] = ("alternant", "schur")

    @property
    def family(self) -> str:
        return "hilbert-schmidt" if self.K == self.N else "induced"

    @property
    def is_symmetric(self) -> bool:
        return True

    def _moment(self, exponents: tuple[int, ...], route: str) -> Fraction:
        ordered = tuple(sorted(exponents, reverse=True))
        if route == "schur":
            return schur_moment(ordered, self.K)
        return alternant_moment(ordered, Fraction(self.K - self.N), difference, Fraction(self.N * self.K))

    def parameters(self) -> dict[str, Any]:
        return {"family": self.family, "N": self.N, "K": self.K}

    def _constant(self) -> Fraction:
        """1/∫ of the unnormalised density (Życzkowski & Sommers 2001, eq. 4.1)."""
        value = Fraction(math.factorial(self.N * self.K - 1))
        for j in range(self.N):
            value /= math.factorial(self.K - j - 1) * math.factorial(self.N - j)
        return value

    def density(self) -> tuple[str, str]:
        c = self.K - self.N
        power, tex_power = "", ""
        if c:
            power = " ".join(f"λ{i}" + (f"^{c}" if c > 1 else "") for i in range(1, self.N + 1)) + " "
            tex_power = rf"\prod_i\lambda_i^{{{c}}}" if c > 1 else r"\prod_i\lambda_i"
        pairs = " ".join(f"(λ{i}−λ{j})²" for i, j in combinations(range(1, self.N + 1), 2))
        return (
            f"{self._constant()} {power}{pairs}",
            rf"{self._constant()}\,{tex_power}\prod_{{i<j}}(\lambda_i-\lambda_j)^2",
        )

    def sample(self, rng: np.random.Generator, size: int) -> FloatArray:
        shape = (size, self.N, self.K)
        ginibre = rng.standard_normal(shape) + 1j * rng.standard_normal(shape)
        values = np.linalg.eigvalsh(ginibre @ ginibre.conj().transpose(0, 2, 1))
        spectra: FloatArray = np.clip(values, 0.0, None)
        spectra /= spectra.sum(axis=1, keepdims=True)
        return spectra

    def over_dirichlet(self) -> tuple[tuple[Fraction, ...], bool]:
        return (Fraction(self.K - self.N + 1),) * self.N, True


def _size(name: str, value: object, least: int, remedy: str = "") -> int:
    if isinstance(value, bool) or not isinstance(value, int | np.integer) or value < least:
        raise InputError(f"{name} must be an integer of at least {least}", value, remedy)
    return int(value)


def dirichlet(alpha: Sequence[Rational]) -> Dirichlet:
    """Dirichlet measure with parameters α_i > 0.

    Parameters
    ----------
    alpha : sequence of int, Fraction or str
        Exact numbers: ``2``, ``Fraction(1, 2)``, ``"1/2"``, ``"0.5"``. Floats are refused, since moments are exact.

    Raises
    ------
    InputError
        Fewer than two parameters, one that is not positive or not exact.

    Examples
    --------
    >>> dirichlet(["1/2", "1/2"]).moment((1, 1))
    Fraction(1, 8)
    """
    values = []
    for a in alpha:
        if isinstance(a, bool) or not isinstance(a, int | np.integer | str | Fraction):
            raise InputError("alpha must hold exact numbers", repr(a), 'Write it as a string such as "1/2" or "0.5".')
        try:
            value = Fraction(a) if isinstance(a, str | Fraction) else Fraction(int(a))
        except (ValueError, ZeroDivisionError):
            raise InputError("alpha must hold numbers such as 2, 1/2 or 0.5", repr(a)) from None
        if value <= 0:
            raise InputError("every alpha must be positive", a)
        values.append(value)
    if len(values) < 2:
        raise InputError("alpha must have at least 2 entries", tuple(str(v) for v in values))
    return Dirichlet(tuple(values))


def flat(N: int) -> Dirichlet:
    """Flat (uniform) measure on the simplex of N ≥ 2 components.

    Examples
    --------
    >>> flat(3).moment((1, 1, 0))
    Fraction(1, 12)
    """
    return Dirichlet((Fraction(1),) * _size("N", N, 2))


def hilbert_schmidt(N: int) -> Induced:
    """Eigenvalue measure of random N×N density matrices with respect to the Hilbert–Schmidt distance, N ≥ 2."""
    return induced(N, N)


def induced(N: int, K: int) -> Induced:
    """Eigenvalue measure of the N×N marginal of a random pure state of N·K dimensions, K ≥ N ≥ 2.

    Raises
    ------
    InputError
        N < 2 or K < N. For K < N the spectrum has N − K zeros; its other part is ``induced(K, N)``.
    """
    n = _size("N", N, 2)
    remedy = f"K is the environment's dimension; for K < N the non-zero spectrum follows induced(N={K}, K={N})."
    return Induced(n, _size("K", K, n, remedy))


_BUILDERS: dict[str, tuple[tuple[str, ...], Any]] = {
    "flat": (("N",), flat),
    "dirichlet": (("alpha",), dirichlet),
    "hilbert-schmidt": (("N",), hilbert_schmidt),
    "induced": (("N", "K"), induced),
}
FAMILIES = tuple(_BUILDERS)


def from_parameters(record: Mapping[str, Any]) -> Measure:
    """The measure that a table's ``measure`` field or a command line describes.

    Raises
    ------
    InputError
        An unknown family, a missing parameter, or one out of range.
    """
    family = record.get("family")
    if family not in _BUILDERS:
        raise InputError(f"measure must be one of {', '.join(FAMILIES)}", family)
    names, build = _BUILDERS[family]
    missing = [name for name in names if record.get(name) is None]
    if missing:
        raise InputError(f"measure {family} needs {' and '.join(names)}", f"no {' and no '.join(missing)}")
    measure: Measure = build(*(record[name] for name in names))
    for name in ("N", "K"):
        given = record.get(name)
        if given is not None and given != measure.parameters().get(name, measure.N if name == "N" else given):
            raise InputError(f"{name} must agree with the measure {measure}", given)
    return measure

