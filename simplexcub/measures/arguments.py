"""Reading parameters: exact numbers, whole numbers and real powers, each refused with the rule that it breaks."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
from mpmath import mp, mpf

from simplexcub.errors import InputError


def is_integer(value: object) -> bool:
    return isinstance(value, int | np.integer) and not isinstance(value, bool)


def real_power(q: object) -> Fraction | mpf:
    """q as an exact fraction where it is one, else as the mpmath number it is."""
    try:
        if isinstance(q, mpf):
            if mp.isfinite(q):
                return Fraction(int(q)) if mp.isint(q) else q
        elif isinstance(q, int | float | str | Fraction | np.integer | np.floating) and not isinstance(q, bool):
            return Fraction(q if isinstance(q, str | Fraction) else q.item() if isinstance(q, np.generic) else q)
    except (ValueError, ZeroDivisionError, OverflowError):
        pass
    raise InputError("q must be a finite real number such as 2.5 or 1/3", repr(q))


def exact_number(name: str, value: object) -> Fraction:
    """A parameter as an exact number; floats are refused, since moments are exact.

    Raises
    ------
    InputError
        A float, or text that is no number.
    """
    if isinstance(value, bool) or not isinstance(value, int | np.integer | str | Fraction):
        raise InputError(f"{name} must hold exact numbers", repr(value), 'Write it as a string such as "1/2" or "0.5".')
    try:
        return Fraction(value) if isinstance(value, str | Fraction) else Fraction(int(value))
    except (ValueError, ZeroDivisionError):
        raise InputError(f"{name} must hold numbers such as 2, 1/2 or 0.5", repr(value)) from None


def whole_number(name: str, value: object, least: int, remedy: str = "") -> int:
    """A parameter as an integer of at least `least`.

    Raises
    ------
    InputError
        Anything else.
    """
    if isinstance(value, bool) or not isinstance(value, int | np.integer) or value < least:
        raise InputError(f"{name} must be an integer of at least {least}", value, remedy)
    return int(value)
