"""What is asked of a rule besides its measure and degree, and whether these wishes go together."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NoReturn

from simplexcub.errors import NothingFound
from simplexcub.measures import Measure
from simplexcub.search.chosen import chosen_orbits
from simplexcub.search.system import Problem
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
    """

    measure: Measure
    degree: int
    include: tuple[str, ...] = ()

    @property
    def plain(self) -> bool:
        """Nothing is asked for but measure and degree."""
        return not self.include

    @property
    def method(self) -> str:
        """What the provenance of a searched rule says."""
        return "orbit search" + (f" with chosen nodes: {', '.join(self.include)}" if self.include else "")

    def give_up(self, budget: float) -> NoReturn:
        """Say that no rule was found.

        Raises
        ------
        NothingFound
        """
        wanted = f"rule of degree {self.degree} for {self.measure} with {' and '.join(self.include)} among its nodes"
        tried = f"in {budget:g} s no weights came out positive with all nodes inside"
        raise NothingFound(wanted, tried, "Choose fewer nodes, a lower degree, a longer budget or less symmetry.")

    def problem(self, group: Group) -> Problem:
        """The problem for one symmetry group."""
        return Problem(self.measure, self.degree, group, chosen_orbits(self.include, group))
