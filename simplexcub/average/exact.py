"""Means that need no quadrature: functions that are polynomials in power sums, through the exact moments."""

from __future__ import annotations

from fractions import Fraction

from simplexcub.average.functions import SpectralFunction
from simplexcub.measures import Measure

HIGHEST_POWER = 200  # beyond it the fractions grow long and slow, and quadrature is as good


def exact_mean(f: object, measure: Measure) -> Fraction | None:
    """E[f] as a fraction, or None where `f` is not known to be a polynomial of moderate degree.

    Examples
    --------
    >>> from simplexcub.average.functions import spectral_function
    >>> from simplexcub.measures import hilbert_schmidt
    >>> exact_mean(spectral_function("purity"), hilbert_schmidt(3))
    Fraction(3, 5)
    """
    if not isinstance(f, SpectralFunction) or f.power_sum is None or f.power_sum.power > HIGHEST_POWER:
        return None
    k = f.power_sum.power
    total = Fraction(0)
    for i in range(measure.N):
        total += measure.moment((0,) * i + (k,) + (0,) * (measure.N - i - 1))
    return f.power_sum.constant + f.power_sum.factor * total
