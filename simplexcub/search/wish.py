"""What is asked of a rule besides its measure and degree, and whether these wishes go together."""

from __future__ import annotations

import pickle
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import NoReturn

from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.search.chosen import chosen_orbits
from simplexcub.search.driver import Found
from simplexcub.search.extra import KnownMean, read_extras
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
    also : tuple of str or KnownMean
        Functions to average exactly besides the polynomials.
    integers : int
        Weights are integers up to this one over their sum; 1 makes them equal, 0 leaves them free.
    """

    measure: Measure
    degree: int
    include: tuple[str, ...] = ()
    integers: int = 0
    also: tuple[str | KnownMean, ...] = ()

    def __post_init__(self) -> None:
        remedy = "Leave one of them out."
        if self.integers and self.also:
            raise InputError(
                "weights must be free where more than polynomials is averaged exactly", "fixed weights", remedy
            )
        if self.integers and self.include:
            raise InputError("weights must be free where nodes are chosen", "fixed weights", remedy)

    @property
    def plain(self) -> bool:
        """Nothing is asked for but measure and degree."""
        return not (self.include or self.integers or self.also)

    @property
    def method(self) -> str:
        """What the provenance of a searched rule says."""
        wishes = [f"chosen nodes: {', '.join(self.include)}"] if self.include else []
        wishes += {0: [], 1: ["equal weights"]}.get(self.integers, [f"integer weights up to {self.integers}"])
        return " with ".join(["orbit search", *wishes])

    def check_portable(self) -> None:
        """Refuse functions that no other process could be sent.

        Raises
        ------
        InputError
        """
        for item in self.also:
            try:
                pickle.dumps(item)
            except (pickle.PicklingError, AttributeError, TypeError):
                name = item.name if isinstance(item, KnownMean) else item
                remedy = "Define it at the top of a module, or search with jobs=1."
                raise InputError(
                    f"{name} must be a function that other processes can load", "a local one", remedy
                ) from None

    def give_up(self, budget: float, reason: str = "") -> NoReturn:
        """Say that no rule was found, after what was known before the search.

        Raises
        ------
        NothingFound
        """
        wanted = f"rule of degree {self.degree} for {self.measure}"
        if self.integers:
            kind = "equal" if self.integers == 1 else f"integer (up to {self.integers})"
            tried = f"{reason}in {budget:g} s no structure with {kind} weights was solved inside the simplex"
            raise NothingFound(wanted, tried, "Allow a longer budget, larger integers, a lower degree or free weights.")
        if self.also:
            wanted = f"rule of degree {self.degree} for {self.measure}, exact for more than polynomials"
        if not self.include:
            tried = f"in {budget:g} s no structure was solved inside the simplex with positive weights"
            raise NothingFound(wanted, tried, "Ask for fewer functions, a lower degree or a longer budget.")
        wanted += f" with {' and '.join(self.include)} among its nodes"
        tried = f"in {budget:g} s no weights came out positive with all nodes inside"
        raise NothingFound(wanted, tried, "Choose fewer nodes, a lower degree, a longer budget or less symmetry.")

    def problem(self, group: Group) -> Problem:
        """The problem for one symmetry group."""
        also = read_extras(self.also, self.measure, group)
        problem = Problem(self.measure, self.degree, group, chosen_orbits(self.include, group), self.integers, also)
        for extra in also:
            low = min((x for orbit in problem.chosen for x in orbit.coordinates), default=1)
            if low == 0 and extra.label.power is not None and extra.label.power <= 0:
                raise InputError(f"{extra.label.formula} must be finite at the chosen nodes", ", ".join(self.include))
        return problem


def make_wish(
    measure: Measure,
    degree: int,
    symmetry: str,
    include: str | Sequence[str],
    also: str | KnownMean | Sequence[str | KnownMean],
    integers: int,
) -> Wish:
    """The wish from the arguments of a search; a symmetric rule on two components has an odd degree anyway."""
    sets = (include,) if isinstance(include, str) else tuple(include)
    if len(set(sets)) < len(sets):
        raise InputError("every set of nodes in include must be named once", ", ".join(sets))
    functions = (also,) if isinstance(also, str | KnownMean) else tuple(also)
    odd = measure.N == 2 and measure.is_symmetric and symmetry == "full"
    return Wish(measure, degree | 1 if odd else degree, sets, integers, functions)


def fixed_integers(equal_weights: bool, integer_weights: int | None) -> int:
    """The largest integer that a fixed weight may be: 1 for equal weights, 0 for free ones.

    Raises
    ------
    InputError
        Both are asked for, or an integer out of range.
    """
    if integer_weights is None:
        return int(equal_weights)
    if isinstance(integer_weights, bool) or not isinstance(integer_weights, int) or not 1 <= integer_weights <= 1000:
        raise InputError("integer_weights must be an integer from 1 to 1000", integer_weights)
    if equal_weights:
        raise InputError("weights must be equal or integers, not both", f"equal and up to {integer_weights}")
    return integer_weights


def with_claims(rule: Rule, found: Found) -> Rule:
    """The rule with what it claims besides its degree: more functions; equal or integer weights, where fixed."""
    rule = replace(rule, also=tuple(extra.label.name for extra in found.problem.also))
    if not found.problem.integers:
        return rule
    integers = System(found.problem, found.counts).integer_weights(found.candidate)
    sizes = [type_.size for type_, _, _ in found.orbits]
    listed = tuple(k for k, size in zip(integers, sizes, strict=True) for _ in range(size))
    if len(set(listed)) == 1:
        return replace(rule, equal_weights=True)
    return replace(rule, integer_weights=listed)
