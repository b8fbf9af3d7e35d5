"""Fewer nodes from a rule with too many: drop the least significant orbits and solve again from what is left.

The walk keeps a few solutions at every level. Where none of them can lose an orbit, they are shaken and solved again,
which moves along the family of solutions or to another one, before the walk gives up.

References: H. Xiao, Z. Gimbutas, Comput. Math. Appl. 59 (2010) 663. The start with at most as many orbits as equations
exists by V. Tchakaloff, Bull. Sci. Math. 81 (1957) 123, and is found by non-negative least squares.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from scipy.optimize import nnls

from simplexcub.search.chosen import Chosen
from simplexcub.search.counts import Counts, allowed, conditions, node_count, random_values
from simplexcub.search.levenberg import solve_batch
from simplexcub.search.system import FloatArray, Parts, Problem, System
from simplexcub.symmetry import Group, OrbitType

_POOL = 6  # solutions kept at each level
_SHAKES = 4  # times a level is shaken before the walk gives up
_BATCH = 8  # candidates tried at once, those with the least to lose first
_ITERATIONS = 50
_RICHNESS = (5, 20, 80)  # candidates per equation and orbit type offered to the start, more where fewer do not do
_SOLVED, _SOLVED_NOISE, _NO_WEIGHT = 1e-8, 100.0, 1e-14  # residual of a start, absolute and in errors of the functions
_LEAST = 1e-3  # weight of a chosen orbit in the start


def tchakaloff_start(problem: Problem, rng: np.random.Generator) -> tuple[Counts, FloatArray] | None:
    """A positive rule with at most as many orbits as equations, picked from many random orbits of every type."""
    system = System(problem, ())
    basis = problem.basis
    for richness in _RICHNESS:
        parts: Parts = {}
        points = {t: richness * len(basis) if t.unknowns > 1 else 1 for t in problem.types}
        values = {t: _candidates(t, system.points(rng, m)) for t, m in points.items()}
        columns = np.concatenate([basis.jet(v, t)[:, 0] for t, v in values.items()]).T
        # A chosen orbit has at least a small weight, whatever the least squares make of the rest.
        least = np.concatenate([np.full(len(v), _LEAST * isinstance(t, Chosen)) for t, v in values.items()])
        weights, residual = nnls(columns, system.means - columns @ least, maxiter=20 * columns.shape[1])
        weights = weights + least
        if residual > max(_SOLVED, _SOLVED_NOISE * basis.noise):
            continue
        start = 0
        for t, v in values.items():
            here = weights[start : start + len(v)]
            parts[t] = [(w, x) for w, x in zip(here, v, strict=True) if w > _NO_WEIGHT]
            start += len(v)
        return system.join(parts)
    return None


def _candidates(type_: OrbitType, points: FloatArray) -> FloatArray:
    """Distinct coordinates of orbits offered to the start: near the points, or the given ones of a chosen orbit."""
    if isinstance(type_, Chosen):
        return np.array([[float(x) for x in type_.coordinates]])
    return random_values(type_, points)


@dataclass(frozen=True)
class Walk:
    """Where an elimination walk stands.

    Attributes
    ----------
    counts : Counts
        The structure of the present solutions.
    pool : ndarray, shape (S, unknowns)
        A few solutions of it, inside the simplex.
    at_once : int
        How many orbits the next step tries to drop together.
    shaken : int
        How often the present level has been shaken.
    ended : bool
        Nothing more can be dropped, or no start was found.
    """

    counts: Counts
    pool: FloatArray
    at_once: int
    shaken: int
    ended: bool


def set_out(problem: Problem, rng: np.random.Generator) -> Walk:
    """The start of a walk, by non-negative least squares."""
    start = tchakaloff_start(problem, rng)
    if start is None:
        return Walk((), np.empty((0, 0)), 1, 0, True)
    counts, u = start
    return Walk(counts, u[None], max(1, sum(c for _, c in counts) // 8), 0, False)


def set_out_from(problem: Problem, nodes: FloatArray, weights: FloatArray) -> Walk:
    """The start of a walk from a known rule, nodes of shape (M, N), for a problem without symmetry."""
    (type_,) = problem.group.types
    counts, u = System(problem, ()).join({type_: list(zip(weights, nodes, strict=True))})
    return Walk(counts, u[None], max(1, len(nodes) // 8), 0, False)


def advance(problem: Problem, walk: Walk, rng: np.random.Generator) -> Walk:
    """One step: drop orbits, or drop fewer at once next time, or shake, or give up."""
    step = _drop(problem, walk)
    if step is not None:
        counts, pool = step
        return Walk(counts, pool, min(walk.at_once, max(1, sum(c for _, c in counts) // 8)), 0, False)
    if walk.at_once > 1:
        return replace(walk, at_once=walk.at_once // 2)
    if walk.shaken < _SHAKES:
        shaken = walk.shaken + 1
        return replace(walk, shaken=shaken, pool=_shake(System(problem, walk.counts), walk.pool, rng, 0.05 * shaken))
    return replace(walk, ended=True)


def _drop(problem: Problem, walk: Walk) -> tuple[Counts, FloatArray] | None:
    """Solutions with `walk.at_once` orbits fewer, or with one orbit moved to a smaller type; None if there are none."""
    system = System(problem, walk.counts)
    wanted = conditions(problem.group, problem.degree, problem.also)
    children: dict[Counts, list[tuple[float, FloatArray]]] = {}
    for u in walk.pool:
        significance = _significance(system, u)
        order = np.argsort(significance)
        if walk.at_once > 1:
            dropped = order[: min(walk.at_once, int(np.isfinite(significance).sum()))]
            options = [(float(significance[dropped].sum()), *_without(system, u, dropped))]
        else:
            kept = (r for r in order if np.isfinite(significance[r]))
            options = [(float(significance[r]), *_without(system, u, np.array([r]))) for r in kept]
            options += list(_demoted(system, u))
        for loss, smaller, v in options:
            if smaller and allowed(smaller, wanted):
                children.setdefault(smaller, []).append((loss, v))
    for smaller in sorted(children, key=node_count):
        candidates = [v for _, v in sorted(children[smaller], key=lambda pair: pair[0])]
        reduced = System(problem, smaller)
        for start in range(0, len(candidates), _BATCH):
            starts = np.array(candidates[start : start + _BATCH])
            solved = solve_batch(reduced, starts, iterations=_ITERATIONS, enough=1)
            if len(solved):
                best = np.argsort(-reduced.slack(solved).min(axis=1))[:_POOL]
                return smaller, solved[best]
    return None


def _demoted(system: System, u: FloatArray) -> Iterator[tuple[float, Counts, FloatArray]]:
    """Candidates with one orbit moved to the nearest orbit of a type with one coordinate less, and how far it moved."""
    group = system.problem.group
    parts = system.split(u)
    for type_, orbits in parts.items():
        for special in system.problem.types:
            if isinstance(special, Chosen) or special.unknowns != type_.unknowns - 1:
                continue
            for pattern in _merging(group, special, type_):
                for i, (weight, values) in enumerate(orbits):
                    node = values[list(type_.pattern)]
                    merged = np.array([node[np.array(pattern) == j].mean() for j in range(special.unknowns)])
                    moved = float(np.abs(merged[list(pattern)] - node).sum())
                    others = {**parts, type_: orbits[:i] + orbits[i + 1 :]}
                    others[special] = [*others.get(special, []), (weight * special.size / type_.size, merged)]
                    yield moved, *system.join(others)


@lru_cache(maxsize=4096)
def _merging(group: Group, special: OrbitType, type_: OrbitType) -> list[tuple[int, ...]]:
    """Arrangements of `special` that have all the equalities of `type_`'s pattern."""
    labels = type_.pattern
    return [
        image
        for image in group.arrangements(special)
        if all(image[i] == image[labels.index(label)] for i, label in enumerate(labels))
    ]


