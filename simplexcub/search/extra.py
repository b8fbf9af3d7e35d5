"""Functions beside the polynomials that a rule is to average exactly: values, slopes and means for the search.

Named ones are traces Σ h(λ_i) with h(x) = x^q or x^k ln x; their means come in closed form from the measure. A caller
may add symmetric functions of their own with their means, as numbers.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np
from mpmath import mp, mpf
from numpy.typing import NDArray

from simplexcub.entropic import Named, canonical, named
from simplexcub.errors import InputError
from simplexcub.measures import Measure
from simplexcub.symmetry import Group

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.object_]

_SLOPE_DIGITS = 40  # for differences of a caller's function


@dataclass(frozen=True)
class KnownMean:
    """A symmetric function of the spectrum whose mean the caller knows.

    Attributes
    ----------
    name : str
        Letters, digits and `` .()+-``; a table says that the rule is exact for ``user:NAME``.
    value : callable
        Takes the N components as mpmath numbers and gives an mpmath number at the working precision, symmetric in them.
    mean : str or mpf
        Its mean, to at least as many digits as the rule is to have.
    """

    name: str
    value: Callable[[Sequence[Any]], Any]
    mean: str | mpf


@dataclass(frozen=True)
class Extra:
    """One function of the space besides the polynomials; `user` is None for the named ones."""

    label: Named
    user: KnownMean | None = None

    def jet(self, values: FloatArray, multiplicities: Sequence[int]) -> FloatArray:
        """Values and derivatives at distinct coordinates, shape (P, k), the last coordinate following from the sum."""
        if self.user is not None:
            return self._user_jet(values, multiplicities)
        m = np.array(multiplicities, dtype=float)
        p = float(self.label.power or 0)
        positive = np.where(values > 0, values, 1.0)
        log = np.log(positive) if self.label.logarithm else 1.0
        h = np.where(values > 0, positive**p * log, 0.0)
        slope = p * positive ** (p - 1) * log + (positive ** (p - 1) if self.label.logarithm else 0.0)
        return np.concatenate([(h @ m)[:, None], m[:-1] * (slope[:, :-1] - slope[:, -1:])], axis=1)

    def _user_jet(self, values: FloatArray, multiplicities: Sequence[int]) -> FloatArray:
        out = np.empty(values.shape)
        with mp.workdps(_SLOPE_DIGITS):
            step = mpf(10) ** (-_SLOPE_DIGITS // 3)
            for i, row in enumerate(values):
                point = [mpf(float(x)) for x in row]
                out[i, 0] = float(self._at(point, multiplicities))
                for d, m in enumerate(multiplicities[:-1]):
                    ends = []
                    for sign in (1, -1):
                        moved = list(point)
                        moved[d] += sign * step
                        moved[-1] -= sign * step * m / multiplicities[-1]
                        ends.append(self._at(moved, multiplicities))
                    out[i, 1 + d] = float((ends[0] - ends[1]) / (2 * step))
        return out

    def fixed(self, values: IntArray, multiplicities: Sequence[int], bits: int) -> IntArray:
        """Values at distinct coordinates in integers scaled by 2^bits; shape (P,)."""
        with mp.workprec(bits + 20):
            one = mpf(1 << bits)
            return np.array(
                [int(self._at([v / one for v in row], multiplicities) * one) for row in values], dtype=object
            )

    def _at(self, values: Sequence[mpf], multiplicities: Sequence[int]) -> mpf:
        if self.user is not None:
            return self.user.value([v for v, m in zip(values, multiplicities, strict=True) for _ in range(m)])
        q = self.label.power or Fraction(0)
        power = mpf(q.numerator) / q.denominator
        terms = (
            m * v**power * (mp.log(v) if self.label.logarithm else 1)
            for v, m in zip(values, multiplicities, strict=True)
            if v
        )
        return mp.fsum(terms)

    def mean_fixed(self, measure: Measure, bits: int) -> int:
        """The mean, scaled by 2^bits."""
        dps = math.ceil(bits * math.log10(2)) + 10
        if self.user is not None:
            with mp.workdps(dps):
                return int(mpf(self.user.mean) * (1 << bits))
        value = finite_mean(self.label, measure, dps)
        with mp.workdps(dps):
            return int(value * (1 << bits))


def finite_mean(label: Named, measure: Measure, dps: int) -> mpf:
    """The mean of a named function to `dps` digits.

    Raises
    ------
    InputError
        It is infinite, or the measure has no closed form for it.
    """
    q = label.power or Fraction(0)
    try:
        return measure.log_mean(int(q)).value(dps) if label.logarithm else measure.power_mean(q, dps=dps)
    except InputError as error:
        raise InputError(f"{label.formula} must have a finite, known mean: {error.rule}", label.name) from None


def read_extras(also: Sequence[str | KnownMean], measure: Measure, group: Group) -> tuple[Extra, ...]:
    """The functions that `also` lists, each with a finite mean.

    Raises
    ------
    InputError
        An unknown name, a function named twice, an infinite mean, or a function of the caller's that is not symmetric.
    """
    found: list[Extra] = []
    for item in also:
        if isinstance(item, KnownMean):
            extra = Extra(named(canonical(f"user:{item.name}")), item)
            _check_user(item, group)
        elif isinstance(item, str) and not item.startswith("user:"):
            extra = Extra(named(item))
            finite_mean(extra.label, measure, 15)
        else:
            raise InputError("also must list names, or functions as KnownMean(name, value, mean)", repr(item))
        if extra.label in [other.label for other in found]:
            raise InputError("every function in also must be named once", extra.label.name)
        found.append(extra)
    return tuple(found)


def _check_user(item: KnownMean, group: Group) -> None:
    with mp.workdps(30):
        try:
            mean = mpf(item.mean)
        except (TypeError, ValueError):
            mean = mp.nan
        if not mp.isfinite(mean):
            raise InputError(f"the mean of {item.name} must be a finite number", item.mean)
        point = [mpf(i + 1) ** 2 / sum((j + 1) ** 2 for j in range(group.n)) for i in range(group.n)]
        here = item.value(point)
        for g in group.generators:
            if abs(item.value([point[i] for i in g]) - here) > mpf(10) ** -20 * (1 + abs(here)):
                raise InputError(
                    f"{item.name} must be symmetric in its components", "a value that changes with their order"
                )
