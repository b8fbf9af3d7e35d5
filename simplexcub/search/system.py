"""The equations of a rule with given orbits, for many candidates at once.

Unknowns of one candidate, in order: the weight of every orbit, then the free coordinates of every orbit. One equation
per basis function: Σ_orbits weight · φ_i(representative) = E[φ_i].
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from simplexcub.basis import SymmetricBasis
from simplexcub.search.counts import Counts
from simplexcub.symmetry import orbit_size

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Block:
    """The orbits of one type: where their weights and coordinates stand among the unknowns."""

    type: tuple[int, ...]
    count: int
    weights: slice
    coordinates: slice

    @property
    def free(self) -> int:
        return len(self.type) - 1


class System:
    """Residuals, Jacobians and the inside-constraints of all candidates with the same orbit counts.

    Parameters
    ----------
    basis : SymmetricBasis
    means : ndarray, shape (E,)
        E[φ_i].
    counts : Counts
    """

    def __init__(self, basis: SymmetricBasis, means: FloatArray, counts: Counts) -> None:
        self.basis = basis
        self.means = means
        self.blocks: list[Block] = []
        orbits = sum(c for _, c in counts)
        w, x = 0, orbits
        for type_, count in counts:
            step = count * (len(type_) - 1)
            self.blocks.append(Block(type_, count, slice(w, w + count), slice(x, x + step)))
            w, x = w + count, x + step
        self.orbits = orbits
        self.size = x
        self.slack_matrix, self.slack_offset = self._slacks()

    def _slacks(self) -> tuple[FloatArray, FloatArray]:
        """(G, g): every weight and every coordinate of a candidate u, as G u + g; all must stay ≥ 0."""
        rows, offsets = [np.eye(self.size)], [np.zeros(self.size)]
        for block in self.blocks:
            m = np.array(block.type, dtype=float)
            for i in range(block.count):
                row = np.zeros(self.size)
                start = block.coordinates.start + i * block.free
                row[start : start + block.free] = -m[:-1] / m[-1]
                rows.append(row[None])
                offsets.append(np.array([1.0 / m[-1]]))
        return np.concatenate(rows), np.concatenate(offsets)

    def values(self, u: FloatArray, block: Block) -> FloatArray:
        """Distinct coordinates of the block's orbits; shape (B, count, k)."""
        free = u[:, block.coordinates].reshape(len(u), block.count, block.free)
        m = np.array(block.type, dtype=float)
        last = (1.0 - free @ m[:-1]) / m[-1]
        return np.concatenate([free, last[:, :, None]], axis=2)

    def evaluate(self, u: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Residuals, shape (B, E), and Jacobians, shape (B, E, size), at candidates `u`, shape (B, size)."""
        batch, count = len(u), len(self.basis)
        residual = np.broadcast_to(-self.means, (batch, count)).copy()
        jacobian = np.empty((batch, self.size, count))
        for block in self.blocks:
            k = len(block.type)
            jet = self.basis.jet(self.values(u, block).reshape(-1, k), block.type)
            jet = jet.reshape(batch, block.count, k, count)
            weights = u[:, block.weights]
            jacobian[:, block.weights] = jet[:, :, 0]
            jacobian[:, block.coordinates] = (weights[:, :, None, None] * jet[:, :, 1:]).reshape(batch, -1, count)
            residual += np.einsum("br,bre->be", weights, jet[:, :, 0])
        return residual, jacobian.transpose(0, 2, 1)

    def starts(self, rng: np.random.Generator, batch: int) -> FloatArray:
        """Random candidates inside the simplex, weights in proportion to orbit size but for noise."""
        u = np.empty((batch, self.size))
        for block in self.blocks:
            points = rng.dirichlet(np.ones(sum(block.type)), (batch, block.count))
            edges = np.cumsum((0, *block.type))
            means = [points[:, :, a:b].mean(axis=2) for a, b in pairwise(edges[:-1])]
            u[:, block.coordinates] = np.stack(means, axis=2).reshape(batch, -1) if means else 0.0
            u[:, block.weights] = orbit_size(block.type) * rng.uniform(0.5, 1.5, (batch, block.count))
        u[:, : self.orbits] /= u[:, : self.orbits].sum(axis=1, keepdims=True)
        return u