def _significance(system: System, u: FloatArray) -> FloatArray:
    """How much each orbit carries: weight · ‖φ(representative)‖², without limit for a chosen one."""
    norms = [np.square(system.basis.jet(system.values(u[None], b)[0], b.type)[:, 0]).sum(axis=1) for b in system.blocks]
    carried: FloatArray = u[: system.orbits] * np.concatenate(norms)
    for block in system.blocks:
        if isinstance(block.type, Chosen):
            carried[block.weights] = np.inf
    return carried


def _without(system: System, u: FloatArray, dropped: np.ndarray) -> tuple[Counts, FloatArray]:
    gone, r = {int(i) for i in dropped}, 0
    parts: Parts = {}
    for type_, orbits in system.split(u).items():
        parts[type_] = [orbit for i, orbit in enumerate(orbits, r) if i not in gone]
        r += len(orbits)
    return system.join(parts)


def _shake(system: System, pool: FloatArray, rng: np.random.Generator, size: float) -> FloatArray:
    """Solutions reached from disturbed ones; the old ones where none is."""
    noise = np.exp(size * rng.standard_normal((2 * _POOL, system.size)))
    moved = pool[rng.integers(len(pool), size=2 * _POOL)] * noise
    moved = moved[system.slack(moved).min(axis=1) > 0]
    solved = solve_batch(system, moved) if len(moved) else moved
    return solved[:_POOL] if len(solved) else pool
