"""The equations of a rule with given orbits, for many candidates at once.

Unknowns of one candidate, in order: the weight of every orbit, then the free coordinates of every orbit. One equation
per basis function: Σ_orbits weight · φ_i(representative) = E[φ_i].
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from simplexcub.invariants import Basis
from simplexcub.measures import Measure
from simplexcub.search.chosen import Chosen
from simplexcub.search.counts import Counts, random_values
from simplexcub.search.extended import extended_basis, extended_means
from simplexcub.search.extra import Extra
from simplexcub.symmetry import Group, OrbitType, Spectra

FloatArray = NDArray[np.float64]
Parts = dict[OrbitType, list[tuple[float, FloatArray]]]  # orbits of one candidate: weight, distinct coordinates


@dataclass(frozen=True)
class Problem:
    """What is searched for.

    Attributes
    ----------
    measure, degree, group
        The measure, the degree and the symmetry of the node set.
    chosen : tuple of Chosen
        Orbits that the rule must have.
    integers : int
        Weights are integers up to this one over their sum, fixed before the search; 1 makes them equal, 0 free.
    also : tuple of Extra
        Functions to average exactly besides the polynomials.
    """

    measure: Measure
    degree: int
    group: Group
    chosen: tuple[Chosen, ...] = ()
    integers: int = 0
    also: tuple[Extra, ...] = ()

    @property
    def types(self) -> list[OrbitType]:
        """Orbit types of the group, without single points that are chosen, and the chosen orbits."""
        points = {t.stratum for t in self.chosen if t.stratum.unknowns == 1}
        return [*(t for t in self.group.types if t not in points), *self.chosen]

    @property
    def basis(self) -> Basis:
        return extended_basis(self.group, self.degree, self.also, self.measure)


@dataclass(frozen=True)
class Block:
    """The orbits of one type: where their weights and coordinates stand among the unknowns."""

    type: OrbitType
    count: int
    weights: slice
    coordinates: slice

    @property
    def free(self) -> int:
        return self.type.unknowns - 1


class System:
    """Residuals, Jacobians and the inside-constraints of all candidates with the same orbit counts."""

    def __init__(self, problem: Problem, counts: Counts) -> None:
        self.problem = problem
        self.counts = counts
        self.basis = problem.basis
        self.means = extended_means(problem.group, problem.degree, problem.also, problem.measure)
        self.blocks: list[Block] = []
        orbits = sum(c for _, c in counts)
        w, x = 0, orbits
        for type_, count in counts:
            step = count * (type_.unknowns - 1)
            self.blocks.append(Block(type_, count, slice(w, w + count), slice(x, x + step)))
            w, x = w + count, x + step
        self.orbits = orbits
        self.size = x
        self.slack_matrix, self.slack_offset = self._slacks()

    def _slacks(self) -> tuple[FloatArray, FloatArray]:
        """(G, g): every weight and every coordinate of a candidate u, as G u + g; all must stay ≥ 0."""
        rows, offsets = [np.eye(self.size)], [np.zeros(self.size)]
        for block in self.blocks:
            m = np.array(block.type.multiplicities, dtype=float)
            for i in range(0 if isinstance(block.type, Chosen) else block.count):
                row = np.zeros(self.size)
                start = block.coordinates.start + i * block.free
                row[start : start + block.free] = -m[:-1] / m[-1]
                rows.append(row[None])
                offsets.append(np.array([1.0 / m[-1]]))
        return np.concatenate(rows), np.concatenate(offsets)

    def values(self, u: FloatArray, block: Block) -> FloatArray:
        """Distinct coordinates of the block's orbits; shape (B, count, k)."""
        if isinstance(block.type, Chosen):
            given = np.array([float(x) for x in block.type.coordinates])
            return np.broadcast_to(given, (len(u), block.count, len(given)))
        free = u[:, block.coordinates].reshape(len(u), block.count, block.free)
        m = np.array(block.type.multiplicities, dtype=float)
        last = (1.0 - free @ m[:-1]) / m[-1]
        return np.concatenate([free, last[:, :, None]], axis=2)

    def evaluate(self, u: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Residuals, shape (B, E), and Jacobians, shape (B, E, size), at candidates `u`, shape (B, size)."""
        batch, count = len(u), len(self.basis)
        residual = np.broadcast_to(-self.means, (batch, count)).copy()
        jacobian = np.empty((batch, self.size, count))
        for block in self.blocks:
            k = len(block.type.multiplicities)
            jet = self.basis.jet(self.values(u, block).reshape(-1, k), block.type)
            jet = jet.reshape(batch, block.count, k, count)
            weights = u[:, block.weights]
            jacobian[:, block.weights] = jet[:, :, 0]
            slopes = weights[:, :, None, None] * jet[:, :, 1 : 1 + block.free]
            jacobian[:, block.coordinates] = slopes.reshape(batch, block.count * block.free, count)
            residual += np.einsum("br,bre->be", weights, jet[:, :, 0])
        if self.problem.integers:
            jacobian[:, : self.orbits] = 0.0
        return residual, jacobian.transpose(0, 2, 1)

    def starts(self, rng: np.random.Generator, batch: int) -> FloatArray:
        """Random candidates inside the simplex, weights in proportion to orbit size but for noise."""
        u = np.empty((batch, self.size))
        for block in self.blocks:
            if isinstance(block.type, Chosen):
                u[:, block.weights] = block.type.size * rng.uniform(0.1, 1.5, (batch, block.count))
                continue
            points = self.points(rng, batch * block.count).reshape(batch, block.count, -1)
            u[:, block.coordinates] = random_values(block.type, points)[..., :-1].reshape(batch, -1)
            u[:, block.weights] = block.type.size * rng.uniform(0.5, 1.5, (batch, block.count))
            if self.problem.integers:
                shares = rng.integers(1, self.problem.integers + 1, (batch, block.count))
                u[:, block.weights] = block.type.size * shares
        u[:, : self.orbits] /= u[:, : self.orbits].sum(axis=1, keepdims=True)
        return u

    def points(self, rng: np.random.Generator, count: int) -> FloatArray:
        """Where starts come from: anywhere on the simplex; for spectra, samples of the measure, smallest first."""
        if isinstance(self.problem.group, Spectra):
            return np.sort(self.problem.measure.sample(rng, count), axis=1)
        return rng.dirichlet(np.ones(self.problem.group.n), count)

    def integer_weights(self, u: FloatArray) -> list[int]:
        """Of one candidate with fixed weights, the integers that the weights of its nodes are in proportion to."""
        sizes = np.concatenate([np.full(block.count, block.type.size) for block in self.blocks])
        shares = u[: self.orbits] / sizes
        ratios = [Fraction(x).limit_denominator(self.problem.integers) for x in (shares / shares.min()).tolist()]
        scale = math.lcm(*(r.denominator for r in ratios))
        return [int(r * scale) for r in ratios]

    def slack(self, u: FloatArray) -> FloatArray:
        """Distances of weights and coordinates from zero; shape (B, constraints)."""
        return u @ self.slack_matrix.T + self.slack_offset

    def scale(self, u: FloatArray) -> FloatArray:
        """How far each unknown may move before its orbit meets the boundary, relative to others; shape (B, size)."""
        out = np.empty_like(u)
        out[:, : self.orbits] = u[:, : self.orbits] * self.orbits
        # Spectra of many components hardly fluctuate, so no coordinate moves by more than a share of itself.
        stretch = 1.0 if isinstance(self.problem.group, Spectra) else float(self.problem.group.n)
        for block in self.blocks:
            if not block.free:
                continue
            values = self.values(u, block)
            room = np.minimum(values[..., :-1], values[..., -1:])
            out[:, block.coordinates] = room.reshape(len(u), -1) * stretch
        return out

    def split(self, u: FloatArray) -> Parts:
        """One candidate as {orbit type: [(weight, distinct coordinates), …]}."""
        parts: Parts = {}
        for block in self.blocks:
            parts[block.type] = list(zip(u[block.weights], self.values(u[None], block)[0], strict=True))
        return parts

    def join(self, parts: Parts) -> tuple[Counts, FloatArray]:
        """The structure and the unknowns of a candidate given by its orbits; weights are scaled to sum to 1."""
        kept = [(t, _united(t, parts[t])) for t in self.problem.types if parts.get(t)]
        counts = tuple((t, len(orbits)) for t, orbits in kept)
        if not kept:
            return (), np.empty(0)
        weights = np.array([w for _, orbits in kept for w, _ in orbits])
        coordinates = [values[: t.unknowns - 1] for t, orbits in kept for _, values in orbits]
        return counts, np.concatenate([weights / weights.sum(), *coordinates])


def _united(type_: OrbitType, orbits: list[tuple[float, FloatArray]]) -> list[tuple[float, FloatArray]]:
    """The orbits themselves, but one in all of a type that is a single point."""
    return [(sum(w for w, _ in orbits), orbits[0][1])] if type_.unknowns == 1 else orbits
