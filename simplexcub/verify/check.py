"""The judgement of a rule: its printed decimals against exact means and against its own claims.

Nothing but the decimals is trusted, and no code of the search is used: the means come from another formula, the sums
are made in integers, and no basis is needed.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from simplexcub.errors import InputError
from simplexcub.measures import Measure, ordered
from simplexcub.rule import Rule, Verification
from simplexcub.verify.bounds import dimension, lower_bound
from simplexcub.verify.embedded import embedded_faults
from simplexcub.verify.entropic import AlsoCheck, also_faults, check_also
from simplexcub.verify.printed import Printed, read_printed
from simplexcub.verify.proof import prove as find_proof
from simplexcub.verify.proof_result import Proof
from simplexcub.verify.residuals import DegreeCheck, check_degree
from simplexcub.verify.structure import claim_faults, is_invariant, is_positive, node_faults, weight_faults

SHORT = 3  # decimals with no more digits than this are read as exact if they average degree 1 exactly
FOREIGN_SLACK = 100.0  # a table that claims nothing may be wrong in its last two digits
FARTHEST = 50.0  # units in the last place that a claimed digit may be off the exact rule that is proven


@dataclass(frozen=True)
class Progress:
    """Where a verification stands: the degree just compared, and one line of text."""

    text: str
    degree: int


@dataclass(frozen=True)
class Report:
    """What was found on a rule's printed decimals.

    Attributes
    ----------
    rule : Rule
    measure : Measure
        The measure that it was held against.
    holds : bool
        Everything that the rule claims is true of its decimals.
    exact_degree : int
        Highest degree that the decimals average exactly, ``verification.fails_at_degree - 1``; −1 where the weights do
        not even sum to 1.
    digits : int
        Digits to which the moments agree: the digits D of the decimals where every residual of the claimed degree (for
        a rule that claims none, of `exact_degree`) is within what the last printed digits can do; else D less the
        decades by which the worst one is beyond it.
    verification : Verification
        The block that stands under a printed table.
    reasons : tuple of str
        One sentence for each thing that is wrong; empty where `holds`.
    proof : Proof or None
        The certificate, or why there is none; None where it was not asked for or the decimals have no degree.
    also : tuple of AlsoCheck
        The functions besides polynomials that the rule claims, each held against its mean.
    """

    rule: Rule
    measure: Measure
    holds: bool
    exact_degree: int
    digits: int
    verification: Verification
    reasons: tuple[str, ...]
    proof: Proof | None = None
    also: tuple[AlsoCheck, ...] = ()


def verify(
    rule: Rule,
    *,
    measure: Measure | None = None,
    max_degree: int | None = None,
    prove: bool = False,
    progress: Callable[[Progress], None] | None = None,
) -> Report:
    """Hold the printed decimals of a rule against exact means.

    Every monomial of the claimed degree is summed in integer arithmetic and compared with E[λ^a] by the last of the
    measure's routes; it agrees if the difference is no larger than what one unit in the last place of each printed
    number can do to the sum. A rule of degree 0 claims nothing: the highest degree that it has is found, its last two
    digits not being relied on. Signs, sums, symmetry, equality of weights, orbits and digits are checked as claimed. A
    negative weight is reported but is no fault.

    Parameters
    ----------
    rule : Rule
    measure : Measure, optional
        What to hold it against; the rule's own measure by default.
    max_degree : int, optional
        Highest degree to try. A rule that is still exact there is reported as failing at the next degree. By default
        degrees are tried until one fails.
    prove : bool, optional
        Also look for the certificate that an exact rule lies nearby. That there is none is no fault; an exact rule that
        is off by more than the last two claimed digits is one.
    progress : callable, optional
        Called with a :class:`Progress` after each degree.

    Returns
    -------
    Report

    Raises
    ------
    InputError
        A measure with another N, or without exact moments of its ordered spectrum where the rule is for that; a
        `max_degree` below the claimed degree, or an entry that is not a decimal number.

    Notes
    -----
    Residuals are absolute, so a late digit of a number much smaller than the others can be beyond their reach. Where
    full symmetry or orbits are claimed it is caught if the number has copies, since those must agree digit for digit.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> from simplexcub.rule import Provenance, Rule
    >>> nodes = (("1", "0"), ("0.5", "0.5"), ("0", "1"))
    >>> weights = ("0.16666667", "0.66666667", "0.16666667")
    >>> simpson = Rule(flat(2), 3, nodes, weights, Provenance("", 0, "", "Simpson"), digits=8)
    >>> verify(simpson).exact_degree
    3
    """
    against = rule.measure if measure is None else measure
    if against.N != rule.measure.N:
        raise InputError(f"measure must have the rule's N = {rule.measure.N} components", against)
    if max_degree is not None and max_degree < rule.degree:
        raise InputError(f"max_degree must be at least the claimed degree {rule.degree}", max_degree)
    printed = read_printed(rule)
    off_simplex = tuple(node_faults(printed))
    reasons = [*weight_faults(printed, equal=rule.equal_weights), *off_simplex, *claim_faults(rule, printed)]
    trial = _Trial(rule, ordered(against) if rule.space == "ordered" else against, printed, progress)
    fails_at, judged, wrong = trial.search(max_degree, nested=not reasons)
    if judged.ratio > trial.slack:
        reasons.append(
            f"degree {rule.degree} claimed, but the mean of {_monomial(wrong.offender, rule.space == 'symmetric')} "
            f"is off by {wrong.offence} (degree {wrong.degree})"
        )
    bound = lower_bound(against, judged.degree, rule.space)
    if rule.degree and len(rule) < bound:
        reasons.append(f"degree {rule.degree} claimed with {len(rule)} nodes, but no such rule has fewer than {bound}")
    also = check_also(rule, against, printed)
    reasons += also_faults(rule, against, printed)
    reasons += embedded_faults(rule, against, printed, invariant=trial.invariant)
    degree = rule.degree or fails_at - 1
    proof = find_proof(rule, measure=against, degree=degree) if prove and degree > 0 else None
    if rule.degree and proof is not None and proof.holds and proof.units > FARTHEST:
        reasons.append(f"the nearest exact rule is {proof.radius} away, beyond the last two of the printed digits")
    verification = Verification(
        moments_checked=judged.moments_checked,
        max_residual=judged.max_residual,
        worst_exponents=judged.worst_exponents,
        fails_at_degree=fails_at,
        positive=is_positive(printed),
        inside=not off_simplex,
        lower_bound=bound,
        proof=None if proof is None else proof.record(),
    )
    digits = _agreeing(printed.digits, judged.ratio)
    return Report(rule, against, not reasons, fails_at - 1, digits, verification, tuple(reasons), proof, also)


class _Trial:
    """One rule against one measure, degree by degree."""

    def __init__(
        self, rule: Rule, measure: Measure, printed: Printed, progress: Callable[[Progress], None] | None
    ) -> None:
        self.rule = rule
        self.measure = measure
        self.progress = progress
        self.invariant = rule.space == "all" and measure.is_symmetric and is_invariant(printed)
        self.slack = 1.0 if rule.degree else FOREIGN_SLACK
        exact = printed.read_as_exact()
        short = printed.digits <= SHORT and self._check(exact, 1).ratio == 0
        self.printed = exact if short else printed
        self.done: dict[int, DegreeCheck] = {}

    def _check(self, printed: Printed, degree: int) -> DegreeCheck:
        return check_degree(printed, self.measure, degree, self.rule.space, invariant=self.invariant)

    def check(self, degree: int) -> DegreeCheck:
        if degree not in self.done:
            self.done[degree] = self._check(self.printed, degree)
            if self.progress:
                found = self.done[degree]
                text = f"degree {degree}: {found.moments_checked} means, worst off by {found.max_residual}"
                self.progress(Progress(text, degree))
        return self.done[degree]

    def fails(self, degree: int) -> bool:
        return self.check(degree).ratio > self.slack

    def search(self, max_degree: int | None, *, nested: bool) -> tuple[int, DegreeCheck, DegreeCheck]:
        """(first failing degree, check of the degree that is judged, check that shows what is wrong with the claim).

        `nested`: nodes and weights sum to 1, so that agreement at the claimed degree implies it at all lower ones.
        """
        certain = self._certain_failure()
        claim = min(self.rule.degree, 2 * certain + 10)  # far beyond what can be true no moments are spent
        start = claim + 1 if claim and nested and not self.fails(claim) else 0
        end = certain if max_degree is None else min(max_degree + 1, certain)
        fails_at = start
        while fails_at < end and not self.fails(fails_at):
            fails_at += 1
        judged = self.check(claim or max(fails_at - 1, 0))
        wrong = self.check(fails_at) if 0 < fails_at <= claim else judged
        return fails_at, judged, wrong

    def _certain_failure(self) -> int:
        """2s with dim P_s above the number of nodes: no rule averages the square of a p ∈ P_s that vanishes on them."""
        s = 1
        while dimension(self.measure.N, s, self.rule.space) <= len(self.rule):
            s += 1
        return 2 * s


def _agreeing(digits: int, ratio: float) -> int:
    if ratio <= 1:
        return digits
    return max(0, digits - math.ceil(math.log10(ratio))) if math.isfinite(ratio) else 0


def _monomial(exponents: tuple[int, ...], symmetrised: bool) -> str:
    factors = [f"λ{i}" + (f"^{a}" if a > 1 else "") for i, a in enumerate(exponents, 1) if a]
    return ("the symmetrised " if symmetrised else "") + (" ".join(factors) or "1")
