"""Newton–Kantorovich in integers: a zero of F within a stated radius, or the reason why none is shown.

Let A be an approximate inverse of the Jacobian J(x̃) of the square system that is left when surplus unknowns are fixed.
T(x) = x − A F(x) maps the box |x − x̃| ≤ r (largest entry) into itself and contracts it if

    Y + Z r ≤ r,   Z < 1,   with  Y ≥ ‖A F(x̃)‖,   Z ≥ ‖1 − A J(x̃)‖ + r max_i Σ_e |A_ie| H_e,

H_e bounding the second derivatives of F_e over the box. Then F has exactly one zero in the box; A is invertible since
‖1 − A J(x̃)‖ < 1.

Numbers are integers in units of 2^(−B). F and J are evaluated exactly and then cut off by less than one unit, so that
A F is off by at most Σ_e |A_ie| units and each entry of A J likewise; both are added to the bounds.

The centre x̃ is not the printed point but where Newton's iteration leads from it; the distance between the two is
exact and belongs to the radius that is reported.

References: R. Krawczyk, Computing 4 (1969) 187–201; L. V. Kantorovich, G. P. Akilov, *Functional Analysis* (1982),
chapter XVIII; W. Tucker, *Validated Numerics* (2011), chapter 5.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import qr

from simplexcub.errors import SimplexcubError
from simplexcub.verify.proof_system import System

Integers = NDArray[np.object_]

MOST_STEPS = 30
QUICK = 1e-6  # a step that shrinks less than this against the last one calls for a new Jacobian
LARGEST_STEP = 0.1
SMALLEST_SCALE = 1e-6


class NotProven(SimplexcubError):
    """Why the argument does not go through."""

    def __init__(self, reason: str) -> None:
        super().__init__(reason)
        self.reason = reason


@dataclass(frozen=True)
class Zero:
    """A box that holds exactly one zero of the square system.

    Attributes
    ----------
    x : list of int
        Its centre, in units of 2^(−bits), all unknowns.
    bits : int
    active : list of int
        Unknowns that the system determines; the others are fixed at their printed decimals.
    radius, step, contraction : Fraction
        r, Y and Z.
    """

    x: list[int]
    bits: int
    active: list[int]
    radius: Fraction
    step: Fraction
    contraction: Fraction


def find_zero(system: System, start: Sequence[Fraction], bits: int) -> Zero:
    """A zero of `system` near `start`, to about `bits` binary digits.

    Raises
    ------
    NotProven
        More equations than unknowns, a singular Jacobian, or an iteration that does not settle.
    """
    equations, unknowns = len(system.means), len(start)
    if equations > unknowns:
        raise NotProven(f"there are more equations ({equations}) than unknowns ({unknowns})")
    if not unknowns:
        raise NotProven("nothing is left to vary")
    work = bits
    x = [round(v * 2**work) for v in start]
    active = choose_unknowns(_jacobian(system, x, work), start, work)
    inverse = invert(_jacobian(system, x, work)[:, active], work)
    lost = int(np.abs(inverse).max()).bit_length() - work
    if lost > 0:
        x = [v << 2 * lost for v in x]
        work += 2 * lost
        inverse = invert(_jacobian(system, x, work)[:, active], work)
    x = _iterate(system, x, active, inverse, work)
    jacobian = _jacobian(system, x, work)[:, active]
    inverse = invert(jacobian, work)
    return _certify(system, x, active, inverse, jacobian, work)


def _jacobian(system: System, x: Sequence[int], bits: int) -> Integers:
    columns = system.jacobian([v * system.factor for v in x], system.factor << bits, bits)
    return np.array(columns, dtype=object).T.reshape(len(system.means), len(columns))


def _values(system: System, x: Sequence[int], bits: int) -> Integers:
    return np.array(system.scaled([v * system.factor for v in x], system.factor << bits, bits), dtype=object)


def _iterate(system: System, x: list[int], active: list[int], inverse: Integers, bits: int) -> list[int]:
    last = math.inf
    for _ in range(MOST_STEPS):
        move = [int(d) >> bits for d in inverse @ _values(system, x, bits)]
        size = max(abs(d) for d in move)
        if size > LARGEST_STEP * 2**bits or (last < math.inf and size > last and size > 2 ** (bits // 3)):
            raise NotProven("Newton's iteration from the printed decimals does not settle")
        for j, d in zip(active, move, strict=True):
            x[j] -= d
        if size <= 4 or size >= last:
            return x
        if last < math.inf and size > QUICK * last:
            inverse = invert(_jacobian(system, x, bits)[:, active], bits)
        last = size
    raise NotProven("Newton's iteration from the printed decimals does not settle")


def _certify(system: System, x: list[int], active: list[int], inverse: Integers, jacobian: Integers, bits: int) -> Zero:
    one = 1 << bits
    size = np.abs(inverse)
    rows = [int(s) for s in size.sum(axis=1)]
    moves = inverse @ _values(system, x, bits)
    step = max((abs(int(m)) + s >> bits) + 1 for m, s in zip(moves, rows, strict=True))
    defect = np.abs(inverse @ jacobian - (one * one) * np.eye(len(active), dtype=int).astype(object)).sum(axis=1)
    flat = max((int(d) + len(active) * s >> bits) + 1 for d, s in zip(defect, rows, strict=True))
    radius = 2 * step
    curvature = system.curvature([v * system.factor for v in x], system.factor << bits, _above(radius, bits))
    if not np.isfinite(curvature).all():
        raise NotProven("the second derivatives are beyond bounds")
    heights = np.array([-(-Fraction(float(h)) // Fraction(1, one)) for h in curvature], dtype=object)
    bend = max(int(b) for b in size @ heights)  # units of 4^(−bits)
    contraction = flat + (bend * radius >> 2 * bits) + 1
    if contraction >= one or step * one + contraction * radius > radius * one:
        raise NotProven(f"the map is no contraction near the printed decimals (Z = {contraction / one:.1e})")
    return Zero(x, bits, active, Fraction(radius, one), Fraction(step, one), Fraction(contraction, one))


def _above(value: int, bits: int) -> float:
    return math.ldexp(value >> max(value.bit_length() - 60, 0), max(value.bit_length() - 60, 0) - bits) * (1 + 1e-9)


def choose_unknowns(jacobian: Integers, at: Sequence[Fraction], bits: int) -> list[int]:
    """As many columns as there are rows, so chosen that fixing the others disturbs these least.

    The rows may be badly conditioned, but which columns to keep depends only on the space that they span. It is spanned
    as well by the rows of the reduced echelon form, which doubles can hold: column-pivoted QR of an orthonormal basis.
    Columns are scaled by the unknowns, since what matters is the change relative to a printed number.

    Raises
    ------
    NotProven
        The rows are dependent.
    """
    equations, unknowns = jacobian.shape
    if equations == unknowns:
        return list(range(unknowns))
    reduced = _reduce(jacobian, bits)
    sizes = np.array([abs(float(v)) for v in at])
    scaled = np.array(reduced / 2**bits, dtype=float) * np.maximum(sizes, SMALLEST_SCALE * sizes.max())
    basis, _ = np.linalg.qr(scaled.T)
    _, _, order = qr(basis.T, mode="economic", pivoting=True)
    return sorted(int(j) for j in order[:equations])


def _reduce(matrix: Integers, bits: int) -> Integers:
    """Reduced echelon form with the largest entry of each row as its pivot."""
    work = matrix.copy()
    for row in range(len(work)):
        column = _pivot(work[row], matrix[row], bits)
        work[row] = _divide(work[row], work[row, column], bits)
        others = [i for i in range(len(work)) if i != row]
        work[others] = work[others] - _shift(np.multiply.outer(work[others, column], work[row]), bits)
    return work


def invert(matrix: Integers, bits: int) -> Integers:
    """An approximate inverse, by Gauss–Jordan elimination on the rows with the largest entry of each row as pivot.

    Raises
    ------
    NotProven
        The matrix is singular to half the digits of its entries.
    """
    size = len(matrix)
    work = np.hstack([matrix, (1 << bits) * np.eye(size, dtype=int).astype(object)])
    columns = []
    for row in range(size):
        column = _pivot(work[row, :size], matrix[row], bits)
        columns.append(column)
        work[row] = _divide(work[row], work[row, column], bits)
        others = [i for i in range(size) if i != row]
        work[others] = work[others] - _shift(np.multiply.outer(work[others, column], work[row]), bits)
    inverse = np.empty((size, size), dtype=object)
    inverse[columns] = work[:, size:]
    return inverse


def _pivot(row: Integers, original: Integers, bits: int) -> int:
    sizes = [abs(int(v)) for v in row]
    largest = max(sizes)
    if largest << bits // 2 <= max(abs(int(v)) for v in original):
        raise NotProven("the Jacobian is singular: the equations do not determine the rule locally")
    return sizes.index(largest)


def _divide(row: Integers, pivot: int, bits: int) -> Integers:
    quotient: Integers = (row << bits) // pivot
    return quotient


def _shift(matrix: Integers, bits: int) -> Integers:
    shifted: Integers = matrix >> bits
    return shifted
