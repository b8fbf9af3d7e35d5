"""What is asked of a rule besides its measure and degree, and whether these wishes go together."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import NoReturn

from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.search.chosen import chosen_orbits
from simplexcub.search.driver import Found
from simplexcub.search.system import Problem, System
from simplexcub.symmetry import Group


@dataclass(frozen=True)
class Wish:
    """The options of a search that change what is searched for.

    Attributes
    ----------
    measure : Measure
    degree : int
    include : tuple of str
        Sets of nodes that the rule must have.
    integers : int
        Weights are integers up to this one over their sum; 1 makes them equal, 0 leaves them free.
    """

    measure: Measure
    degree: int
    include: tuple[str, ...] = ()
    integers: int = 0

    def __post_init__(self) -> None:
        if self.integers and self.include:
            raise InputError("weights must be free where nodes are chosen", "fixed weights", "Leave one of them out.")

    @property
    def plain(self) -> bool:
        """Nothing is asked for but measure and degree."""
        return not (self.include or self.integers)

    @property
    def method(self) -> str:
        """What the provenance of a searched rule says."""
        wishes = [f"chosen nodes: {', '.join(self.include)}"] if self.include else []
        wishes += {0: [], 1: ["equal weights"]}.get(self.integers, [f"integer weights up to {self.integers}"])
        return " with ".join(["orbit search", *wishes])

    def give_up(self, budget: float) -> NoReturn:
        """Say that no rule was found.

        Raises
        ------
        NothingFound
        """
        wanted = f"rule of degree {self.degree} for {self.measure}"
        if self.integers:
            kind = "equal" if self.integers == 1 else f"integer (up to {self.integers})"
            tried = f"in {budget:g} s no structure with {kind} weights was solved inside the simplex"
            raise NothingFound(wanted, tried, "Allow a longer budget, larger integers, a lower degree or free weights.")
        wanted += f" with {' and '.join(self.include)} among its nodes"
        tried = f"in {budget:g} s no weights came out positive with all nodes inside"
        raise NothingFound(wanted, tried, "Choose fewer nodes, a lower degree, a longer budget or less symmetry.")

    def problem(self, group: Group) -> Problem:
        """The problem for one symmetry group."""
        return Problem(self.measure, self.degree, group, chosen_orbits(self.include, group), self.integers)


def fixed_integers(equal_weights: bool, integer_weights: int) -> int:
    """The largest integer that a fixed weight may be: 1 for equal weights, 0 for free ones.

    Raises
    ------
    InputError
        Both are asked for, or an integer out of range.
    """
    if isinstance(integer_weights, bool) or not isinstance(integer_weights, int) or not 0 <= integer_weights <= 1000:
        raise InputError("integer_weights must be an integer of at most 1000", integer_weights)
    if equal_weights and integer_weights:
        raise InputError("weights must be equal or integers, not both", f"equal and up to {integer_weights}")
    return 1 if equal_weights else integer_weights


def with_integers(rule: Rule, found: Found) -> Rule:
    """The rule with its claim of equal or integer weights, where the search had fixed them."""
    if not found.problem.integers:
        return rule
    integers = System(found.problem, found.counts).integer_weights(found.candidate)
    sizes = [type_.size for type_, _, _ in found.orbits]
    listed = tuple(k for k, size in zip(integers, sizes, strict=True) for _ in range(size))
    if len(set(listed)) == 1:
        return replace(rule, equal_weights=True)
    return replace(rule, integer_weights=listed)
