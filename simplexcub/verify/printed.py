"""A rule's decimals as exact integers, with the uncertainty that their last digit leaves.

Every decimal x becomes the integer x·10^P, P the largest number of decimal places in the table, so nothing is
rounded on the way in. What a table does not say about a number is at most one unit in its last place,

    u(x) = max(10^(⌊log10 |x|⌋ − D + 1), 10^(−P))

with D the most significant digits that any of the decimals carries. The first term serves tables printed to a number of
significant digits, the second those printed to a number of places. One unit, not half, covers tables that were cut off
rather than rounded.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from simplexcub.decimals import most_digits
from simplexcub.errors import InputError
from simplexcub.rule import Rule

FloatArray = NDArray[np.float64]

MOST_PLACES = 4000  # Python refuses to read longer integers from text, and no table needs them
LARGEST_EXPONENT = 30

_DECIMAL = re.compile(r"([+-]?)([0-9]*)(?:\.([0-9]*))?(?:[eE]([+-]?[0-9]{1,6}))?", re.ASCII)


@dataclass(frozen=True)
class Printed:
    """Nodes and weights as integers in units of 10^(−places).

    Attributes
    ----------
    nodes : tuple of tuple of int, shape (M, N)
    weights : tuple of int, shape (M,)
    places : int
        P: decimals are integers times 10^(−P).
    digits : int
        D: most significant digits of any decimal.
    node_units, weight_units : ndarray, shapes (M, N) and (M,)
        10^D·u(x): the uncertainty of each number in units of 10^(−D); zeros where the decimals are read as exact.
    """

    nodes: tuple[tuple[int, ...], ...]
    weights: tuple[int, ...]
    places: int
    digits: int
    node_units: FloatArray
    weight_units: FloatArray

    @property
    def one(self) -> int:
        """The integer that stands for 1."""
        return int(10**self.places)

    def uncertainty(self, units: FloatArray) -> Fraction:
        """Σ u(x) over some of the numbers, given their ``node_units`` or ``weight_units``."""
        return Fraction(float(units.sum())) / int(10**self.digits)

    def read_as_exact(self) -> Printed:
        """The same numbers with no uncertainty."""
        return Printed(
            self.nodes,
            self.weights,
            self.places,
            self.digits,
            np.zeros_like(self.node_units),
            np.zeros_like(self.weight_units),
        )


def parse_decimal(text: str, name: str) -> tuple[int, int]:
    """(m, p) with the decimal `text` equal to m·10^(−p), p ≥ 0.

    Raises
    ------
    InputError
        Not a plain decimal number, or one too long or too large to be a coordinate or a weight.

    Examples
    --------
    >>> parse_decimal("-1.25e-3", "weight 1")
    (-125, 5)
    """
    match = _DECIMAL.fullmatch(text.strip()) if len(text) <= MOST_PLACES else None
    if match is None or not (match[2] or match[3]):
        raise InputError(f"{name} must be a decimal number of at most {MOST_PLACES} characters", repr(text))
    sign, whole, part, exponent = match[1], match[2], match[3] or "", int(match[4] or 0)
    mantissa = int(whole + part)
    places = len(part) - exponent
    if mantissa and len(str(mantissa)) - places > LARGEST_EXPONENT:
        raise InputError(f"{name} must be below 10^{LARGEST_EXPONENT}", text)
    if places > MOST_PLACES:
        raise InputError(f"{name} must have at most {MOST_PLACES} decimal places", text)
    if places < 0:
        mantissa, places = (mantissa * 10**-places, 0) if mantissa else (0, 0)
    return (-mantissa if sign == "-" else mantissa), places


def read_printed(rule: Rule) -> Printed:
    """The decimals of `rule`, and nothing else of it, as exact integers.

    Raises
    ------
    InputError
        An entry that is not a decimal number.
    """
    nodes = [
        [parse_decimal(text, f"λ{i} of node {k}") for i, text in enumerate(node, 1)]
        for k, node in enumerate(rule.node_decimals, 1)
    ]
    weights = [parse_decimal(text, f"weight {k}") for k, text in enumerate(rule.weight_decimals, 1)]
    places = max(p for row in [*nodes, weights] for _, p in row)
    digits = most_digits(text for row in [*rule.node_decimals, rule.weight_decimals] for text in row)
    node_integers = tuple(_to_places(row, places) for row in nodes)
    weight_integers = _to_places(weights, places)
    return Printed(
        node_integers,
        weight_integers,
        places,
        digits,
        np.array([_units(row, places, digits) for row in node_integers]),
        np.array(_units(weight_integers, places, digits)),
    )


def _to_places(row: Sequence[tuple[int, int]], places: int) -> tuple[int, ...]:
    return tuple(m * 10 ** (places - p) for m, p in row)


def _units(values: Sequence[int], places: int, digits: int) -> list[float]:
    # In units of 10^(−D): u(x)·10^D = 10^max(⌊log10 |x|⌋ + 1, D − P).
    least = digits - places
    return [10.0 ** max(len(str(abs(v))) - places if v else least, least) for v in values]
