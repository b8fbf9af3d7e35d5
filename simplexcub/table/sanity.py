"""Whether numbers from a file can be a rule at all: plain decimals, nodes on the simplex, weights that sum to 1.

Whether the rule is exact is not asked here; that is the business of `simplexcub.verify`.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from decimal import Context, Decimal

from simplexcub.errors import TableError

# Python converts at most 4300 digits of text to an integer, so longer decimals could be read but never used.
LONGEST_NUMBER = 4000
LARGEST_EXPONENT = 4000
_EXACT_PLACES = 3
_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE]([+-]?[0-9]+))?")


def check_number(text: str, where: str) -> None:
    """Refuse anything but a finite decimal of sane length.

    Raises
    ------
    TableError
        Not a decimal, longer than 4000 characters, or with an exponent beyond ±4000.
    """
    if len(text) > LONGEST_NUMBER:
        raise TableError(f"{where}: a number must have at most {LONGEST_NUMBER} characters", f"{len(text)}")
    match = _NUMBER.fullmatch(text)
    if match is None:
        raise TableError(f"{where} must be a decimal number such as 0.25", repr(text))
    if match[1] is not None and (len(match[1]) > 6 or abs(int(match[1])) > LARGEST_EXPONENT):
        raise TableError(f"{where}: an exponent must lie within ±{LARGEST_EXPONENT}", repr(text[-24:]))


def check_simplex(nodes: Sequence[Sequence[str]], weights: Sequence[str], digits: int, where: str) -> None:
    """Check, to the printed digits, that weights sum to 1 and every node lies on the simplex.

    Raises
    ------
    TableError
        Naming the sum or the coordinate that is wrong.
    """
    total, slack = _sum(weights, _places(weights), digits)
    if abs(total - 1) > slack:
        remedy = "Divide the weights by their sum." if total > 0 else ""
        raise TableError(f"{where}: weights must sum to 1", _short(total), remedy)
    places = _places(x for node in nodes for x in node)
    for k, node in enumerate(nodes):
        total, slack = _sum(node, places, digits)
        if abs(total - 1) > slack:
            remedy = "Give barycentric coordinates, N per node."
            raise TableError(f"{where}: the coordinates of node {k + 1} must sum to 1", _short(total), remedy)
        lowest = min(node, key=Decimal)
        if Decimal(lowest) < -slack:
            remedy = "Nodes must lie on the simplex."
            raise TableError(f"{where}: the coordinates of node {k + 1} must be at least 0", lowest[:24], remedy)


def _sum(texts: Sequence[str], places: int, digits: int) -> tuple[Decimal, Decimal]:
    """The sum of decimals and how far rounding of the printed digits can have moved it.

    A table printed to fixed places is off by half a unit of the last place, one printed to significant digits by its
    share of the number itself; two digits are left for sums that were normalised in the same precision. Up to three
    places are taken to be exact, such as 0.5.
    """
    context = Context(prec=digits + 30, Emin=-99_999, Emax=99_999)
    total, size = Decimal(0), Decimal(0)
    for text in texts:
        value = Decimal(text)
        total = context.add(total, value)
        size = context.add(size, abs(value))
    relative = context.multiply(size, Decimal(1).scaleb(2 - max(digits, 6), context))
    if places <= _EXACT_PLACES:
        return total, relative
    return total, max(relative, context.multiply(Decimal(len(texts)) / 2, Decimal(1).scaleb(-places, context)))


def _places(texts: Iterable[str]) -> int:
    """The largest number of decimal places among `texts`."""
    exponents = (Decimal(text).as_tuple().exponent for text in texts)
    return max((-e for e in exponents if isinstance(e, int) and e < 0), default=0)


def _short(value: Decimal) -> str:
    return format(value, ".12g")
