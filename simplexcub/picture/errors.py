"""The error of the shipped rules on a function, against its exact mean or else against the best rule."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from mpmath import mpf

from simplexcub.average.exact import exact_mean
from simplexcub.average.functions import SpectralFunction
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.table import catalogue, load

_DIGITS = 30
_FEWEST = 2


@dataclass(frozen=True)
class Error:
    """What one rule makes of a function.

    Attributes
    ----------
    degree, nodes : int
    value, error : float
        The rule's mean of the function, and its distance from the reference.
    """

    degree: int
    nodes: int
    value: float
    error: float


@dataclass(frozen=True)
class Errors:
    """Errors of rules of rising degree.

    Attributes
    ----------
    rules : tuple of Error
    reference : float
    exact : bool
        Whether the reference is the mean itself; if not, it is the value of the last rule, which is left out.
    spread : float
        Standard deviation of the function under the measure, by the last rule.
    """

    rules: tuple[Error, ...]
    reference: float
    exact: bool
    spread: float


def measure_errors(f: SpectralFunction, measure: Measure) -> Errors:
    """Errors of the cheapest shipped rule of each degree.

    Raises
    ------
    NothingFound
        Fewer than two rules are shipped for the measure.

    Examples
    --------
    >>> from simplexcub.average.functions import spectral_function
    >>> from simplexcub.measures import hilbert_schmidt
    >>> found = measure_errors(spectral_function("von-neumann"), hilbert_schmidt(2))
    >>> found.exact, round(found.reference, 15), found.rules[-1].error < 2e-5
    (True, 0.333333333333333, True)
    """
    rules = _ladder(measure)
    known = _closed_form(f, measure)
    needed = _FEWEST + (known is None)
    if len(rules) < needed:
        raise NothingFound(
            f"ladder of rules for {measure}",
            f"{len(rules)} shipped, {needed} needed",
            "See 'simplexcub tables' for the measures with shipped rules.",
        )
    values = [float(rule.weights @ f(rule.nodes)) for rule in rules]
    best = rules[-1]
    second = float(best.weights @ f(best.nodes) ** 2)
    reference = values[-1] if known is None else known
    kept = len(rules) - (known is None)
    found = tuple(
        Error(rule.degree, len(rule), value, abs(value - reference))
        for rule, value in list(zip(rules, values, strict=True))[:kept]
    )
    return Errors(found, reference, known is not None, math.sqrt(max(second - values[-1] ** 2, 0.0)))


def _ladder(measure: Measure) -> Sequence[Rule]:
    """The cheapest shipped rule of each degree, as long as a higher degree does not come with fewer nodes."""
    record = measure.parameters()
    lines = [item for item in catalogue(N=measure.N, space="all") if item.measure == record]
    rules = {}
    for degree in sorted({item.degree for item in lines}):
        rule = load(measure, degree=degree)
        rules[rule.degree] = rule
    return [rules[degree] for degree in sorted(rules)]


def _closed_form(f: SpectralFunction, measure: Measure) -> float | None:
    """The exact mean where there is a formula: polynomials, entropies and power sums."""
    exact = exact_mean(f, measure)
    if exact is not None:
        return float(exact)
    try:
        if f.name == "von-neumann":
            return float(measure.entropy().value(_DIGITS))
        family, _, order = f.name.rpartition("-")
        if family == "power-sum":
            return float(measure.power_mean(order, dps=_DIGITS))
        if family == "tsallis":
            power: mpf = measure.power_mean(order, dps=_DIGITS)
            return float((1 - power) / (mpf(order) - 1))
    except InputError:  # no closed form for this measure or this order
        return None
    return None
