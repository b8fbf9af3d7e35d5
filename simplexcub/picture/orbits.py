"""Which nodes of a rule belong together, and how the orbits are named in a legend."""

from __future__ import annotations

from collections.abc import Sequence
from decimal import Decimal
from typing import NamedTuple

import numpy as np

from simplexcub.errors import InputError
from simplexcub.measures import Dirichlet
from simplexcub.measures.ordered import Ordered
from simplexcub.picture.style import FloatArray
from simplexcub.rule import Rule
from simplexcub.symmetry import named_group
from simplexcub.table.sheet import letters

_WRITTEN_OUT = 6


class Group(NamedTuple):
    """An orbit: the indices of its nodes, its weight, and its name."""

    nodes: list[int]
    weight: float
    name: str


def on_chamber(rule: Rule) -> bool:
    """Whether nodes are ordered spectra, largest component first."""
    return rule.space != "all" or isinstance(rule.measure, Ordered)


def node_orbits(rule: Rule) -> list[Group]:
    """The orbits of the rule's symmetry, in the order in which they appear; single nodes where there is none."""
    keys: dict[object, list[int]] = {}
    for k, key in enumerate(_keys(rule)):
        keys.setdefault(key, []).append(k)
    return [Group(nodes, float(rule.weights[nodes].sum()), _name(rule, nodes)) for nodes in keys.values()]


def _keys(rule: Rule) -> Sequence[object]:
    if on_chamber(rule):
        return range(len(rule))
    if rule.symmetry == "full":
        return [tuple(sorted(node)) for node in rule.node_decimals]
    alpha = rule.measure.alpha if isinstance(rule.measure, Dirichlet) else ()
    try:
        elements = named_group(rule.symmetry, rule.measure.N, alpha).elements
    except InputError:  # a name that a foreign table brought
        return range(len(rule))
    return [min(tuple(node[i] for i in g) for g in elements) for node in rule.node_decimals]


def _name(rule: Rule, nodes: list[int]) -> str:
    """Which components are equal, as in a a b, and how many nodes there are."""
    times = f" ×{len(nodes)}" if len(nodes) > 1 else ""
    return f"{pattern_word(rule.nodes[nodes[0]])}{times}"


def pattern_word(node: FloatArray) -> str:
    """Which components of a node are equal, as a formula.

    Examples
    --------
    >>> pattern_word(np.array([0.25, 0.5, 0.25]))
    '$a\\\\,b\\\\,a$'
    """
    values = node.tolist()
    distinct = list(dict.fromkeys(values))
    names = dict(zip(distinct, letters(len(distinct)), strict=True))
    if len(values) <= _WRITTEN_OUT:
        word = r"\,".join(names[x] for x in values)
    elif len(distinct) <= _WRITTEN_OUT:
        word = r"\,".join(f"{name}^{{{values.count(x)}}}" for x, name in names.items())
    else:
        word = rf"a_1\dots a_{{{len(distinct)}}}"
    return f"${word}$"


def chamber_coordinates(spectra: FloatArray) -> FloatArray:
    """Barycentric coordinates b_k = k (λ_k − λ_{k+1}) in the chamber with vertices (1/k, …, 1/k, 0, …, 0).

    Examples
    --------
    >>> chamber_coordinates(np.array([[0.5, 0.5, 0.0]])).tolist()
    [[0.0, 1.0, 0.0]]
    """
    n = spectra.shape[1]
    after = np.hstack([spectra[:, 1:], np.zeros((len(spectra), 1))])
    coordinates: FloatArray = np.arange(1, n + 1) * (spectra - after)
    return coordinates


def chamber_points(coordinates: FloatArray) -> FloatArray:
    """The spectra with the given chamber coordinates; the inverse of `chamber_coordinates`."""
    n = coordinates.shape[1]
    parts = coordinates / np.arange(1, n + 1)
    spectra: FloatArray = np.cumsum(parts[:, ::-1], axis=1)[:, ::-1]
    return spectra


def sorted_profiles(rule: Rule) -> list[tuple[FloatArray, float, int]]:
    """The different sorted nodes, largest component first, with their weight and number of nodes."""
    found: dict[tuple[str, ...], list[int]] = {}
    for k, node in enumerate(rule.node_decimals):
        found.setdefault(tuple(sorted(node, key=Decimal, reverse=True)), []).append(k)
    return [
        (np.array([float(x) for x in profile]), float(rule.weights[nodes].sum()), len(nodes))
        for profile, nodes in found.items()
    ]
