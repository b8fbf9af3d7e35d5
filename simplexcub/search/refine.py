"""From double precision to any number of digits.

Residuals are computed in long integers, corrections go through the double-precision pseudo-inverse of the Jacobian,
frozen. Each pass gains some ten digits, and no linear algebra in extended precision is needed.
"""

from __future__ import annotations

import math

import numpy as np
from mpmath import mp, mpf
from numpy.typing import NDArray

from simplexcub.search.chosen import Chosen
from simplexcub.search.system import Block, System
from simplexcub.symmetry import OrbitType

IntArray = NDArray[np.object_]  # Python integers of any length
Orbits = list[tuple[OrbitType, list[mpf], mpf]]

_MOST_PASSES = 60
_SINGULAR = 1e-11  # singular values below this share of the largest carry no correction


def refine(system: System, u: NDArray[np.float64], digits: int) -> Orbits | None:
    """Polish one candidate to `digits` digits; None if it does not converge or ends outside the simplex.

    Returns
    -------
    list of (orbit type, distinct coordinates, orbit weight), mpmath numbers of a few digits more than asked.
    """
    bits = math.ceil((digits + 30) * math.log2(10))  # the recurrences lose some at high degree
    inverse = np.linalg.pinv(system.evaluate(u[None])[1][0], rcond=_SINGULAR)
    means = system.basis.means_fixed(system.problem.measure, bits)
    exact = np.array([int(math.ldexp(x, 60)) << (bits - 60) for x in u], dtype=object)
    if system.problem.integers:
        inverse[: system.orbits] = 0.0  # fixed, but for what the pseudo-inverse makes of their zero columns
        integers = system.integer_weights(u)
        sizes = [block.type.size for block in system.blocks for _ in range(block.count)]
        total = sum(k * size for k, size in zip(integers, sizes, strict=True))
        exact[: system.orbits] = [(k * size << bits) // total for k, size in zip(integers, sizes, strict=True)]
    goal = 1 << (bits - math.ceil((digits + 6) * math.log2(10)))
    last = None
    for _ in range(_MOST_PASSES):
        residual = -means
        for block in system.blocks:
            values = _values_fixed(exact, block, bits)
            residual = residual + system.basis.sums_fixed(values, exact[block.weights], block.type, bits)
        size = max(abs(r) for r in residual)
        if size < goal:
            return _orbits(system, exact, bits)
        if last is not None and size > last // 2:
            return None
        last = size
        shift = max(size.bit_length() - 60, 0)
        step = inverse @ np.array([float(int(r) >> shift) for r in residual])
        exact = exact - np.array([int(s) << shift for s in step], dtype=object)
    return None


def _values_fixed(exact: IntArray, block: Block, bits: int) -> IntArray:
    """Distinct coordinates of the block's orbits, the last from the sum; shape (count, k)."""
    if isinstance(block.type, Chosen):
        row = [(x.numerator << bits) // x.denominator for x in block.type.coordinates]
        return np.array([row] * block.count, dtype=object)
    free = exact[block.coordinates].reshape(block.count, block.free)
    last = np.full(block.count, 1 << bits, dtype=object)
    for j, m in enumerate(block.type.multiplicities[:-1]):
        last = last - m * free[:, j]
    return np.column_stack([free, last // block.type.multiplicities[-1]])


def _orbits(system: System, exact: IntArray, bits: int) -> Orbits | None:
    """The candidate as orbits, or None where a weight or a coordinate is not positive."""
    found: Orbits = []
    with mp.workprec(bits + 10):
        for block in system.blocks:
            values = _values_fixed(exact, block, bits)
            for row, weight in zip(values, exact[block.weights], strict=True):
                if weight <= 0 or min(row) < 0:
                    return None
                found.append((block.type, [mpf(v) / (1 << bits) for v in row], mpf(weight) / (1 << bits)))
    return found
