"""Few representatives of spectra with many eigenvalues: which multiplicities they have, and in what order to try them.

A representative takes k different values, N eigenvalues falling into k blocks of equal ones, so M representatives bring
M k unknowns. All N apart come first, up to N = 64: that has the most freedom, almost every start from sampled spectra
solves, and since the nodes stay close to typical spectra the error for entropies is some ten times smaller than with
four to six values. After it come fewer values, from the least k with M k ≥ equations upward. S_N has far too many
patterns of multiplicities to list, and only few of them serve: a node must come close to a typical spectrum, whose
power sums hardly fluctuate when N is large. A k-point Gauss rule for the mean density of eigenvalues has those power
sums, so its weights times N, rounded to integers of at least 1, are the multiplicities that are tried first; later come
patterns of their own for each representative, from the same weights disturbed at random. Starts are block means of
sampled spectra.

M rises from the lower bound, in longer steps after the first few, until a structure is solved. If all N eigenvalues are
apart there, an elimination walk goes down from it; if none is solved, walks go down from non-negative least squares.
Each later round returns to the smaller M with more structures.
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
from simplexcub.search.eliminate import Walk
from simplexcub.search.gauss import gauss_nodes, recurrence
from simplexcub.search.tasks import Chunk
from simplexcub.symmetry import OrbitType

TURNS = (1, 4, 16)  # structures for each number of values, of each number of representatives, up to each round
STEPS = 4  # numbers of representatives that are tried one by one before the climb goes faster
LARGEST_WALK = 16  # components of a walk
ALL_APART = 64  # most eigenvalues that may all be different,
MOST_BLOCKS = 16  # and into how many blocks more of them fall
EXTRA = 6  # values that a representative may have beyond the least number that can do
_DISTURBED = 0.4  # spread of the logarithms of disturbed weights
_DIGITS = 20


class PatternSearch(Search):
    """A search for the fewest representatives, from the lower bound upward."""

    def run(self) -> None:
        """Search until a rule is as small as the rounds can make it or the budget ends."""
        group, equations = self.problem.group, len(self.problem.basis)
        least = max(fewest_nodes(group, self.problem.degree), -(-equations // group.n))
        first = 0
        for last in TURNS:
            small = group.n <= LARGEST_WALK
            self._climb(least, 2 * least if small else equations, first, last)
            if self.best is None and small and not self.budget.spent:
                self._walk([0, 1])
            first = last
            found = self.best
            if found is None or found.nodes <= least or self.budget.spent:
                return
            if len(found.counts) == 1 and found.counts[0][0].unknowns == group.n and small:
                self._walk([last], Walk(found.counts, found.candidate[None], max(1, found.nodes // 8), 0, False))

    def _climb(self, least: int, most: int, first: int, last: int) -> None:
        """Try the structures of these turns with more and more representatives, until one is solved."""
        nodes = least
        while nodes <= (most if self.best is None else self._most()) and not self.budget.spent:
            if self._try_turns(nodes, first, last):
                return
            far = self.best is None and nodes >= least + STEPS
            nodes += max(1, nodes // 8) if far else 1

    def _try_turns(self, nodes: int, first: int, last: int) -> bool:
        """Try the structures of these turns; whether one was solved."""
        tasks = (
            Chunk(self.problem, counts, self.seed, number)
            for number, counts in structures(self.problem.measure, len(self.problem.basis), nodes, first, last)
            if not self.budget.spent
        )
        for task, solutions in self.workers.in_order(tasks):
            self._report(f"starts for {nodes} representatives")
            if self._take(task.counts, solutions):
                return True
            if self.budget.spent:
                return False
        return False


def structures(measure: Measure, equations: int, nodes: int, first: int, last: int) -> Iterator[tuple[int, Counts]]:
    """(number, structure) of so many representatives, each number of values in turn; the same ones every time.

    Only turns from `first` to before `last` are given; turn 0 has the multiplicities of the density.
    """
    n = measure.N
    least = min(n, max(-(-equations // nodes), 1))
    choices = dict.fromkeys([n if n <= ALL_APART else MOST_BLOCKS, *range(least, min(n, least + EXTRA + 1))])
    for turn in range(first, last):
        for values in choices:
            shares = density_shares(measure, values)
            drawn = [_multiplicities(n, shares)] * nodes
            if turn:
                rng = np.random.default_rng((n, equations, nodes, turn, values))
                noise = np.exp(_DISTURBED * rng.standard_normal((nodes, values)))
                drawn = [_multiplicities(n, shares * factors) for factors in noise]
            counts = Counter(drawn)
            yield turn, tuple((OrbitType(_pattern(sizes), 1), c) for sizes, c in sorted(counts.items()))


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
