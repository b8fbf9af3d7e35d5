"""The search for rules of a given symmetry: which structures to try, in which order, and when to stop.

Starts come in chunks. A chunk is fixed by the seed, the structure and its number, and its result is taken in the
order of the plan, so the same seed gives the same rule however many processes work. Every structure first gets one
chunk, cheapest first, until a rule is found; then the cheaper ones get more.
"""

from __future__ import annotations

import hashlib
import time
from collections.abc import Callable, Iterator
from concurrent.futures import Executor, Future
from dataclasses import dataclass
from itertools import islice

import numpy as np

from simplexcub.search.counts import Counts, node_count, possible_counts
from simplexcub.search.levenberg import solve_batch
from simplexcub.search.refine import Orbits, refine
from simplexcub.search.system import FloatArray, Problem, System

ROUNDS = (1, 5, 20)  # chunks that every structure still worth trying has had after each round
_CHUNK_STARTS, _CHUNK_NUMBERS = 200, 8_000_000  # starts per chunk, fewer where their Jacobians hold more numbers


@dataclass(frozen=True)
class Progress:
    """One report of a running search: a line for a person, and seconds since the start."""

    text: str
    elapsed: float


class Budget:
    """Wall-clock allowance of a search."""

    def __init__(self, seconds: float) -> None:
        self.start = time.monotonic()
        self.seconds = seconds

    @property
    def elapsed(self) -> float:
        return time.monotonic() - self.start

    @property
    def spent(self) -> bool:
        return self.elapsed > self.seconds


@dataclass(frozen=True)
class Found:
    """A solved structure: the candidate in double precision and its orbits in extended precision."""

    counts: Counts
    candidate: FloatArray
    orbits: Orbits

    @property
    def nodes(self) -> int:
        return node_count(self.counts)


def chunk_starts(system: System) -> int:
    """How many starts make one chunk."""
    return int(np.clip(_CHUNK_NUMBERS // (system.size * len(system.basis)), 4, _CHUNK_STARTS))


def run_chunk(problem: Problem, counts: Counts, seed: int, chunk: int) -> FloatArray:
    """All solutions inside the simplex that the starts of one chunk lead to; shape (S, unknowns)."""
    system = System(problem, counts)
    label = hashlib.sha256(repr(([(t.pattern, c) for t, c in counts], chunk)).encode()).digest()
    rng = np.random.default_rng([seed, *label])
    return solve_batch(system, system.starts(rng, chunk_starts(system)))


def find_orbits(
    problem: Problem,
    *,
    digits: int,
    seed: int,
    budget: Budget,
    most_nodes: int,
    executor: Executor | None,
    progress: Callable[[Progress], None] | None,
) -> Found | None:
    """The rule with the fewest nodes that the search meets, or None.

    An interrupt ends the search and keeps the best rule found so far.
    """
    best: Found | None = None
    most = most_nodes
    try:
        for before, after in zip((0, *ROUNDS), ROUNDS, strict=False):
            structures = possible_counts(problem.group, problem.degree, most_nodes=most)
            plan = ((c, k) for c in structures for k in range(before, after))
            for counts, solutions in _in_order(plan, problem, seed, executor):
                if node_count(counts) > most or budget.spent:
                    break
                if progress is not None:
                    so_far = f"best so far {most + 1} nodes" if best is not None else "none yet"
                    text = f"round {after}: {node_count(counts)} nodes, {_describe(counts)}; {so_far}"
                    progress(Progress(text, budget.elapsed))
                found = best_refined(System(problem, counts), solutions, digits)
                if found is not None:
                    best, most = found, found.nodes - 1
            if budget.spent:
                break
    except KeyboardInterrupt:
        if best is None:
            raise
    return best


def _in_order(
    plan: Iterator[tuple[Counts, int]], problem: Problem, seed: int, executor: Executor | None
) -> Iterator[tuple[Counts, FloatArray]]:
    """Results of the planned chunks in the order of the plan; a few run ahead where there is an executor."""
    if executor is None:
        for counts, chunk in plan:
            yield counts, run_chunk(problem, counts, seed, chunk)
        return
    waiting: list[tuple[Counts, Future[FloatArray]]] = []
    try:
        while True:
            for counts, chunk in islice(plan, max(0, 4 - len(waiting))):
                waiting.append((counts, executor.submit(run_chunk, problem, counts, seed, chunk)))
            if not waiting:
                return
            counts, future = waiting.pop(0)
            yield counts, future.result()
    finally:
        for _, future in waiting:
            future.cancel()


def best_refined(system: System, solutions: FloatArray, digits: int) -> Found | None:
    """The solution furthest from the boundary that can be refined to all digits."""
    for i in np.argsort(-system.slack(solutions).min(axis=1, initial=np.inf)):
        orbits = refine(system, solutions[i], digits)
        if orbits is not None:
            return Found(system.counts, solutions[i], orbits)
    return None


def _describe(counts: Counts) -> str:
    return " + ".join(f"{count} × ({','.join(map(str, t.multiplicities))})" for t, count in counts)
