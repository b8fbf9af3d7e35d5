"""What a proof amounts to: the box held against the printed decimals, and the record that a table carries."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from decimal import ROUND_CEILING, Context, Decimal
from fractions import Fraction
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
    degree: int,
    method: str,
    weights: list[Fraction],
    values: list[list[Fraction]],
    radius: Fraction,
    zero: Zero | None = None,
) -> Proof:
    """Signs over the box, and the largest distance of a printed number from the exact one."""
    farthest, units, positive = Fraction(0), 0.0, True
    for orbit, weight, blocks in zip(system.structure.orbits, weights, values, strict=True):
        room = radius if system.equal_weight is None else Fraction(0)
        shown = Fraction(orbit.weight, printed.one)
        if abs(weight) <= room or (weight > 0) != (shown > 0):
            raise NotProven(f"the weight of node {orbit.first + 1} may have another sign than the printed one")
        positive = positive and weight > 0
        farthest = max(farthest, abs(weight - shown) + room)
        units = max(units, _units(abs(weight - shown) + room, orbit.weight, printed))
        for value, speed, text in zip(blocks, system.speeds(orbit), orbit.values, strict=True):
            room = radius * Fraction(float(speed))
            if value < room:
                raise NotProven(f"node {orbit.first + 1} of the exact rule may lie outside")
            off = abs(value - Fraction(text, printed.one)) + room
            farthest = max(farthest, off)
            units = max(units, _units(off, text, printed))
    nodes, shares = _written_out(system.structure, printed, weights, values)
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
        fixed=tuple(_fixed(system, zero, printed)) if zero else (),
        positive=positive,
        units=units,
        nodes=nodes,
        weights=shares,
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


def _written_out(
    structure: Structure, printed: Printed, weights: list[Fraction], values: list[list[Fraction]]
) -> tuple[tuple[tuple[Fraction, ...], ...], tuple[Fraction, ...]]:
    """Every node of the table, with the exact values in place of the printed ones."""
    if structure.full and len(structure.orbits) == len(printed.nodes):
        keys = list(range(len(structure.orbits)))
    elif structure.full:
        where = {tuple(sorted(printed.nodes[orbit.first])): o for o, orbit in enumerate(structure.orbits)}
        keys = [where[tuple(sorted(node))] for node in printed.nodes]
    else:
        lookup = {
            tuple(orbit.values[b] for b in image): o
            for o, orbit in enumerate(structure.orbits)
            for image in orbit.images
        }
        keys = [lookup[node] for node in printed.nodes]
        if len(structure.orbits) == len(printed.nodes):
            keys = list(range(len(structure.orbits)))
    nodes, shares = [], []
    for node, o in zip(printed.nodes, keys, strict=True):
        orbit = structure.orbits[o]
        if structure.full:
            place = dict(zip(orbit.values, values[o], strict=True))
            nodes.append(tuple(place[v] for v in node))
        else:
            image = next(i for i in orbit.images if tuple(orbit.values[b] for b in i) == node)
            nodes.append(tuple(values[o][b] for b in image))
        shares.append(weights[o])
    return tuple(nodes), tuple(shares)


def round_up(value: Fraction) -> str:
    """`value` ≥ 0 to two digits, rounded up, e.g. ``3.2e-51``; ``0`` where it is exactly zero."""
    if not value:
        return "0"
    context = Context(prec=30, rounding=ROUND_CEILING, Emin=-99_999, Emax=99_999)
    exact = context.divide(Decimal(value.numerator), Decimal(value.denominator))
    return f"{Context(prec=2, rounding=ROUND_CEILING, Emin=-99_999, Emax=99_999).plus(exact):.1e}"
