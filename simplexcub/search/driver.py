"""The search for the rule with the fewest nodes: the order of work, and when to stop.

First some elimination walks come down from rules with many nodes; then random starts try the structures with fewer
nodes than the best rule, from the fewest nodes upward. That repeats with more walks, more structures and more starts,
until enough walks have ended at the same number of nodes, or the rounds or the budget end. Tasks may run anywhere, but
their results are taken in the order of the plan, so that the same seed gives the same rule however many workers there
are.
"""

from __future__ import annotations

import hashlib
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import takewhile

from simplexcub.search.counts import Counts, fewest_nodes, node_count, possible_counts
from simplexcub.search.eliminate import Walk, set_out_from
from simplexcub.search.levenberg import Overdue
from simplexcub.search.refine import Orbits, refine
from simplexcub.search.system import FloatArray, Problem, System
from simplexcub.search.tasks import Chunk, Leg, describe
from simplexcub.search.workers import Workers

WALKS = (4, 12, 48)  # elimination walks begun in each round
CHUNKS = (1, 2, 8)  # chunks of starts that every structure gets in each round
STRUCTURES = (6, 20, 2000)  # structures of one node count that are tried in each round
AGREE = (4, 6, 10**9)  # walks that must have ended at the best count for a round to be the last
FAILURES = 6  # node counts in a row without a rule of fixed weights that end the way down
ABREAST = 4  # walks that go on side by side


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

    problem: Problem
    counts: Counts
    candidate: FloatArray
    orbits: Orbits

    @property
    def nodes(self) -> int:
        return node_count(self.counts)


