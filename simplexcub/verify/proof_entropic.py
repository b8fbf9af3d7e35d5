"""Equations for functions besides polynomials, added to those of a structure, with outward-rounded bounds.

For a trace f(λ) = Σ h(λ_i) the equation is Σ_o w_o (size) Σ_b m_b h(v_b) − E[f] = 0. Values and gradients come from
interval arithmetic and are cut off to the nearest unit, which is checked to be less than one unit away; the means come
from :mod:`simplexcub.verify.entropic` with digits to spare. Second derivatives are bounded over the box by

    |h″| ≤ max(l^{q−2}, u^{q−2}) (|q (q − 1)| max |ln x| + |2q − 1|)   for h = x^q ln x,  l ≤ x ≤ u,

and without the logarithm by its first term alone, with max |ln x| = 1. A coordinate printed as 0 stays 0 and adds
nothing.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from fractions import Fraction
from typing import Any

import numpy as np
from mpmath import iv, mp

from simplexcub.entropic import Named
from simplexcub.measures import Measure
from simplexcub.verify.entropic import mean_of
from simplexcub.verify.proof_orbits import Orbit
from simplexcub.verify.proof_system import ROUNDING, FloatArray, System

SPARE_BITS = 64


class ExtendedSystem(System):
    """The equations of `inner`, and one for each function."""

    def __init__(self, inner: System, also: Sequence[Named], measure: Measure) -> None:
        self.inner = inner
        self.also = tuple(also)
        self.measure = measure
        self.structure, self.degree, self.n, self.whole = inner.structure, inner.degree, inner.n, inner.whole
        self.shares, self.factor, self.unknowns = inner.shares, inner.factor, inner.unknowns
        self.descending = inner.descending
        self.means = [*inner.means, *(Fraction(0) for _ in also)]  # those of the functions are no fractions

    def residuals(self, x: Sequence[int], one: int) -> list[Fraction]:
        """Those of the polynomials, and 1 for each function: fractions cannot show that its residual is 0."""
        return [*self.inner.residuals(x, one), *(Fraction(1) for _ in self.also)]

    def scaled(self, x: Sequence[int], one: int, bits: int) -> list[int]:
        found = self.inner.scaled(x, one, bits)
        orbits = list(zip(self.structure.orbits, self.point(x, one), strict=True))
        for label in self.also:
            with mp.workprec(bits + SPARE_BITS), interval_bits(bits + SPARE_BITS):
                dps = math.ceil((bits + SPARE_BITS) * math.log10(2))
                total = -_around(mean_of(label, self.measure, dps), bits)
                for orbit, (weight, values) in orbits:
                    total += iv.mpf(weight) / one * self._trace(label, orbit, values, one)
                found.append(_cut_off(total, bits))
        return found

    def jacobian(self, x: Sequence[int], one: int, bits: int) -> list[list[int]]:
        columns = iter(self.inner.jacobian(x, one, bits))
        extended: list[list[int]] = []
        with interval_bits(bits + SPARE_BITS):
            for orbit, (weight, values) in zip(self.structure.orbits, self.point(x, one), strict=True):
                if self.shares is None:
                    traces = [_cut_off(self._trace(label, orbit, values, one), bits) for label in self.also]
                    extended.append([*next(columns), *traces])
                for b in orbit.free:
                    lift = iv.mpf(weight * self._count(orbit) * orbit.multiplicities[b]) / one
                    slopes = [
                        lift * (_slope(label, values[b], one) - _slope(label, values[orbit.dependent], one))
                        for label in self.also
                    ]
                    extended.append([*next(columns), *(_cut_off(s, bits) for s in slopes)])
        return extended

    def curvature(self, x: Sequence[int], one: int, radius: float) -> FloatArray:
        bounds = np.zeros(len(self.also))
        for orbit, (weight, values) in zip(self.structure.orbits, self.point(x, one), strict=True):
            speeds = self.speeds(orbit)
            for e, label in enumerate(self.also):
                for b, m in enumerate(orbit.multiplicities):
                    if speeds[b]:
                        room = float(speeds[b]) * radius * ROUNDING
                        first, second = _bounds(
                            label, values[b] / one / ROUNDING - room, values[b] / one * ROUNDING + room
                        )
                        size = self._count(orbit) * m * float(speeds[b]) * ROUNDING
                        bounds[e] += size * (
                            2 * first + (abs(weight) / one * ROUNDING + radius) * float(speeds[b]) * second
                        )
        return np.concatenate([self.inner.curvature(x, one, radius), bounds * ROUNDING])

    def _count(self, orbit: Orbit) -> int:
        return 1 if self.whole else orbit.size

    def _trace(self, label: Named, orbit: Orbit, values: Sequence[int], one: int) -> Any:
        total = iv.mpf(0)
        for m, v in zip(orbit.multiplicities, values, strict=True):
            if v:
                total += m * _power(label.power or Fraction(0), v, one) * (_log(v, one) if label.logarithm else 1)
        return self._count(orbit) * total

    def _values(self, orbit: Orbit, values: Sequence[int], one: int) -> list[int]:
        return self.inner._values(orbit, values, one)

    def _slopes(self, orbit: Orbit, values: Sequence[int], one: int) -> list[list[int]]:
        return self.inner._slopes(orbit, values, one)

    def _bounds(self, orbit: Orbit, upper: FloatArray, speeds: FloatArray) -> tuple[FloatArray, FloatArray]:
        return self.inner._bounds(orbit, upper, speeds)


@contextmanager
def interval_bits(bits: int) -> Iterator[None]:
    """Interval arithmetic with so many bits, and as before afterwards."""
    before = iv.prec
    iv.prec = bits
    try:
        yield
    finally:
        iv.prec = before


def _log(v: int, one: int) -> Any:
    return iv.log(iv.mpf(v) / one)


def _power(q: Fraction, v: int, one: int) -> Any:
    x = iv.mpf(v) / one
    return x ** int(q) if q.denominator == 1 else iv.exp(iv.mpf(q.numerator) / q.denominator * iv.log(x))


def _slope(label: Named, v: int, one: int) -> Any:
    q = label.power or Fraction(0)
    factor = iv.mpf(q.numerator) / q.denominator
    return _power(q - 1, v, one) * (factor * _log(v, one) + 1 if label.logarithm else factor)


def _around(mean: Any, bits: int) -> Any:
    """The mean with the error that its last digits may have."""
    room = mp.ldexp(1 + abs(mean), -bits - SPARE_BITS // 2)
    return iv.mpf([mean - room, mean + room])


def _cut_off(value: Any, bits: int) -> int:
    """`value`·2^bits to the nearest integer, which the whole interval is less than one unit away from."""
    low, high = (_fraction(end) * (1 << bits) for end in value._mpi_)
    nearest = round((low + high) / 2)
    if not (abs(low - nearest) < 1 and abs(high - nearest) < 1):
        raise ArithmeticError("an interval is wider than the unit of the proof")
    return nearest


def _fraction(raw: Any) -> Fraction:
    """The exact value of a finite number in mpmath's raw form (sign, mantissa, exponent, bits)."""
    sign, mantissa, exponent, _ = raw
    if not mantissa and exponent:
        raise ArithmeticError("an interval of the proof is not bounded")
    return Fraction(-int(mantissa) if sign else int(mantissa)) * Fraction(2) ** int(exponent)


def _bounds(label: Named, low: float, high: float) -> tuple[float, float]:
    """Upper bounds of |h′| and |h″| between low and high; infinite where low is not above 0."""
    if not low > 0:
        return math.inf, math.inf
    q = float(label.power or 0)
    log = max(abs(math.log(low)), abs(math.log(high))) * ROUNDING if label.logarithm else 1.0
    first = max(low ** (q - 1), high ** (q - 1)) * (abs(q) * log + label.logarithm)
    second = max(low ** (q - 2), high ** (q - 2)) * (abs(q * (q - 1)) * log + label.logarithm * abs(2 * q - 1))
    return first * ROUNDING, second * ROUNDING
