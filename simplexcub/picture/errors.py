"""The error of the shipped rules on a function, against its exact mean or else against a much finer rule."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from simplexcub.average.functions import SpectralFunction, exact_mean
from simplexcub.errors import NothingFound
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.search import product_rule
from simplexcub.table import catalogue, load

_DIGITS = 30
_FEWEST = 2
_FINE = {2: 255, 3: 63, 4: 31}  # degrees of product rules, by N


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
    against : str
        What the reference is: the exact mean; or the value of a product rule of higher degree; or, where there is
        neither, that of the last rule, which is then left out.
    spread : float
        Standard deviation of the function under the measure, by the last rule.
    """

    rules: tuple[Error, ...]
    reference: float
    against: str
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
    >>> found.against, round(found.reference, 15), found.rules[-1].error < 2e-5
    ('the exact mean', 0.333333333333333, True)
    """
    rules = _ladder(measure)
    known, against = _reference(f, measure)
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
    return Errors(found, reference, against, math.sqrt(max(second - values[-1] ** 2, 0.0)))


def _ladder(measure: Measure) -> Sequence[Rule]:
    """The cheapest shipped rule of each degree, as long as a higher degree does not come with fewer nodes."""
    record = measure.parameters()
    lines = [item for item in catalogue(N=measure.N, space="all") if item.measure == record and not item.kind.told]
    rules = {}
    for degree in sorted({item.degree for item in lines}):
        rule = load(measure, degree=degree)
        rules[rule.degree] = rule
    return [rules[degree] for degree in sorted(rules)]


def _reference(f: SpectralFunction, measure: Measure) -> tuple[float | None, str]:
    """A value to hold the rules against, and what it is; None where only the rules themselves are left."""
    known = exact_mean(f, measure)
    if known is not None:
        return float(known.value), "the exact mean"
    if measure.N in _FINE:
        try:
            rule = product_rule(measure, _FINE[measure.N], digits=_DIGITS)
        except NothingFound:
            return None, "the best of them"
        return float(rule.weights @ f(rule.nodes)), f"a product rule of degree {rule.degree}"
    return None, "the best of them"
