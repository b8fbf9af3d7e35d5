"""Means that need no quadrature: functions whose means the moments give in closed form.

Each takes a measure and raises an InputError where it cannot do it: no closed form, or a degree beyond its reach.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations
from math import comb

from mpmath import mp, mpf

from simplexcub.errors import InputError
from simplexcub.measures import Measure, ordered
from simplexcub.moments.digamma import DigammaSum, fraction_text

HIGHEST_POWER = 200  # beyond it the fractions grow long and slow, and quadrature is as good
MOST_SUBSETS = 20_000
MOST_ORDERED = 6  # the expanded density of the chamber takes seconds from N = 6 on
LONGEST_FORM = 200
DIGITS = 50


@dataclass(frozen=True)
class Exact:
    """A mean known in closed form.

    Attributes
    ----------
    value : mpf
        To 50 digits.
    fraction : Fraction or None
        The mean itself where it is rational.
    form : str
        The closed form as text, such as ``3/5`` or ``ln 3 - 1/2``; empty where there are only digits, or it is long.
    """

    value: mpf
    fraction: Fraction | None = None
    form: str = ""


Closed = Callable[[Measure], Exact]


def rational(value: Fraction) -> Exact:
    """An exact mean that is a fraction."""
    with mp.workdps(DIGITS):
        return Exact(mpf(value.numerator) / value.denominator, value, _short(fraction_text(value)))


def power_sum_mean(q: Fraction, constant: Fraction, factor: Fraction) -> Closed:
    """E[constant + factor · Σ λ_i^q]; a fraction where q is an integer."""

    def mean(measure: Measure) -> Exact:
        if q.denominator == 1 and q <= HIGHEST_POWER:
            return rational(constant + factor * measure.power_mean_exact(int(q)))
        value = measure.power_mean(q, dps=DIGITS)
        with mp.workdps(DIGITS):
            return Exact(_real(constant) + _real(factor) * value)

    return mean


def entropy_mean(measure: Measure) -> Exact:
    """E[−Σ λ_i ln λ_i]."""
    return _digamma(measure.entropy())


def relative_entropy_mean(measure: Measure) -> Exact:
    """E[ln N + Σ λ_i ln λ_i]."""
    found = entropy_mean(measure)
    with mp.workdps(DIGITS):
        form = f"ln {measure.N} - {found.form}" if found.fraction is not None and found.form else ""
        return Exact(mp.log(measure.N) - found.value, None, form)


def ordered_mean(places: Callable[[int], dict[int, int]]) -> Closed:
    """E of an integer combination of the ordered spectrum; `places` maps N to {index from 0: coefficient}."""

    def mean(measure: Measure) -> Exact:
        if measure.N > MOST_ORDERED:
            raise InputError(f"N must be at most {MOST_ORDERED} for exact means of ordered spectra", measure.N)
        law = ordered(measure)
        total = Fraction(0)
        for i, factor in places(measure.N).items():
            total += factor * law.moment(tuple(int(j == i) for j in range(measure.N)))
        return rational(total)

    return mean


def elementary_mean(k: int | None) -> Closed:
    """E[e_k], the elementary symmetric polynomial; k = None is the determinant, k = N."""

    def mean(measure: Measure) -> Exact:
        n = measure.N
        degree = n if k is None else k
        if measure.is_symmetric:
            return rational(comb(n, degree) * measure.moment(tuple(int(i < degree) for i in range(n))))
        if comb(n, degree) > MOST_SUBSETS:
            raise InputError(f"e_{degree} must have at most {MOST_SUBSETS} terms", comb(n, degree))
        picks = combinations(range(n), degree)
        return rational(sum((measure.moment(tuple(int(i in p) for i in range(n))) for p in picks), Fraction(0)))

    return mean


def in_bits(found: Exact) -> Exact:
    """The same mean divided by ln 2."""
    with mp.workdps(DIGITS):
        form = f"({found.form})/ln 2" if found.form else ""
        return Exact(found.value / mp.log(2), None, form)


def _digamma(number: DigammaSum) -> Exact:
    if number.is_rational:
        return rational(number.fraction)
    return Exact(number.value(DIGITS), None, _short(str(number)))


def _real(value: Fraction) -> mpf:
    return mpf(value.numerator) / value.denominator


def _short(form: str) -> str:
    return form if len(form) <= LONGEST_FORM else ""
