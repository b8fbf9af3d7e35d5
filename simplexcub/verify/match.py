"""Which measure a bare set of nodes and weights is for: every measure of one size in turn."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from simplexcub.errors import InputError
from simplexcub.measures import Measure, bures, dirichlet, flat, hilbert_schmidt, induced, ordered
from simplexcub.rule import Rule
from simplexcub.verify.check import Report, verify

LARGEST_BURES = 6  # its means cost more than the others'


def candidates(n: int) -> Iterator[Measure]:
    """The flat measure, Hilbert–Schmidt, induced with N < K ≤ 2N, Bures, and Dirichlet with all parameters 1/2."""
    yield flat(n)
    yield hilbert_schmidt(n)
    yield from (induced(n, k) for k in range(n + 1, 2 * n + 1))
    if n <= LARGEST_BURES:
        yield bures(n)
    yield dirichlet(["1/2"] * n)


def match(rule: Rule) -> list[Report]:
    """Reports of `rule`, its claims put aside, against every candidate; the highest degree first.

    Parameters
    ----------
    rule : Rule
        In space ``ordered`` measures without exact moments of the ordered spectrum are left out.
    """
    bare = replace(rule, degree=0, orbits=(), equal_weights=False, also=(), integer_weights=(), embedded=None)
    found = [verify(replace(bare, measure=measure)) for measure in candidates(rule.measure.N) if _fits(measure, rule)]
    return sorted(found, key=lambda report: -report.exact_degree)


def _fits(measure: Measure, rule: Rule) -> bool:
    if rule.space != "ordered":
        return True
    try:
        ordered(measure)
    except InputError:
        return False
    return True
