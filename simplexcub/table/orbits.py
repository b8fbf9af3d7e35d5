"""Nodes of a printed orbit, and whether a rule can be printed by its orbits without losing a digit."""

from __future__ import annotations

from collections.abc import Iterator

from simplexcub.rule import Orbit, Rule, Space
from simplexcub.symmetry import distinct_permutations, orbit_size


def expand(orbit: Orbit, space: Space) -> Iterator[tuple[str, ...]]:
    """The nodes that an orbit stands for, in the order in which rules write them out.

    On space ``all`` these are all different orderings. The spaces ``symmetric`` and ``ordered`` keep one
    representative, largest coordinate first.
    """
    labels = [j for j, m in enumerate(orbit.multiplicities) for _ in range(m)]
    if space == "all":
        for order in distinct_permutations(labels):
            yield tuple(orbit.values[j] for j in order)
    else:
        yield tuple(sorted((orbit.values[j] for j in labels), key=float, reverse=True))


def count_nodes(orbit: Orbit, space: Space) -> int:
    """How many nodes `expand` gives."""
    return orbit_size(orbit.multiplicities) if space == "all" else 1


def node_weights(rule: Rule) -> list[str] | None:
    """The weight of each node of each orbit, where the orbits alone give back nodes and weights digit for digit.

    None where they do not: no orbits, another order of the nodes, or unequal weights within an orbit.
    """
    shares = []
    position = 0
    for orbit in rule.orbits:
        size = count_nodes(orbit, rule.space)
        weights = set(rule.weight_decimals[position : position + size])
        second = set(rule.embedded.weight_decimals[position : position + size]) if rule.embedded else {""}
        if (
            len(weights) != 1
            or len(second) != 1
            or tuple(expand(orbit, rule.space)) != rule.node_decimals[position : position + size]
        ):
            return None
        shares.append(weights.pop())
        position += size
    return shares if shares and position == len(rule) else None
