"""A rule with fewer digits, which says so and is checked anew.

Each decimal is rounded on its own, half to even. What the rounded numbers average is compared with the exact means
again. A proof that an exact rule lies within r of the given numbers holds within r + δ of the rounded ones, where δ is
the largest change; degrees at which the given numbers fail are not tried again, since short decimals cannot tell.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from decimal import ROUND_CEILING, ROUND_HALF_EVEN, Context, Decimal

from simplexcub.decimals import significant_digits
from simplexcub.embedded import Embedded
from simplexcub.errors import InputError
from simplexcub.rule import Orbit, Rule, Verification
from simplexcub.verify import verify
from simplexcub.verify.embedded import embedded_faults
from simplexcub.verify.printed import read_printed
from simplexcub.verify.structure import is_invariant


def rounded(rule: Rule, digits: int) -> Rule:
    """The rule with every decimal rounded to `digits` significant digits; the rule itself where it has no more.

    Raises
    ------
    InputError
        Fewer than 1 digit, or more than the rule has; embedded weights that do not hold at their degree when rounded.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> from simplexcub.table.shipped import load
    >>> rounded(load(flat(2), degree=3), 8).node_decimals[0]
    ('0.78867513', '0.21132487')
    """
    if not 1 <= digits <= rule.digits:
        remedy = "Solve with more --digits for longer numbers."
        raise InputError(f"digits must lie between 1 and those of the table, {rule.digits}", digits, remedy)
    if digits == rule.digits:
        return rule
    before = verify(rule).verification if rule.verification is None else rule.verification
    method = f"{rule.provenance.method}, rounded from {rule.digits} digits"
    short = replace(
        rule,
        node_decimals=tuple(tuple(rounded_text(x, digits) for x in node) for node in rule.node_decimals),
        weight_decimals=tuple(rounded_text(w, digits) for w in rule.weight_decimals),
        orbits=tuple(_round_orbit(orbit, digits) for orbit in rule.orbits),
        embedded=rule.embedded and _round_embedded(rule.embedded, digits),
        digits=digits,
        provenance=replace(rule.provenance, method=method),
        verification=None,
    )
    _require_embedded(short)
    after = verify(short, max_degree=rule.degree).verification
    if after.fails_at_degree > rule.degree:
        after = replace(after, fails_at_degree=before.fails_at_degree)
    return short.verified(replace(after, proof=_widened(before, rule, short)))


def rounded_text(text: str, digits: int) -> str:
    """A decimal rounded to `digits` significant digits, half to even; as it is where it has no more.

    Examples
    --------
    >>> rounded_text("0.0166667", 3), rounded_text("-0.5", 3)
    ('0.0167', '-0.5')
    """
    if significant_digits(text) <= digits:
        return text
    return format(Context(prec=digits, rounding=ROUND_HALF_EVEN).create_decimal(text), "f")


def _round_orbit(orbit: Orbit, digits: int) -> Orbit:
    return replace(
        orbit, values=tuple(rounded_text(v, digits) for v in orbit.values), weight=rounded_text(orbit.weight, digits)
    )


def _round_embedded(second: Embedded, digits: int) -> Embedded:
    return replace(second, weight_decimals=tuple(rounded_text(w, digits) for w in second.weight_decimals))


def _require_embedded(short: Rule) -> None:
    printed = read_printed(short)
    invariant = short.measure.is_symmetric and is_invariant(printed)
    for fault in embedded_faults(short, short.measure, printed, invariant=invariant):
        rule = f"embedded weights must hold when rounded to {short.digits} digits"
        raise InputError(rule, fault, "Take more digits, or verify the table.")


def _widened(found: Verification, rule: Rule, short: Rule) -> dict[str, object] | None:
    if found.proof is None or found.proof.get("holds") is not True:
        return found.proof
    wide = Context(prec=rule.digits + 20)
    change = max(abs(wide.subtract(Decimal(a), Decimal(b))) for a, b in zip(_all(rule), _all(short), strict=True))
    radius = Context(prec=2, rounding=ROUND_CEILING).add(change, Decimal(str(found.proof["radius"])))
    return {**found.proof, "radius": f"{radius:.1e}"}


def _all(rule: Rule) -> Iterator[str]:
    for node in rule.node_decimals:
        yield from node
    yield from rule.weight_decimals
