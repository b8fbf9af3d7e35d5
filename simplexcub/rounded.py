"""Rules from numbers in extended precision, rounded to the decimals that are then the rule."""

from __future__ import annotations

from collections.abc import Sequence

from mpmath import mp, mpf

from simplexcub.decimals import to_decimal
from simplexcub.measures import Measure
from simplexcub.rule import Orbit, Provenance, Rule, Space
from simplexcub.symmetry import distinct_permutations, orbit_size


def rule_from_orbits(
    measure: Measure,
    degree: int,
    orbits: Sequence[tuple[tuple[int, ...], Sequence[mpf], mpf]],
    *,
    digits: int,
    provenance: Provenance,
) -> Rule:
    """A fully symmetric rule from (multiplicities, distinct values, weight of the orbit), each node written out."""
    printed, nodes, weights = [], [], []
    for multiplicities, values, weight in orbits:
        texts = tuple(to_decimal(v, digits) for v in values)
        printed.append(Orbit(multiplicities, texts, to_decimal(weight, digits)))
        size = orbit_size(multiplicities)
        with mp.workdps(digits + 10):
            share = to_decimal(weight / size, digits)
        labels = [j for j, m in enumerate(multiplicities) for _ in range(m)]
        for order in distinct_permutations(labels):
            nodes.append(tuple(texts[j] for j in order))
            weights.append(share)
    return Rule(
        measure, degree, tuple(nodes), tuple(weights), provenance, symmetry="full", digits=digits, orbits=tuple(printed)
    )


def rule_from_representatives(
    measure: Measure,
    degree: int,
    orbits: Sequence[tuple[tuple[int, ...], Sequence[mpf], mpf]],
    *,
    digits: int,
    provenance: Provenance,
) -> Rule:
    """A rule for symmetric functions from (multiplicities, distinct values, weight of the orbit): one node for each."""
    printed = []
    for multiplicities, values, weight in orbits:
        sizes: list[int] = []
        texts: list[str] = []
        for value, m in sorted(zip(values, multiplicities, strict=True), reverse=True):
            text = to_decimal(value, digits)
            if texts and texts[-1] == text:
                sizes[-1] += m
            else:
                texts.append(text)
                sizes.append(m)
        printed.append(Orbit(tuple(sizes), tuple(texts), to_decimal(weight, digits)))
    return Rule(
        measure,
        degree,
        tuple(tuple(t for t, m in zip(o.values, o.multiplicities, strict=True) for _ in range(m)) for o in printed),
        tuple(orbit.weight for orbit in printed),
        provenance,
        space="symmetric",
        symmetry="full",
        digits=digits,
        orbits=tuple(printed),
    )


def rule_from_nodes(
    measure: Measure,
    degree: int,
    nodes: Sequence[Sequence[mpf]],
    weights: Sequence[mpf],
    *,
    digits: int,
    provenance: Provenance,
    space: Space = "all",
    symmetry: str = "none",
) -> Rule:
    """A rule from nodes, shape (M, N), and weights, shape (M,), in extended precision."""
    printed = tuple(tuple(to_decimal(x, digits) for x in node) for node in nodes)
    return Rule(
        measure,
        degree,
        printed,
        tuple(to_decimal(w, digits) for w in weights),
        provenance,
        space=space,
        symmetry=symmetry,
        digits=digits,
    )
