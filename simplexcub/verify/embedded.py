"""Embedded weights against their own claim: other weights on the printed nodes, exact to a lower degree."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.verify.printed import Printed, read_printed
from simplexcub.verify.residuals import DegreeCheck, check_degree
from simplexcub.verify.structure import is_invariant, weight_faults


def embedded_faults(rule: Rule, measure: Measure, printed: Printed, *, invariant: bool) -> Iterator[str]:
    """One sentence for each thing that is wrong with the embedded weights; none where there are none."""
    if rule.embedded is None:
        return
    second = read_embedded(rule)
    yield from (f"embedded: {fault}" for fault in weight_faults(second, equal=False))
    if second.weights == printed.weights:
        yield "the embedded weights are the weights themselves"
    check = check_embedded(rule, measure, invariant=invariant and is_invariant(second))
    if check.ratio > 1:
        offender = ",".join(map(str, check.offender))
        yield f"the embedded weights claim degree {check.degree}, but their mean at exponents {offender} " + (
            f"is off by {check.offence}"
        )


def check_embedded(rule: Rule, measure: Measure, *, invariant: bool = False) -> DegreeCheck:
    """The comparison of all means of the embedded degree, as for the rule itself; the rule must have such weights."""
    degree = rule.embedded.degree if rule.embedded else 0
    return check_degree(read_embedded(rule), measure, degree, rule.space, invariant=invariant)


def read_embedded(rule: Rule) -> Printed:
    """The nodes with the embedded weights as exact integers; the weights themselves where there are none."""
    second = rule.embedded.weight_decimals if rule.embedded else rule.weight_decimals
    return read_printed(replace(rule, weight_decimals=second, embedded=None, verification=None))
