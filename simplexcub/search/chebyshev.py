"""Equal weights in one variable: whether n nodes of degree n exist, decided exactly, and the nodes where they do.

If E[x^k] = (1/n) Σ x_i^k for k = 1 … n, the power sums of the nodes are known, and Newton's identities give the one
polynomial that has the nodes as its zeros, with rational coefficients. The rule exists if all n zeros are real,
different and on [0, 1], which Sturm's sequence counts without rounding. Power sums beyond n then follow from the
coefficients and show the degree that the rule has.

References: P. L. Chebyshev, J. Math. Pures Appl. 19 (1874) 19; S. N. Bernstein, C. R. Acad. Sci. Paris 204 (1937)
1294: for the flat measure n = 1 … 7 and 9 only; M. Abramowitz, I. A. Stegun, *Handbook*, 25.4.28.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import reduce

from mpmath import mp, mpf

from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure
from simplexcub.rounded import rule_from_nodes, rule_from_orbits
from simplexcub.rule import Provenance, Rule
from simplexcub.search.sturm import count_zeros, derivative, isolate, narrow, sign_at, sturm_sequence

MOST_NODES = 100  # the exact decision takes seconds there
_START_BITS = 50
_ZERO, _ONE = Fraction(0), Fraction(1)


@dataclass(frozen=True)
class Chebyshev:
    """The decision for one measure and number of nodes.

    Attributes
    ----------
    nodes : int
        n.
    inside : int
        How many different zeros of the polynomial of the nodes are real and on [0, 1]; the rule exists if all n are.
    degree : int
        Degree of the rule, n or more; 0 where there is none.
    coefficients : tuple of int
        Of the polynomial in λ1 whose zeros the nodes are, the constant first.
    """

    nodes: int
    inside: int
    degree: int
    coefficients: tuple[int, ...]

    @property
    def exists(self) -> bool:
        """Whether n nodes of equal weight and degree n exist."""
        return self.inside == self.nodes

    def __str__(self) -> str:
        n = self.nodes
        if self.exists:
            return f"{n} nodes of equal weight: degree {self.degree}"
        return f"{n} nodes of equal weight and degree {n} do not exist: {self.inside} of {n} zeros real and on [0, 1]"


def chebyshev(measure: Measure, nodes: int) -> Chebyshev:
    """Decide exactly whether `nodes` nodes of equal weight and as high a degree exist for a measure with N = 2.

    Parameters
    ----------
    measure : Measure
        Of N = 2 components.
    nodes : int
        1 to 100.

    Raises
    ------
    InputError
        Another N, or a number of nodes out of range.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> print(chebyshev(flat(2), 8))
    8 nodes of equal weight and degree 8 do not exist: 2 of 8 zeros real and on [0, 1]
    >>> print(chebyshev(flat(2), 9))
    9 nodes of equal weight: degree 9
    """
    if measure.N != 2:
        raise InputError("N must be 2 for the zeros to be counted", measure.N)
    if isinstance(nodes, bool) or not isinstance(nodes, int) or not 1 <= nodes <= MOST_NODES:
        raise InputError(f"nodes must be an integer between 1 and {MOST_NODES}", nodes)
    n = nodes
    sums = [Fraction(n)] + [n * measure.moment((k, 0)) for k in range(1, n + 1)]
    elementary = [_ONE]
    for k in range(1, n + 1):
        elementary.append(sum((-1) ** (i - 1) * elementary[k - i] * sums[i] for i in range(1, k + 1)) / Fraction(k))
    monic = [(-1) ** (n - k) * elementary[n - k] for k in range(n + 1)]
    scale = math.lcm(*(c.denominator for c in monic))
    polynomial = [int(c * scale) for c in monic]
    sequence = sturm_sequence(polynomial)
    if len(sequence[-1]) > 1:  # a common factor of p and p′: zeros that coincide are left out
        sequence = sturm_sequence(_quotient(sequence[0], sequence[-1]))
    inside = count_zeros(sequence, _ZERO, _ONE) + (sign_at(polynomial, _ZERO) == 0)
    degree = _degree(measure, sums, elementary) if inside == n else 0
    return Chebyshev(n, inside, degree, tuple(polynomial))


def _degree(measure: Measure, sums: list[Fraction], elementary: list[Fraction]) -> int:
    """First k whose power sum is not n E[x^k], less one; no n nodes have degree 2n."""
    n = len(elementary) - 1
    for k in range(n + 1, 2 * n):
        sums = [*sums, sum(((-1) ** (i - 1) * elementary[i] * sums[k - i] for i in range(1, n + 1)), _ZERO)]
        if sums[k] != n * measure.moment((k, 0)):
            return k - 1
    return 2 * n - 1


def _quotient(p: Sequence[int], divisor: Sequence[int]) -> list[int]:
    rest, result = [Fraction(c) for c in p], []
    for shift in range(len(p) - len(divisor), -1, -1):
        factor = rest[shift + len(divisor) - 1] / divisor[-1]
        result.append(factor)
        for i, c in enumerate(divisor):
            rest[shift + i] -= factor * c
    scale = math.lcm(*(c.denominator for c in result))
    return [int(c * scale) for c in reversed(result)]


def chebyshev_nodes(found: Chebyshev, digits: int) -> list[mpf]:
    """The zeros of an existing rule, rising: separated by Sturm's sequence, then polished by Newton's method."""
    p = list(found.coefficients)
    intervals = isolate(sturm_sequence(p), _ZERO, _ONE)
    nodes = [mpf(0)] if sign_at(p, _ZERO) == 0 else []
    # Coefficients of both signs cancel by about as many digits as they have.
    lost = max(abs(c) for c in p).bit_length() * 0.302 - abs(p[-1]).bit_length() * 0.302
    with mp.workdps(math.ceil(digits + 20 + lost)):
        slope = derivative(p)
        for interval in intervals:
            low, high = narrow(p, interval, _START_BITS + p[-1].bit_length())
            x = (mpf(low.numerator) / low.denominator + mpf(high.numerator) / high.denominator) / 2
            while low != high:
                change = _value(p, x) / _value(slope, x)
                x -= change
                if abs(change) < mpf(10) ** (-(digits + 10)):
                    break
            nodes.append(x)
    return nodes


def _value(rising: Sequence[int], x: mpf) -> mpf:
    """A polynomial with coefficients in rising order, by Horner's rule."""
    return reduce(lambda value, c: value * x + c, reversed(rising), mpf(0))


