"""Few representatives of spectra with many eigenvalues: which multiplicities they have, and in what order to try them.

A representative takes k different values, N eigenvalues falling into k blocks of equal ones, so M representatives bring
M k unknowns whatever N is. S_N has far too many patterns of multiplicities to list, and only few of them serve: a node
must come close to a typical spectrum, whose power sums hardly fluctuate when N is large. A k-point Gauss rule for the
mean density of eigenvalues has those power sums, so its weights times N, rounded to integers of at least 1, are the
multiplicities that are tried first, from the least k with M k ≥ equations upward. After them come patterns of their own
for each representative, from the same weights disturbed at random, and now and then all N eigenvalues apart. Starts are
block means of sampled spectra.

M rises from the lower bound until a structure is solved; each later round returns to the smaller M with more structures.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from fractions import Fraction
from functools import lru_cache

import numpy as np

from simplexcub.measures import Measure
from simplexcub.search.counts import Counts, fewest_nodes
from simplexcub.search.driver import Search
from simplexcub.search.gauss import gauss_nodes, recurrence
from simplexcub.search.tasks import Chunk
from simplexcub.symmetry import OrbitType

TRIES = (12, 36, 120)  # structures of each number of representatives, round by round
EXTRA = 6  # values that a representative may have beyond the least number that can do
_DISTURBED = 0.4  # spread of the logarithms of disturbed weights
_DIGITS = 20


class PatternSearch(Search):
    """A search for the fewest representatives, from the lower bound upward."""

    def run(self) -> None:
        """Search until a rule is as small as the rounds can make it or the budget ends."""
        least = fewest_nodes(self.problem.group, self.problem.degree)
        done = 0
        for tries in TRIES:
            nodes = least
            while nodes <= self._most() and not self.budget.spent:
                if self._try(nodes, done, tries):
                    break
                nodes += 1
            done = tries
            if self.best is not None and self.best.nodes == least:
                return

    def _try(self, nodes: int, first: int, last: int) -> bool:
        """Try the structures with these numbers; whether one was solved."""
        tasks = (
            Chunk(self.problem, counts, self.seed, number)
            for number, counts in enumerate(structures(self.problem.measure, len(self.problem.basis), nodes, last))
            if number >= first and not self.budget.spent
        )
        for task, solutions in self.workers.in_order(tasks):
            self._report(f"starts for {nodes} representatives")
            if self._take(task.counts, solutions):
                return True
            if self.budget.spent:
                return False
        return False


def structures(measure: Measure, equations: int, nodes: int, number: int) -> Iterator[Counts]:
    """The first `number` structures of so many representatives; the same ones every time."""
    n = measure.N
    rng = np.random.default_rng((n, equations, nodes))
    least = min(n, max(-(-equations // nodes), 1))
    choices = [*range(least, min(n, least + EXTRA + 1)), n]
    for i in range(number):
        shares = density_shares(measure, choices[i % len(choices)])
        drawn = [_multiplicities(n, shares)] * nodes
        if i >= len(choices):
            noise = np.exp(_DISTURBED * rng.standard_normal((nodes, len(shares))))
            drawn = [_multiplicities(n, shares * factors) for factors in noise]
        counts = Counter(drawn)
        yield tuple((OrbitType(_pattern(sizes), 1), c) for sizes, c in sorted(counts.items()))


@lru_cache(maxsize=256)
def density_shares(measure: Measure, values: int) -> np.ndarray:
    """Weights of the Gauss rule with so many points for the mean density of eigenvalues, small eigenvalues first."""
    n = measure.N
    if values == n:
        return np.full(n, 1.0 / n)
    a, b = recurrence(lambda j: measure.power_sum_moment((j,)) * n ** (j - 1) if j else Fraction(1), values)
    return np.array([float(w) for w in gauss_nodes(a, b, _DIGITS)[1]])


def _multiplicities(n: int, shares: np.ndarray) -> tuple[int, ...]:
    """Integers of at least 1 in about these proportions, with sum n."""
    wanted = shares / shares.sum() * n
    sizes = np.maximum(np.rint(wanted), 1).astype(int)
    while sizes.sum() > n:
        sizes[np.argmax(np.where(sizes > 1, sizes - wanted, -np.inf))] -= 1
    while sizes.sum() < n:
        sizes[np.argmin(sizes - wanted)] += 1
    return tuple(int(s) for s in sizes)


def _pattern(sizes: tuple[int, ...]) -> tuple[int, ...]:
    return tuple(label for label, size in enumerate(sizes) for _ in range(size))
