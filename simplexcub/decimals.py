"""Decimal text of numbers: the one place where digits are printed and counted."""

from __future__ import annotations

from collections.abc import Iterable
from fractions import Fraction

from mpmath import mp, mpf


def to_decimal(x: Fraction | mpf, digits: int) -> str:
    """`x` rounded to `digits` significant digits, in plain positional notation.

    Examples
    --------
    >>> to_decimal(Fraction(1, 30000), 5)
    '0.000033333'
    """
    with mp.workdps(digits + 10):
        value = mpf(x.numerator) / x.denominator if isinstance(x, Fraction) else +x
        text: str = mp.nstr(value, digits, strip_zeros=False, min_fixed=-mp.inf, max_fixed=mp.inf)
    return text


def significant_digits(text: str) -> int:
    """How many significant digits a decimal string carries; zeros in front do not count.

    Examples
    --------
    >>> significant_digits("0.0250")
    3
    """
    mantissa = text.strip().lower().split("e")[0]
    return len(mantissa.lstrip("+-").replace(".", "").lstrip("0"))


def most_digits(texts: Iterable[str]) -> int:
    """The largest number of significant digits among `texts`, at least 1."""
    return max((significant_digits(text) for text in texts), default=1) or 1
