"""The certificate: an exact rule exists within a stated distance of the printed decimals.

Two arguments are tried. If every printed number is the rounding of a small fraction and the rule of these fractions
averages all polynomials exactly, that is the proof. Otherwise Newton–Kantorovich on the equations of the rule's own
structure, with the last of the measure's routes for the exact means; nothing but the decimals is used.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from fractions import Fraction

from simplexcub.entropic import named
from simplexcub.errors import InputError
from simplexcub.measures import Measure, ordered
from simplexcub.rule import Rule, Space
from simplexcub.verify.printed import Printed, read_printed
from simplexcub.verify.proof_entropic import ExtendedSystem
from simplexcub.verify.proof_newton import NotProven, find_zero
from simplexcub.verify.proof_orbits import Structure, find_structure
from simplexcub.verify.proof_result import Proof, conclude
from simplexcub.verify.proof_snap import symmetrised
from simplexcub.verify.proof_system import MonomialSystem, PowerSumSystem, Shares, System
from simplexcub.verify.structure import fixed_shares

NEWTON = "Newton-Kantorovich in integers"
RATIONAL = "rational arithmetic"
MOST_EQUATIONS = 500
MOST_TERMS = 4_000_000  # equations × nodes × components
MOST_WORK = 100_000_000  # equations² × unknowns, steps of the elimination in long integers: about a minute
LONGEST_DENOMINATOR = 2000  # bits
SPARE_DIGITS = 20


def prove(
    rule: Rule,
    *,
    measure: Measure | None = None,
    degree: int | None = None,
    digits: int = 0,
    snap: float | None = None,
) -> Proof:
    """Prove that an exact rule lies near the printed decimals of `rule`.

    Parameters
    ----------
    rule : Rule
    measure : Measure, optional
        What the exact rule averages over; the rule's own measure by default.
    degree : int, optional
        Degree of the exact rule; by default the one that `rule` claims.
    digits : int, optional
        Decimal places wanted in the exact rule's numbers, where these are more than the printed ones.
    snap : float, optional
        How far the printed set may be off full symmetry to be taken for fully symmetric; by default 100 units in the
        last place. The distance counts in the radius.

    Returns
    -------
    Proof

    Raises
    ------
    InputError
        A measure with another N, or without exact moments of its ordered spectrum where the rule is for that, or an
        entry that is not a decimal number.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> from simplexcub.rule import Provenance
    >>> nodes = (("1", "0"), ("0.5", "0.5"), ("0", "1"))
    >>> simpson = Rule(flat(2), 3, nodes, ("0.16666667", "0.66666667", "0.16666667"), Provenance("", 0, "", ""))
    >>> proof = prove(simpson)
    >>> proof.holds, proof.radius, proof.method
    (True, '3.4e-9', 'rational arithmetic')
    """
    against = rule.measure if measure is None else measure
    if against.N != rule.measure.N:
        raise InputError(f"measure must have the rule's N = {rule.measure.N} components", against)
    if rule.space == "ordered":
        against = ordered(against)
    wanted = rule.degree if degree is None else degree
    printed = read_printed(rule)
    snapped = printed
    if rule.space == "all" and against.is_symmetric:
        snapped = symmetrised(printed, 100 / 10**printed.digits if snap is None else snap)
    structure = find_structure(snapped, against, rule.space)
    shares = fixed_shares(rule, printed, [orbit.first for orbit in structure.orbits])
    method = NEWTON
    also = [named(name) for name in rule.also]
    try:
        if any(label.power is None for label in also):
            raise NotProven("of a function of the user's only the name is known")
        system = _system(structure, against, wanted, rule.space, shares, len(rule))
        if also:
            system = ExtendedSystem(system, also, against)
        exact = _rational(system, snapped)
        if exact is not None:
            method = RATIONAL
            return conclude(system, printed, snapped, wanted, method, exact)
        start = list(_printed_unknowns(system, snapped))
        places = max(printed.places, printed.digits, digits) + SPARE_DIGITS
        zero = find_zero(system, start, math.ceil(places * math.log2(10)) + 64)
        one = system.factor << zero.bits
        point = system.point([v * system.factor for v in zero.x], one)
        weights = [Fraction(w, one) for w, _ in point]
        values = [[Fraction(v, one) for v in blocks] for _, blocks in point]
        return conclude(system, printed, snapped, wanted, method, (weights, values), zero)
    except NotProven as failure:
        return Proof(False, method, wanted, structure.group, failure.reason)


def _system(structure: Structure, measure: Measure, degree: int, space: Space, shares: Shares, nodes: int) -> System:
    n = measure.N
    if structure.full:
        size = _partitions_up_to(degree, n)
        terms = size * len(structure.orbits) * n
    else:
        size = -(-math.comb(degree + n - 1, n - 1) // len(structure.permutations))
        terms = size * nodes * n
    if size > nodes * n:
        raise NotProven(f"there are more equations ({size}) than unknowns")
    if size > MOST_EQUATIONS or terms > MOST_TERMS or size * terms > MOST_WORK:
        raise NotProven(f"its {size} equations with {nodes} nodes are too many to be proven here")
    kind = PowerSumSystem if structure.full else MonomialSystem
    return kind(structure, measure, degree, space, shares)


def _partitions_up_to(degree: int, n: int) -> int:
    counts = [1] + [0] * degree
    for part in range(2, n + 1):
        for total in range(part, degree + 1):
            counts[total] += counts[total - part]
    return sum(counts)


def _printed_unknowns(system: System, printed: Printed) -> Iterator[Fraction]:
    for o, b in system.unknowns:
        orbit = system.structure.orbits[o]
        yield Fraction(orbit.weight if b < 0 else orbit.values[b], printed.one)


def _rational(system: System, printed: Printed) -> tuple[list[Fraction], list[list[Fraction]]] | None:
    """Weights and block values of the orbits as small fractions, if these make an exact rule."""
    weights: list[Fraction] = []
    values: list[list[Fraction]] = []
    denominator = system.factor
    for o, orbit in enumerate(system.structure.orbits):
        share = system.shares[o] if system.shares else _small(orbit.weight, printed)
        blocks = [_small(v, printed) for v in orbit.values]
        if sum(m * v for m, v in zip(orbit.multiplicities, blocks, strict=True)) != 1:
            return None
        weights.append(share)
        values.append(blocks)
        denominator = math.lcm(denominator, share.denominator, *(v.denominator for v in blocks))
        if denominator.bit_length() > LONGEST_DENOMINATOR:
            return None
    x = [int((weights[o] if b < 0 else values[o][b]) * denominator) for o, b in system.unknowns]
    return None if any(system.residuals(x, denominator)) else (weights, values)


def _small(value: int, printed: Printed) -> Fraction:
    """The simplest fraction that the printed digits single out; the decimal itself where it is short or none is."""
    exact = Fraction(value, printed.one)
    near = exact.limit_denominator(max(10 ** (printed.digits // 2 - 1), 1))
    return near if near and abs(near - exact) * 10**printed.digits <= abs(exact) * 10 else exact
