"""What a shipped table is, apart from measure, degree and nodes: its file name, and whether it serves a request."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from pathlib import Path

from simplexcub.measures import Measure
from simplexcub.rule import Rule


@dataclass(frozen=True)
class Kind:
    """The kind of a rule.

    Attributes
    ----------
    space, symmetry : str
    equal_weights, integer_weights : bool
    also : tuple of str
        Functions that it averages exactly besides polynomials.
    embedded : bool
        Whether it has embedded weights.
    """

    space: str
    symmetry: str
    equal_weights: bool = False
    integer_weights: bool = False
    also: tuple[str, ...] = ()
    embedded: bool = False

    def stem(self, degree: int) -> str:
        """Start of the file name, which the number of nodes completes; names sort by space, symmetry and degree.

        Examples
        --------
        >>> Kind("all", "full").stem(7), Kind("all", "full", also=("power-1/2",)).stem(12)
        ('all-full-t07', 'all-full-also-power-1over2-t12')
        """
        words = [self.space, self.symmetry]
        words += ["equal"] * self.equal_weights + ["integer"] * self.integer_weights + ["embedded"] * self.embedded
        words += ["also", *self.also] * bool(self.also)
        return "-".join([*words, f"t{degree:02d}"]).replace("/", "over")

    def serves(self, *, equal_weights: bool, also: tuple[str, ...], embedded: bool) -> bool:
        """Whether it is as asked; nothing special is given to those who ask for nothing special."""
        if equal_weights != self.equal_weights or self.integer_weights or embedded != self.embedded:
            return False
        return set(also) <= set(self.also) if also else not self.also

    @property
    def told(self) -> str:
        """What is special, each after a comma; empty where nothing is."""
        words = ["equal weights"] * self.equal_weights + ["integer weights"] * self.integer_weights
        words += [f"also {' '.join(self.also)}"] * bool(self.also) + ["embedded"] * self.embedded
        return "".join(f", {word}" for word in words)

    @property
    def options(self) -> str:
        """The options of ``simplexcub solve`` that ask for it, each after a blank."""
        words = ["--equal-weights"] * self.equal_weights + ["--embedded"] * self.embedded
        words += [f"--also {','.join(self.also)}"] * bool(self.also)
        return "".join(f" {word}" for word in words)


def kind_of(rule: Rule) -> Kind:
    """The kind of a rule."""
    fixed = (rule.equal_weights, bool(rule.integer_weights))
    return Kind(rule.space, rule.symmetry, *fixed, rule.also, rule.embedded is not None)


def special(kind: Kind, embedded: int | None) -> str:
    """What is special about a rule of the kind whose embedded weights, if any, are of degree `embedded`.

    Examples
    --------
    >>> special(Kind("all", "full", equal_weights=True, embedded=True), 2)
    'equal weights, embedded to degree 2'
    """
    return kind.told.removeprefix(", ") + ("" if embedded is None else f" to degree {embedded}")


def special_of(rule: Rule, *, functions: bool = True) -> str:
    """What is special about a rule; without `functions`, those that it averages besides polynomials are left out."""
    kind = kind_of(rule)
    shown = kind if functions else replace(kind, also=())
    return special(shown, None if rule.embedded is None else rule.embedded.degree)


def is_plain(stem: str) -> bool:
    """Whether a table's file name tells of nothing special.

    Examples
    --------
    >>> is_plain("all-product-2-1-t07-12"), is_plain("all-full-equal-t07-12")
    (True, False)
    """
    return not re.search("-(equal|integer|embedded|also)-", stem)


def place_for(measure: Measure) -> Path:
    """The folder of a measure's tables, below the folder of all tables.

    Examples
    --------
    >>> from simplexcub.measures import dirichlet
    >>> print(place_for(dirichlet(["1/2", "1/2"])))
    dirichlet/N2-1over2-1over2
    """
    record = measure.parameters()
    parts = [f"N{measure.N}", *(a.replace("/", "over") for a in record.get("alpha", ()))]
    if measure.family == "induced":
        parts.append(f"K{record['K']}")
    return Path(measure.family, "-".join(parts))
