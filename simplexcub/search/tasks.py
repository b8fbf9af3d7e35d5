"""The pieces of work a search is made of: chunks of random starts, and legs of elimination walks.

A task is fixed by the problem, the seed and its number, and gives the same result wherever and whenever it runs.
"""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

import numpy as np

from simplexcub.search.counts import Counts, node_count
from simplexcub.search.eliminate import Walk, advance, set_out
from simplexcub.search.levenberg import Overdue, solve_batch
from simplexcub.search.system import FloatArray, Problem, System
from simplexcub.symmetry import Spectra

_CHUNK_STARTS, _CHUNK_NUMBERS = 200, 4_000_000  # starts per chunk, fewer where their Jacobians hold more numbers
_SPECTRUM_STARTS = 40  # of spectra, which solve sooner or not at all
_LEG_NUMBERS = 40_000  # entries of all square matrices that one leg works through
_MOST_KEPT = 20  # solutions of a chunk that are passed on


@dataclass(frozen=True)
class Chunk:
    """Random starts for one structure."""

    problem: Problem
    counts: Counts
    seed: int
    number: int

    @property
    def key(self) -> str:
        """Name of this piece of work, the same in every process."""
        return _digest(self.problem, "chunk", self.seed, self.number, [(t.pattern, c) for t, c in self.counts])

    def run(self) -> FloatArray:
        """Solutions inside the simplex, the ones furthest from the boundary first; shape (S, unknowns)."""
        system = System(self.problem, self.counts)
        most = _SPECTRUM_STARTS if isinstance(self.problem.group, Spectra) else _CHUNK_STARTS
        starts = int(np.clip(_CHUNK_NUMBERS // (system.size * len(system.basis)), 4, most))
        solved = solve_batch(system, system.starts(_generator(self.key), starts))
        return solved[np.argsort(-system.slack(solved).min(axis=1, initial=np.inf))][:_MOST_KEPT]


@dataclass(frozen=True)
class Leg:
    """A stretch of an elimination walk; `walk` is None where it starts from candidates of its own.

    `origin` tells walks apart that start from different known rules.
    """

    problem: Problem
    seed: int
    walk_number: int
    leg_number: int
    walk: Walk | None
    origin: str = ""

    @property
    def key(self) -> str:
        """Name of this piece of work, the same in every process."""
        return _digest(self.problem, "leg", self.seed, self.walk_number, self.leg_number, self.origin)

    def run(self) -> Walk:
        """The walk after a few steps, more of them where they are quick."""
        rng = _generator(self.key)
        walk = set_out(self.problem, rng) if self.walk is None else self.walk
        for _ in range(max(1, _LEG_NUMBERS // len(self.problem.basis) ** 2)):
            if walk.ended:
                break
            try:
                walk = advance(self.problem, walk, rng)
            except Overdue:
                raise Overdue(walk) from None
        return walk


def run_task(task: Chunk | Leg) -> FloatArray | Walk:
    """Run a task in whichever process this is."""
    return task.run()


def describe(counts: Counts) -> str:
    """Short text of a structure, e.g. ``12 nodes: 2 × (2,1) + 1 × (1,1,1)``."""
    parts = " + ".join(f"{count} × ({','.join(map(str, t.multiplicities))})" for t, count in counts)
    return f"{node_count(counts)} nodes: {parts}"


def _digest(problem: Problem, *rest: object) -> str:
    chosen = [t.coordinates for t in problem.chosen]
    asked = (
        problem.degree,
        problem.group.name,
        *([chosen] if chosen else []),
        *([problem.integers] if problem.integers else []),
    )
    asked += tuple(f"{extra.label.name} {'' if extra.user is None else extra.user.mean}" for extra in problem.also)
    label = repr((sorted(problem.measure.parameters().items()), *asked, rest))
    return hashlib.sha256(label.encode()).hexdigest()


def _generator(key: str) -> np.random.Generator:
    return np.random.default_rng(np.frombuffer(bytes.fromhex(key), dtype=np.uint32))
