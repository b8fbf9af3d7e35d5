"""One wrong digit, found by the sums: coordinates of a node sum to 1, and so do the weights.

A digit d printed in place of another shifts its sum by d'·10^(−k), |d'| ≤ 9, which tells its place; each number of the
sum is a candidate, and the moments decide between them.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from decimal import Context, Decimal
from fractions import Fraction

from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.verify.printed import MOST_PLACES, Printed, read_printed
from simplexcub.verify.residuals import check_degree

_EXACT = Context(prec=2 * MOST_PLACES)


def corrected(rule: Rule, measure: Measure, degree: int) -> Rule | None:
    """`rule` with one digit changed such that it averages `degree` exactly; None where one digit does not mend it.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> from simplexcub.rule import Provenance
    >>> nodes = (("0.2113248654", "0.7886751346"), ("0.7886731346", "0.2113248654"))
    >>> gauss = Rule(flat(2), 3, nodes, ("0.5", "0.5"), Provenance("", 0, "", ""))
    >>> corrected(gauss, flat(2), 3).node_decimals[1]
    ('0.7886751346', '0.2113248654')
    """
    for candidate in _candidates(rule, read_printed(rule)):
        if check_degree(read_printed(candidate), measure, degree, rule.space, invariant=False).ratio <= 1:
            return candidate
    return None


def _candidates(rule: Rule, printed: Printed) -> Iterator[Rule]:
    """Rules with one number changed so that all sums are 1, where just one of the sums is not."""
    rows = [*printed.nodes, printed.weights]
    units = [*printed.node_units, printed.weight_units]
    wrong = [
        (k, sum(row) - printed.one)
        for k, (row, u) in enumerate(zip(rows, units, strict=True))
        if abs(Fraction(sum(row) - printed.one, printed.one)) > printed.uncertainty(u)
    ]
    if len(wrong) != 1:
        return
    k, excess = wrong[0]
    place = len(str(abs(excess))) - 1
    shift = Decimal(f"{round(Fraction(excess, 10**place))}e{place - printed.places}")
    texts = (*rule.node_decimals, rule.weight_decimals)[k]
    for i, text in enumerate(texts):
        number = _EXACT.subtract(Decimal(text), shift)
        if number < 0:
            continue
        row = (*texts[:i], format(number, "f"), *texts[i + 1 :])
        if k == len(printed.nodes):
            yield replace(rule, weight_decimals=row)
        else:
            yield replace(rule, node_decimals=(*rule.node_decimals[:k], row, *rule.node_decimals[k + 1 :]))
