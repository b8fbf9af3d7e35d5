"""What a proof amounts to: the box held against the printed decimals, and the record that a table carries."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from decimal import ROUND_CEILING, Context, Decimal
from fractions import Fraction
from itertools import pairwise
from typing import Any

from simplexcub.verify.printed import Printed
from simplexcub.verify.proof_newton import NotProven, Zero
from simplexcub.verify.proof_orbits import Structure
from simplexcub.verify.proof_system import System


@dataclass(frozen=True)
class Proof:
    """A certificate, or why there is none.

    Attributes
    ----------
    holds : bool
        An exact rule of the degree lies within `radius`, with weights of the printed signs and nodes inside.
    method : str
    degree : int
        Degree of the exact rule.
    group : str
        Symmetry group of the exact rule, found on the decimals.
    reason : str
        Why it does not hold; empty where it does.
    radius : str
        No printed number is further from the exact one; rounded up. ``0`` where the decimals are exact.
    step, contraction : str
        Y and Z of Newton–Kantorovich.
    equations, unknowns : int
    fixed : tuple of str
        Unknowns held at their printed decimals.
    positive : bool
        All weights of the exact rule are above 0.
    units : float
        Largest distance of a printed number from the exact one in units of its own last place.
    nodes : tuple of tuple of Fraction, weights : tuple of Fraction
        The exact rule to more digits than are printed, in the table's order.
    """

    holds: bool
    method: str
    degree: int
    group: str
    reason: str = ""
    radius: str = ""
    step: str = "0"
    contraction: str = "0"
    equations: int = 0
    unknowns: int = 0
    fixed: tuple[str, ...] = ()
    positive: bool = False
    units: float = 0.0
    nodes: tuple[tuple[Fraction, ...], ...] = field(default=(), repr=False)
    weights: tuple[Fraction, ...] = field(default=(), repr=False)

    def record(self) -> dict[str, Any]:
        """The ``proof`` field of a table."""
        if not self.holds:
            return {"method": self.method, "holds": False, "reason": self.reason}
        return {
            "method": self.method,
            "radius": self.radius,
            "holds": True,
            "group": self.group,
            "equations": self.equations,
            "unknowns": self.unknowns,
            "fixed": list(self.fixed),
            "step": self.step,
            "contraction": self.contraction,
        }


def conclude(
    system: System,
    printed: Printed,
    snapped: Printed,
    degree: int,
    method: str,
    exact: tuple[list[Fraction], list[list[Fraction]]],
    zero: Zero | None = None,
) -> Proof:
    """Signs over the box, and the largest distance of a printed number from the exact one.

    `snapped` is the set whose structure `system` has, `exact` the weight and block values of its orbits.

    Raises
    ------
    NotProven
        A weight of uncertain sign, or a node that may lie outside.
    """
    weights, values = exact
    radius = zero.radius if zero else Fraction(0)
    weight_room = radius if system.shares is None else Fraction(0)
    rooms = [[radius * Fraction(float(s)) for s in system.speeds(orbit)] for orbit in system.structure.orbits]
    for orbit, weight, blocks, room in zip(system.structure.orbits, weights, values, rooms, strict=True):
        if abs(weight) <= weight_room or (weight > 0) != (orbit.weight > 0):
            raise NotProven(f"the weight of node {orbit.first + 1} may have another sign than the printed one")
        if any(v < r for v, r in zip(blocks, room, strict=True)):
            raise NotProven(f"node {orbit.first + 1} of the exact rule may lie outside")
        gaps = ((a - b, r + s) for (a, r), (b, s) in pairwise(zip(blocks, room, strict=True)))
        if system.descending and any(gap < needed for gap, needed in gaps):
            raise NotProven(f"node {orbit.first + 1} of the exact rule may not be in descending order")
    farthest, units = Fraction(0), 0.0
    nodes, shares = [], []
    places = _placements(system.structure, snapped)
    for (o, blocks_of), node, shown in zip(places, printed.nodes, printed.weights, strict=True):
        nodes.append(tuple(values[o][b] for b in blocks_of))
        shares.append(weights[o])
        pairs = [(shown, weights[o], weight_room)]
        pairs += [(x, values[o][b], rooms[o][b]) for x, b in zip(node, blocks_of, strict=True)]
        for text, value, room_here in pairs:
            off = abs(value - Fraction(text, printed.one)) + room_here
            farthest = max(farthest, off)
            units = max(units, _units(off, text, printed))
    return Proof(
        True,
        method,
        degree,
        system.structure.group,
        radius=round_up(farthest),
        step=round_up(zero.step) if zero else "0",
        contraction=round_up(zero.contraction) if zero else "0",
        equations=len(system.means),
        unknowns=len(system.unknowns),
        fixed=tuple(_fixed(system, zero, snapped)) if zero else (),
        positive=min(weights) > 0,
        units=units,
        nodes=tuple(nodes),
        weights=tuple(shares),
    )


def _units(off: Fraction, value: int, printed: Printed) -> float:
    """`off` in units of the last place of a printed value."""
    length = len(str(abs(value))) if value else 0
    return float(off * 10 ** (printed.places - max(length - printed.digits, 0)))


def _fixed(system: System, zero: Zero, printed: Printed) -> Iterator[str]:
    active = set(zero.active)
    for j, (o, b) in enumerate(system.unknowns):
        if j not in active:
            orbit = system.structure.orbits[o]
            node = orbit.first + 1
            if b < 0:
                yield f"weight {node}"
                continue
            where = printed.nodes[orbit.first].index(orbit.values[b]) + 1
            yield f"λ{where} of node {node}"


def _placements(structure: Structure, snapped: Printed) -> list[tuple[int, tuple[int, ...]]]:
    """The orbit of every node of the table, and the block that stands in each of its coordinates."""
    orbits = structure.orbits
    if structure.full:
        found = {tuple(sorted(snapped.nodes[orbit.first])): o for o, orbit in enumerate(orbits)}
        alone = len(orbits) == len(snapped.nodes)
        keys = range(len(orbits)) if alone else [found[tuple(sorted(node))] for node in snapped.nodes]
        return [
            (o, tuple(orbits[o].values.index(v) for v in node)) for o, node in zip(keys, snapped.nodes, strict=True)
        ]
    if len(orbits) == len(snapped.nodes):
        return [(o, orbit.images[0]) for o, orbit in enumerate(orbits)]
    by_node = {
        tuple(orbit.values[b] for b in image): (o, image) for o, orbit in enumerate(orbits) for image in orbit.images
    }
    return [by_node[node] for node in snapped.nodes]


def round_up(value: Fraction) -> str:
    """`value` ≥ 0 to two digits, rounded up, e.g. ``3.2e-51``; ``0`` where it is exactly zero."""
    if not value:
        return "0"
    context = Context(prec=30, rounding=ROUND_CEILING, Emin=-99_999, Emax=99_999)
    exact = context.divide(Decimal(value.numerator), Decimal(value.denominator))
    return f"{Context(prec=2, rounding=ROUND_CEILING, Emin=-99_999, Emax=99_999).plus(exact):.1e}"