def chebyshev_rule(measure: Measure, degree: int, *, digits: int, provenance: Provenance) -> Rule:
    """The rule of equal weights with the fewest nodes n, n ≤ degree + 1, that has the degree.

    With n ≤ degree there is only one candidate for each n, so no other rule has as few nodes.

    Raises
    ------
    NothingFound
        None of these n serves; the message says what each lacks.
    """
    missing: list[str] = []
    for n in range(degree // 2 + 1, degree + 2):
        found = chebyshev(measure, min(n, MOST_NODES))
        if found.degree >= degree:
            told = "".join(f"; {reason}" for reason in missing)
            method = replace(provenance, method=f"Newton's identities and Sturm's sequence{told}")
            return _rule(measure, found, digits, method)
        if n >= degree:
            missing.append(str(found))
    raise NothingFound(
        f"equal weights for {measure}, degree {degree}",
        "; ".join(missing),
        "Allow more nodes than the degree, integer weights, or any weights.",
    )


def _rule(measure: Measure, found: Chebyshev, digits: int, provenance: Provenance) -> Rule:
    n, nodes = found.nodes, chebyshev_nodes(found, digits)
    with mp.workdps(digits + 15):
        share = mpf(1) / n
        if not measure.is_symmetric:
            pairs = [[x, 1 - x] for x in nodes]
            rule = rule_from_nodes(measure, found.degree, pairs, [share] * n, digits=digits, provenance=provenance)
            return replace(rule, equal_weights=True)
        orbits: list[tuple[tuple[int, ...], list[mpf], mpf]] = [((2,), [mpf(1) / 2], share)] if n % 2 else []
        orbits += [((1, 1), [x, 1 - x], 2 * share) for x in nodes[(n + 1) // 2 :]]
    rule = rule_from_orbits(measure, found.degree, orbits, digits=digits, provenance=provenance)
    return replace(rule, equal_weights=True)
