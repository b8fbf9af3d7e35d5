"""Names of the symmetric functions that a rule can average exactly besides polynomials.

``entropy`` is Σ λ_i ln λ_i (its mean is minus the mean entropy), ``entropy-K`` is Σ λ_i^K ln λ_i, ``power-Q`` is
Σ λ_i^Q with Q a decimal or a fraction, and ``user:NAME`` a function that the caller gave with its mean. Here are only
their names; what is computed for them is written twice, once for the search and once for the check.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction

from simplexcub.errors import InputError

_LONGEST = 60
_USER = re.compile(r"user:[\w .()+-]{1,40}")


@dataclass(frozen=True)
class Named:
    """A function by its name: Σ λ^power, or Σ λ^power ln λ where `logarithm`; `power` None is the user's own."""

    name: str
    power: Fraction | None
    logarithm: bool

    @property
    def formula(self) -> str:
        """The function in print."""
        if self.power is None:
            return self.name.removeprefix("user:")
        exponent = "" if self.power == 1 else f"^{self.power}" if self.power.denominator == 1 else f"^({self.power})"
        return f"Σ λ{exponent}" + (" ln λ" if self.logarithm else "")


def named(name: str) -> Named:
    """What a name stands for.

    Raises
    ------
    InputError
        A name of no such form.

    Examples
    --------
    >>> named("power-0.5")
    Named(name='power-1/2', power=Fraction(1, 2), logarithm=False)
    >>> named("entropy-2").formula
    'Σ λ^2 ln λ'
    """
    kind, _, rest = name.partition("-")
    if len(name) <= _LONGEST:
        if name == "entropy":
            return Named(name, Fraction(1), True)
        if kind == "entropy" and re.fullmatch("[0-9]{1,3}", rest) and int(rest) >= 1:
            return Named("entropy" if int(rest) == 1 else f"entropy-{int(rest)}", Fraction(int(rest)), True)
        if kind == "power" and re.fullmatch(r"-?([0-9]{1,9}(/[1-9][0-9]{0,8})?|[0-9]{0,9}\.[0-9]{1,9})", rest):
            return Named(f"power-{Fraction(rest)}", Fraction(rest), False)
        if _USER.fullmatch(name):
            return Named(name, None, False)
    raise InputError("also must name entropy, entropy-K (K = 1, 2, …) or power-Q (Q such as 1/2 or 0.3)", repr(name))


def canonical(name: str) -> str:
    """The one spelling of a name: ``power-0.5`` is ``power-1/2``."""
    return named(name).name
