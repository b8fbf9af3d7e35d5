"""Real zeros of an integer polynomial, counted and separated exactly by Sturm's sequence.

A polynomial is the list of its integer coefficients, the constant first. Remainders are scaled by positive factors
only, so signs are those of the classical sequence.

Reference: C. Sturm, Mém. Savants Étrangers 6 (1835) 273; D. E. Knuth, *The Art of Computer Programming* 2, 4.6.2.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction
from itertools import pairwise

Polynomial = list[int]
Interval = tuple[Fraction, Fraction]


def sturm_sequence(p: Sequence[int]) -> list[Polynomial]:
    """p, p′, and the negated remainders, down to the greatest common divisor of p and p′.

    Examples
    --------
    >>> sturm_sequence([-1, 0, 1])
    [[-1, 0, 1], [0, 1], [1]]
    """
    sequence = [_primitive(list(p)), _primitive(derivative(p))]
    while len(sequence[-1]) > 1:
        rest = _negated_remainder(sequence[-2], sequence[-1])
        if not rest:
            break
        sequence.append(_primitive(rest))
    return sequence


def derivative(p: Sequence[int]) -> Polynomial:
    """Coefficients of p′."""
    return [k * c for k, c in enumerate(p)][1:]


def sign_at(p: Sequence[int], x: Fraction) -> int:
    """Sign of p(x)."""
    value, power = 0, 1
    for c in reversed(p):
        value = value * x.numerator + c * power
        power *= x.denominator
    return (value > 0) - (value < 0)


def count_zeros(sequence: Sequence[Polynomial], low: Fraction, high: Fraction) -> int:
    """Different zeros in low < x ≤ high; neither end may be a multiple zero.

    Examples
    --------
    >>> count_zeros(sturm_sequence([0, -1, 0, 1]), Fraction(-1), Fraction(1))  # x³ − x
    2
    """
    return _variations(sequence, low) - _variations(sequence, high)


def isolate(sequence: Sequence[Polynomial], low: Fraction, high: Fraction) -> list[Interval]:
    """Intervals low < x ≤ high that hold one zero each, rising."""
    inside = count_zeros(sequence, low, high)
    if inside == 0:
        return []
    if inside == 1:
        return [(low, high)]
    middle = (low + high) / 2
    return isolate(sequence, low, middle) + isolate(sequence, middle, high)


def narrow(p: Sequence[int], interval: Interval, bits: int) -> Interval:
    """The interval of a simple zero halved until it is 2^(−bits) wide, or met exactly (both ends the zero)."""
    low, high = interval
    if sign_at(p, high) == 0:
        return high, high
    above = sign_at(p, high)
    while high - low > Fraction(1, 1 << bits):
        middle = (low + high) / 2
        sign = sign_at(p, middle)
        if sign == 0:
            return middle, middle
        low, high = (low, middle) if sign == above else (middle, high)
    return low, high


def _variations(sequence: Sequence[Polynomial], x: Fraction) -> int:
    signs = [s for s in (sign_at(p, x) for p in sequence) if s]
    return sum(a != b for a, b in pairwise(signs))


def _negated_remainder(a: Polynomial, b: Polynomial) -> Polynomial:
    """−(a mod b) times a positive integer."""
    rest, lead, sign = list(a), abs(b[-1]), 1 if b[-1] > 0 else -1
    while len(rest) >= len(b):
        top, shift = rest[-1] * sign, len(rest) - len(b)
        rest = [lead * c for c in rest]
        for i, c in enumerate(b):
            rest[shift + i] -= top * c
        while rest and rest[-1] == 0:
            rest.pop()
    return [-c for c in rest]


def _primitive(p: Polynomial) -> Polynomial:
    content = math.gcd(*p)
    return [c // content for c in p]