class Search:
    """One search; `best` holds the rule with the fewest nodes met so far.

    Parameters
    ----------
    problem : Problem
    digits, seed : int
    budget : Budget
    workers : Workers
        Runs the tasks.
    most_nodes : int
        Rules with more nodes are of no interest.
    progress : callable, optional
    known : sequence of (nodes, weights)
        Rules to set out from, arrays of shape (M, N) and (M,), for a problem without symmetry.
    """

    def __init__(
        self,
        problem: Problem,
        *,
        digits: int,
        seed: int,
        budget: Budget,
        workers: Workers,
        most_nodes: int,
        progress: Callable[[Progress], None] | None = None,
        known: Sequence[tuple[FloatArray, FloatArray]] = (),
    ) -> None:
        self.problem = problem
        self.digits = digits
        self.seed = seed
        self.budget = budget
        self.workers = workers
        self.most_nodes = most_nodes
        self.progress = progress
        self.known = known
        self.best: Found | None = None
        self._agreed = 0
        self._ended = 0

    def run(self) -> None:
        """Search until the rounds or the budget end."""
        walks, chunks = 0, 0
        if self.problem.integers:
            self._bracket()
        for nodes, weights in self.known:
            self._walk([0], set_out_from(self.problem, nodes, weights))
        for more_walks, more_chunks, structures, agree in zip(WALKS, CHUNKS, STRUCTURES, AGREE, strict=True):
            for first in range(walks, walks + (0 if self.problem.integers else more_walks), ABREAST):
                self._walk(range(first, first + ABREAST))
            self._start(range(chunks, chunks + more_chunks), structures)
            walks, chunks = walks + more_walks, chunks + more_chunks
            least = fewest_nodes(self.problem.group, self.problem.degree)
            if self.budget.spent or self._agreed >= agree or self._most() < least:
                return

    def _most(self) -> int:
        """Nodes of the largest rule that would still be an improvement."""
        return self.most_nodes if self.best is None else self.best.nodes - 1

    def _walk(self, numbers: Sequence[int], begin: Walk | None = None) -> None:
        """Run walks side by side, a leg of each in turn."""
        walks: dict[int, Walk | None] = dict.fromkeys(numbers, begin)
        origin = "" if begin is None else hashlib.sha256(begin.pool.tobytes()).hexdigest()
        try:
            self._legs(walks, origin)
        finally:
            # Where the time is up before a walk has ended, its last level is better than nothing.
            for walk in walks.values():
                if walk is None or walk is begin or not walk.counts or self.best is not None:
                    continue
                if node_count(walk.counts) <= self._most():
                    self._take(walk.counts, walk.pool)

    def _legs(self, walks: dict[int, Walk | None], origin: str) -> None:
        """Legs of all walks in turn until each has ended, and is taken out, or the budget ends."""
        leg = 0
        while walks and not self.budget.spent:
            legs = [Leg(self.problem, self.seed, number, leg, walk, origin) for number, walk in walks.items()]
            results = self.workers.run_all(legs)
            for number in list(walks):
                try:
                    walk = next(results)
                except Overdue as late:
                    if isinstance(late.partial, Walk):
                        walks[number] = late.partial
                    raise
                self._report(f"walk {number + 1} at {describe(walk.counts)}" if walk.counts else "no start for a walk")
                if walk.ended:
                    del walks[number]
                else:
                    walks[number] = walk
                if walk.counts and (walk.ended or walk.at_once == 1) and node_count(walk.counts) <= self._most():
                    self._take(walk.counts, walk.pool)
                self._agreed += walk.ended and self.best is not None and node_count(walk.counts) == self.best.nodes
            leg += 1

    def _bracket(self) -> None:
        """Instead of walks, where weights are fixed: up in growing steps to a first rule, then down by single nodes."""
        least = nodes = fewest_nodes(self.problem.group, self.problem.degree)
        while self.best is None and nodes <= self._most() and not self.budget.spent:
            nodes += max(1, nodes // 8) if self._try(nodes) else 1
        failures = 0
        while self.best is not None and failures < FAILURES and not self.budget.spent:
            before = self.best
            nodes = min(nodes, before.nodes) - 1
            if nodes < least:
                return
            failures += self._try(nodes) and self.best is before

    def _try(self, nodes: int) -> bool:
        """One chunk of starts for a few structures of a node count; whether there are any."""
        structures = self._structures(nodes)[: STRUCTURES[0]]
        tasks = (Chunk(self.problem, counts, self.seed, 0) for counts in structures)
        for task, solutions in self.workers.in_order(takewhile(lambda _: not self.budget.spent, tasks)):
            self._report(f"starts for {describe(task.counts)}")
            if self._take(task.counts, solutions):
                break
        return bool(structures)

    def _start(self, numbers: Sequence[int], most_structures: int) -> None:
        """Random starts for the structures below the best, from the fewest nodes upward until one is solved."""
        for nodes in range(fewest_nodes(self.problem.group, self.problem.degree), self._most() + 1):
            if self.budget.spent:
                return
            structures = self._structures(nodes)[:most_structures]
            tasks = (Chunk(self.problem, counts, self.seed, number) for counts in structures for number in numbers)
            for task, solutions in self.workers.in_order(takewhile(lambda _: not self.budget.spent, tasks)):
                self._report(f"starts for {describe(task.counts)}")
                if self._take(task.counts, solutions) or self.budget.spent:
                    return

    def _structures(self, nodes: int) -> list[Counts]:
        problem, fixed = self.problem, self.problem.integers > 0
        return possible_counts(
            problem.group, problem.degree, nodes, problem.chosen, fixed_weights=fixed, also=problem.also
        )

    def _take(self, counts: Counts, solutions: FloatArray) -> bool:
        """Keep the first of the solutions that can be refined to all digits."""
        system = System(self.problem, counts)
        for u in solutions:
            orbits = refine(system, u, self.digits)
            if orbits is not None:
                self.best = Found(self.problem, counts, u, orbits)
                self._agreed = 0
                return True
        return False

    def _report(self, text: str) -> None:
        self._ended += 1
        if self.progress is not None:
            best = f"best so far {self.best.nodes} nodes" if self.best is not None else "no rule yet"
            rate = self._ended / max(self.budget.elapsed, 1e-9)
            self.progress(Progress(f"{best}; {text}; {rate:.1f} tasks/s", self.budget.elapsed))
