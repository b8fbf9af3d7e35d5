"""The search for fully symmetric rules: which structures to try, in which order, and when to stop.

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
from fractions import Fraction
from itertools import islice

import numpy as np

from simplexcub.basis import symmetric_basis
from simplexcub.measures import Measure
from simplexcub.search.counts import Counts, node_count, possible_counts
from simplexcub.search.levenberg import solve_batch
from simplexcub.search.refine import Orbits, refine
from simplexcub.search.system import FloatArray, System

CHUNK = 200  # starts per chunk
ROUNDS = (1, 5, 20)  # chunks that every structure still worth trying has had after each round
_MEAN_BITS = 120  # more than a double holds; the means are rounded once, here


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


def system_for(measure: Measure, degree: int, counts: Counts) -> System:
    """The equations of one structure for a symmetric measure."""
    basis = symmetric_basis(measure.N, degree)
    scale = 1 << _MEAN_BITS
    means = np.array([float(Fraction(m, scale)) for m in basis.means_fixed(measure, _MEAN_BITS)])
    return System(basis, means, counts)


def run_chunk(measure: Measure, degree: int, counts: Counts, seed: int, chunk: int) -> FloatArray:
    """All solutions inside the simplex that the starts of one chunk lead to; shape (S, unknowns)."""
    system = system_for(measure, degree, counts)
    label = hashlib.sha256(repr((counts, chunk)).encode()).digest()
    rng = np.random.default_rng([seed, *label])
    return solve_batch(system, system.starts(rng, CHUNK))


def find_orbits(
    measure: Measure,
    degree: int,
    *,
    digits: int,
    seed: int,
    budget: Budget,
    most_nodes: int,
    executor: Executor | None,
    progress: Callable[[Progress], None] | None,
) -> Orbits | None:
    """The fully symmetric rule with the fewest nodes that the search meets, or None.

    An interrupt ends the search and keeps the best rule found so far.
    """
    best: Orbits | None = None
    most = most_nodes
    try:
        for before, after in zip((0, *ROUNDS), ROUNDS, strict=False):
            plan = ((c, k) for c in possible_counts(measure.N, degree, most_nodes=most) for k in range(before, after))
            for counts, solutions in _in_order(plan, measure, degree, seed, executor):
                if node_count(counts) > most or budget.spent:
                    break
                if progress is not None:
                    so_far = f"best so far {most + 1} nodes" if best is not None else "none yet"
                    text = f"round {after}: {node_count(counts)} nodes, {_describe(counts)}; {so_far}"
                    progress(Progress(text, budget.elapsed))
                found = _first_refined(measure, degree, counts, solutions, digits)
                if found is not None:
                    best, most = found, node_count(counts) - 1
            if budget.spent:
                break
    except KeyboardInterrupt:
        if best is None:
            raise
    return best


def _in_order(
    plan: Iterator[tuple[Counts, int]], measure: Measure, degree: int, seed: int, executor: Executor | None
) -> Iterator[tuple[Counts, FloatArray]]:
    """Results of the planned chunks in the order of the plan; a few run ahead where there is an executor."""
    if executor is None:
        for counts, chunk in plan:
            yield counts, run_chunk(measure, degree, counts, seed, chunk)
        return
    waiting: list[tuple[Counts, Future[FloatArray]]] = []
    try:
        while True:
            for counts, chunk in islice(plan, max(0, 4 - len(waiting))):
                waiting.append((counts, executor.submit(run_chunk, measure, degree, counts, seed, chunk)))
            if not waiting:
                return
            counts, future = waiting.pop(0)
            yield counts, future.result()
    finally:
        for _, future in waiting:
            future.cancel()


def _first_refined(measure: Measure, degree: int, counts: Counts, solutions: FloatArray, digits: int) -> Orbits | None:
    """The solution furthest from the boundary that can be refined to all digits."""
    if not len(solutions):
        return None
    system = system_for(measure, degree, counts)
    slack = solutions @ system.slack_matrix.T + system.slack_offset
    for i in np.argsort(-slack.min(axis=1)):
        orbits = refine(system, measure, solutions[i], digits)
        if orbits is not None:
            return orbits
    return None


def _describe(counts: Counts) -> str:
    return " + ".join(f"{count} × ({','.join(map(str, type_))})" for type_, count in counts)
