"""The exact rule that a table with too few or wrong digits stands for, printed in full."""

from __future__ import annotations

import datetime
import re
from collections import Counter
from collections.abc import Sequence
from fractions import Fraction

from simplexcub.decimals import to_decimal
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure
from simplexcub.rule import Orbit, Provenance, Rule
from simplexcub.symmetry import distinct_permutations, orbit_size
from simplexcub.verify.check import verify
from simplexcub.verify.misprint import corrected
from simplexcub.verify.printed import read_printed
from simplexcub.verify.proof import prove
from simplexcub.verify.proof_orbits import find_structure
from simplexcub.verify.proof_result import Proof
from simplexcub.verify.proof_snap import symmetrised
from simplexcub.version import VERSION

Node = tuple[Fraction, ...]

MOST_DIGITS = 1000
# Nodes further apart than this are no copies of each other. The smallest distance that makes a symmetric set is taken.
REACHES = (0.0, 1e-15, 1e-12, 1e-9, 1e-6, 1e-4, 1e-3, 1e-2, 3e-2)


def mend(rule: Rule, *, measure: Measure | None = None, degree: int | None = None, digits: int = 50) -> Rule:
    """The exact rule nearest to the printed decimals, to `digits` digits, verified and proven.

    Newton's iteration leads from the printed decimals to the rule that the certificate is about. A single
    wrong digit is set right before; where a fully symmetric table has several, their copies outvote them.

    Parameters
    ----------
    rule : Rule
    measure : Measure, optional
        The rule's own by default.
    degree : int, optional
        Degree to mend it to; by default the claimed one, or the one found where none is claimed.
    digits : int, optional
        Significant digits of the result.

    Returns
    -------
    Rule
        With its verification and proof.

    Raises
    ------
    NothingFound
        No exact rule is proven nearby.
    InputError
        Digits out of range, or a rule that cannot be verified.
    """
    if not 5 <= digits <= MOST_DIGITS:
        raise InputError(f"digits must lie between 5 and {MOST_DIGITS}", digits)
    against = rule.measure if measure is None else measure
    wanted = degree or rule.degree or verify(rule, measure=against).exact_degree
    if wanted < 1:
        raise NothingFound("exact rule", "the decimals do not even average degree 1", "State the degree.")
    rule = corrected(rule, against, wanted) or rule
    reasons: list[str] = []
    for snap in (*_symmetric_reach(rule, against), None):
        proof = prove(rule, measure=against, degree=wanted, digits=digits, snap=snap)
        if proof.holds:
            mended = _printed_in_full(rule, against, proof, digits)
            report = verify(mended, prove=True)
            if report.holds:
                return mended.verified(report.verification)
            reasons.append(report.reasons[0])
        else:
            reasons.append(proof.reason)
    raise NothingFound(
        f"exact rule of degree {wanted} near the printed decimals", reasons[0], "Check the degree and the measure."
    )


def _symmetric_reach(rule: Rule, measure: Measure) -> list[float]:
    """The smallest of the distances within which the set is fully symmetric, in a list; empty where none serves."""
    if rule.space != "all" or not measure.is_symmetric:
        return []
    printed = read_printed(rule)
    full = (r for r in REACHES if find_structure(symmetrised(printed, r), measure, rule.space).full)
    return [r for r in [next(full, None)] if r is not None]


def _printed_in_full(rule: Rule, measure: Measure, proof: Proof, digits: int) -> Rule:
    """`rule` with the numbers of the exact one."""
    nodes, weights = proof.nodes, proof.weights
    orbits: tuple[Orbit, ...] = ()
    if rule.space == "symmetric":
        nodes = tuple(tuple(sorted(node, reverse=True)) for node in nodes)
    if proof.group == "full":
        nodes, weights, orbits = _by_orbits(nodes, weights, digits, whole=rule.space == "symmetric")
    source = re.sub(r"\s+", " ", rule.provenance.method)
    today = datetime.datetime.now(datetime.UTC).date().isoformat()
    return Rule(
        measure,
        proof.degree,
        tuple(tuple(to_decimal(x, digits) for x in node) for node in nodes),
        tuple(to_decimal(w, digits) for w in weights),
        Provenance(f"simplexcub {VERSION}", 0, today, f"mended, {source}"),
        space=rule.space,
        symmetry="full" if orbits else "none",
        equal_weights=rule.equal_weights and len(set(weights)) == 1,
        digits=digits,
        orbits=orbits,
        also=rule.also,
    )


def _by_orbits(
    nodes: Sequence[Node], weights: Sequence[Fraction], digits: int, *, whole: bool
) -> tuple[tuple[Node, ...], tuple[Fraction, ...], tuple[Orbit, ...]]:
    """The nodes orbit after orbit, their weights, and the orbits; `whole`: the weights are those of orbits."""
    firsts: dict[Node, tuple[Node, Fraction]] = {}
    for node, weight in zip(nodes, weights, strict=True):
        firsts.setdefault(tuple(sorted(node)), (node, weight))
    if whole and len(firsts) < len(nodes):
        return tuple(nodes), tuple(weights), ()
    listed: list[Node] = []
    shares: list[Fraction] = []
    orbits: list[Orbit] = []
    for node, weight in firsts.values():
        values, multiplicities = zip(*Counter(node).items(), strict=True)
        size = orbit_size(multiplicities)
        labels = [j for j, m in enumerate(multiplicities) for _ in range(m)]
        orderings = [tuple(labels)] if whole else list(distinct_permutations(labels))
        listed += [tuple(values[j] for j in order) for order in orderings]
        shares += [weight] * len(orderings)
        total = weight if whole else weight * size
        orbits.append(Orbit(multiplicities, tuple(to_decimal(v, digits) for v in values), to_decimal(total, digits)))
    return tuple(listed), tuple(shares), tuple(orbits)
