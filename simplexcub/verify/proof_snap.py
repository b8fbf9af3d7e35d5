"""A node set that is fully symmetric but for its last digits, or for a few wrong ones, made exactly so.

Nodes whose sorted coordinates agree within a tolerance form a cluster. If every cluster has just as many nodes as its
orbit, each number is replaced by the median of its copies, so that one wrong digit among three copies is outvoted.
"""

from __future__ import annotations

from dataclasses import replace
from statistics import median_low

from simplexcub.symmetry import orbit_size
from simplexcub.verify.printed import Printed

Node = tuple[int, ...]


def symmetrised(printed: Printed, tolerance: float) -> Printed:
    """The fully symmetric set within `tolerance` of the printed one; the printed one itself where there is none.

    Coordinates within the tolerance of 0 become 0.
    """
    reach = int(tolerance * 2.0**60) * printed.one >> 60
    clusters: list[list[int]] = []
    heads: list[Node] = []
    for k, node in enumerate(printed.nodes):
        ordered = tuple(sorted(node, reverse=True))
        for head, members in zip(heads, clusters, strict=True):
            if all(abs(x - y) <= reach for x, y in zip(head, ordered, strict=True)):
                members.append(k)
                break
        else:
            heads.append(ordered)
            clusters.append([k])
    nodes: list[Node] = list(printed.nodes)
    weights = list(printed.weights)
    for members in clusters:
        ranked = [sorted(printed.nodes[k], reverse=True) for k in members]
        middle = [median_low(copies) for copies in zip(*ranked, strict=True)]
        runs = _runs(middle, reach)
        if orbit_size(tuple(len(run) for run in runs)) != len(members):
            return printed
        values = [0] * len(middle)
        for run in runs:
            # All copies of all coordinates of the run vote together.
            value = median_low([copy[i] for copy in ranked for i in run])
            for i in run:
                values[i] = 0 if abs(value) <= reach else value
        weight = median_low([printed.weights[k] for k in members])
        for k in members:
            order = sorted(range(len(values)), key=lambda i, k=k: (-printed.nodes[k][i], i))  # type: ignore[misc]
            moved = list(values)
            for rank, i in enumerate(order):
                moved[i] = values[rank]
            nodes[k] = tuple(moved)
            weights[k] = weight
    return replace(printed, nodes=tuple(nodes), weights=tuple(weights))


def _runs(descending: list[int], reach: int) -> list[list[int]]:
    """Positions of neighbouring values that agree within `reach`."""
    runs: list[list[int]] = []
    for i, value in enumerate(descending):
        if runs and abs(descending[runs[-1][0]] - value) <= reach:
            runs[-1].append(i)
        else:
            runs.append([i])
    return runs
