"""What every measure offers: exact moments by route, power sums, real powers, entropies, its density and samples."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Sequence
from fractions import Fraction
from typing import Any

import numpy as np
from mpmath import mp, mpf
from numpy.typing import NDArray

from simplexcub.errors import InputError, NothingFound
from simplexcub.measures.arguments import is_integer, real_power
from simplexcub.moments.digamma import DigammaSum
from simplexcub.moments.partitions import set_partitions
from simplexcub.moments.powersum import power_sum_moment

FloatArray = NDArray[np.float64]
Rational = int | str | Fraction
MOST_DIGITS = 10_000
EXACT_UP_TO = 1_000  # integer powers beyond it, and beyond N, are taken from the closed form for real ones
HIGHEST_POWER = 20_000


class Measure(ABC):
    """A probability measure on {λ ∈ R^N : λ_i ≥ 0, Σ λ_i = 1}.

    Attributes
    ----------
    N : int
        Number of components.
    """

    N: int

    @property
    @abstractmethod
    def routes(self) -> tuple[str, ...]:
        """Names of the formulas for the moments: the first is the quickest, the last shares nothing with the first."""

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

    def over_dirichlet(self) -> tuple[tuple[Fraction, ...], bool]:
        """(α, v): the density is Dirichlet(α), times Π (λ_i − λ_j)² where v is true.

        Raises
        ------
        NothingFound
            The density has no such form, so there is no product rule to fall back on.
        """
        raise NothingFound(
            f"product rule for {self}",
            "its density is not Dirichlet with or without squared differences",
            "Give the search a larger budget, or ask a lower degree.",
        )

    def moment(self, exponents: Sequence[int], *, route: str | None = None) -> Fraction:
        """Exact mean E[Π λ_i^{a_i}].

        Parameters
        ----------
        exponents : sequence of int
            One non-negative exponent per component.
        route : str, optional
            Which formula computes it; one of ``routes``. All give the same number. By default the quickest that serves.

        Raises
        ------
        InputError
            Wrong length, a negative or non-integer exponent, an unknown route, or more work than the route can do.

        Examples
        --------
        >>> from simplexcub.measures import hilbert_schmidt
        >>> hilbert_schmidt(3).moment((2, 1, 0))
        Fraction(1, 33)
        """
        powers = tuple(exponents)
        if len(powers) != self.N:
            raise InputError(f"exponents must have one entry per component, {self.N} here", powers)
        if not all(is_integer(a) and a >= 0 for a in powers):
            raise InputError("exponents must be non-negative integers", powers)
        exact = tuple(int(a) for a in powers)
        return self._moment(exact, self.default_route(exact) if route is None else self._known(route))

    def power_sum_moment(self, parts: Sequence[int], *, route: str | None = None) -> Fraction:
        """Exact mean E[Π p_k over k in `parts`] of power sums p_k = Σ λ_i^k.

        Parameters
        ----------
        parts : sequence of int
            Positive integers in any order; those equal to 1 change nothing, since p_1 = 1.
        route : str, optional
            As for :meth:`moment`.

        Raises
        ------
        InputError
            A part below 1 or not an integer, an unknown route, or a degree beyond the reach of the route.

        Examples
        --------
        >>> from simplexcub.measures import bures
        >>> bures(3).power_sum_moment((2, 2))
        Fraction(215, 429)
        """
        given = tuple(parts)
        if not all(is_integer(k) and k >= 1 for k in given):
            raise InputError("power sums must have positive integer powers", given)
        exact = tuple(sorted((int(k) for k in given if k > 1), reverse=True))
        return self._power_sum(exact, None if route is None else self._known(route))

    def power_sum_cumulant(self, parts: Sequence[int]) -> Fraction:
        """Exact joint cumulant of the power sums p_k, k in `parts`: mean, covariance, third cumulant, …

        Raises
        ------
        InputError
            As for :meth:`power_sum_moment`; no parts, or more than 8.

        Examples
        --------
        >>> from simplexcub.measures import flat
        >>> flat(2).power_sum_cumulant((2, 2))  # the variance of the purity
        Fraction(1, 45)
        """
        given = tuple(parts)
        if not 1 <= len(given) <= 8:
            raise InputError("a cumulant must have 1 to 8 power sums", len(given))
        total = Fraction(0)
        for blocks in set_partitions(given):
            term = Fraction(1)
            for r, block in enumerate(blocks):
                term *= self.power_sum_moment(block) * (-r if r else 1)
            total += term
        return total

    def power_sum_covariance(self, j: int, k: int) -> Fraction:
        """cov(p_j, p_k), exactly; the variance of p_k where j = k."""
        return self.power_sum_cumulant((j, k))

    def power_mean(self, q: float | str | Fraction | mpf, *, dps: int = 50) -> mpf:
        """E[Σ λ_i^q] for real q, from Gamma functions, to `dps` significant digits.

        Parameters
        ----------
        q : int, float, str, Fraction or mpf
            Text such as ``"1/3"`` or ``"0.1"`` is exact; a float is taken as the binary number it is.
        dps : int, optional
            Significant digits of the result.

        Raises
        ------
        InputError
            q at or below the pole where the mean diverges, no real number, or a family without a closed form.

        Examples
        --------
        >>> from simplexcub.measures import hilbert_schmidt
        >>> round(float(hilbert_schmidt(2).power_mean("1/2")), 12)  # 44/35
        1.257142857143
        """
        power = real_power(q)
        if not is_integer(dps) or not 1 <= dps <= MOST_DIGITS:
            raise InputError(f"dps must be an integer between 1 and {MOST_DIGITS}", dps)
        whole = isinstance(power, Fraction) and power.denominator == 1
        if not whole or power > max(self.N, EXACT_UP_TO):
            pole = self._pole()
            if power <= (mpf(pole.numerator) / pole.denominator if isinstance(power, mpf) else pole):
                raise InputError(f"q must be above {pole}, where the mean of Σ λ^q diverges for {self}", q)
            return self._power_mean(power, int(dps))
        value = self.power_mean_exact(int(power))
        with mp.workdps(dps):
            return mpf(value.numerator) / value.denominator

    def power_mean_exact(self, q: int) -> Fraction:
        """E[Σ λ_i^q] as a fraction, for an integer q; it may be negative down to the pole.

        Raises
        ------
        InputError
            q at or below the pole, or not an integer.

        Examples
        --------
        >>> from simplexcub.measures import induced
        >>> induced(2, 4).power_mean_exact(-1)
        Fraction(7, 1)
        """
        if not is_integer(q):
            raise InputError("q must be an integer for an exact mean", q, "Take power_mean for other q.")
        if q == 0:
            return Fraction(self.N)
        if q > HIGHEST_POWER:
            raise InputError(f"q must be at most {HIGHEST_POWER} for an exact mean", q, "Take power_mean for digits.")
        if q > 0:
            return self.power_sum_moment((q,))
        if q <= self._pole():
            raise InputError(f"q must be above {self._pole()}, where the mean of Σ λ^q diverges for {self}", q)
        return self._inverse_mean(-int(q))

    def log_mean(self, k: int) -> DigammaSum:
        """E[Σ λ_i^k ln λ_i] for an integer k ≥ 1, in closed form.

        Returns
        -------
        DigammaSum
            Rational where it can be; ``value(dps)`` gives digits, ``fraction`` the rational.

        Raises
        ------
        InputError
            k below 1 or not an integer, or a family without a closed form.

        Examples
        --------
        >>> from simplexcub.measures import bures
        >>> print(bures(2).log_mean(2))
        109/96 - 7/4 ln 2
        """
        if not is_integer(k) or k < 1:
            raise InputError("k must be an integer of at least 1", k)
        return self._log_mean(int(k))

    def entropy(self) -> DigammaSum:
        """Mean von Neumann (Shannon) entropy E[−Σ λ_i ln λ_i] in nats, in closed form.

        Examples
        --------
        >>> from simplexcub.measures import hilbert_schmidt
        >>> hilbert_schmidt(2).entropy().fraction
        Fraction(1, 3)
        """
        return -self.log_mean(1)

    def default_route(self, exponents: tuple[int, ...]) -> str:
        """The route that :meth:`moment` takes for these exponents when none is asked for."""
        return self.routes[0]

    def _known(self, route: str) -> str:
        if route not in self.routes:
            raise InputError(f"route must be one of {', '.join(self.routes)}", route)
        return route

    def _power_sum(self, parts: tuple[int, ...], route: str | None) -> Fraction:
        """`parts` is a partition without ones."""
        return power_sum_moment(lambda a: self.moment(a, route=route), self.N, parts, symmetric=self.is_symmetric)

    def _pole(self) -> Fraction:
        """Largest q at which E[Σ λ_i^q] diverges."""
        raise self._no_closed_form()

    def _power_mean(self, q: Fraction | mpf, dps: int) -> mpf:
        raise self._no_closed_form()

    def _inverse_mean(self, k: int) -> Fraction:
        raise self._no_closed_form()

    def _log_mean(self, k: int) -> DigammaSum:
        raise self._no_closed_form()

    def _no_closed_form(self) -> InputError:
        return InputError(
            "real powers and logarithms must be of a measure with a closed form",
            self,
            "These are the Dirichlet, Hilbert-Schmidt, induced, Bures and polynomial families.",
        )

    def __str__(self) -> str:
        inner = ", ".join(f"{k}={v}" for k, v in self.parameters().items() if k != "family")
        return f"{self.family}({inner})"
