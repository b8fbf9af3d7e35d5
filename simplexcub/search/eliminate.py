"""Fewer nodes from a rule with too many: drop the least significant orbits and solve again from what is left.

The walk keeps a few solutions at every level. Where none of them can lose an orbit, they are shaken and solved again,
which moves along the family of solutions or to another one, before the walk gives up.

References: H. Xiao, Z. Gimbutas, Comput. Math. Appl. 59 (2010) 663. The start with at most as many orbits as equations
exists by V. Tchakaloff, Bull. Sci. Math. 81 (1957) 123, and is found by non-negative least squares.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from scipy.optimize import nnls

from simplexcub.search.counts import Counts, allowed, conditions, node_count, random_values
from simplexcub.search.levenberg import solve_batch
from simplexcub.search.system import FloatArray, Problem, System

_POOL = 6  # solutions kept at each level
_SHAKES = 4  # times a level is shaken before the walk gives up
_BATCH = 8  # candidates tried at once, those with the least to lose first
_ITERATIONS = 50


def tchakaloff_start(problem: Problem, rng: np.random.Generator) -> tuple[Counts, FloatArray] | None:
    """A positive rule with at most as many orbits as equations, picked from many random orbits of every type."""
    basis = problem.basis
    types = problem.group.types
    per_type = [20 * len(basis) if t is types[-1] else (4 * len(basis) if t.unknowns > 1 else 1) for t in types]
    values = [random_values(t, rng.dirichlet(np.ones(problem.group.n), m)) for t, m in zip(types, per_type, strict=True)]
    columns = np.concatenate([basis.jet(v, t)[:, 0] for v, t in zip(values, types, strict=True)]).T
    means = System(problem, ()).means
    weights, residual = nnls(columns, means, maxiter=20 * columns.shape[1])
    if residual > 1e-8:
        return None
    counts, w, x, start = [], [], [], 0
    for t, v in zip(types, values, strict=True):
        here = np.flatnonzero(weights[start : start + len(v)] > 1e-14)
        if len(here):
            counts.append((t, len(here)))
            w.append(weights[start + here])
            x.append(v[here, :-1].ravel())
        start += len(v)
    return tuple(counts), np.concatenate([*w, *x])


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


def set_out(problem: Problem, number: int, rng: np.random.Generator) -> Walk:
    """The start of a walk, by non-negative least squares."""
    start = tchakaloff_start(problem, rng)
    if start is None:
        return Walk((), np.empty((0, 0)), 1, 0, True)
    counts, u = start
    return Walk(counts, u[None], max(1, sum(c for _, c in counts) // 8), 0, False)


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
    """Solutions with `walk.at_once` orbits fewer, or None."""
    system = System(problem, walk.counts)
    wanted = conditions(problem.group, problem.degree)
    children: dict[Counts, list[tuple[float, FloatArray]]] = {}
    for u in walk.pool:
        significance = _significance(system, u)
        order = np.argsort(significance)
        sets = [order[: walk.at_once]] if walk.at_once > 1 else [np.array([r]) for r in order]
        for dropped in sets:
            smaller, v = _without(system, u, dropped)
            if smaller and allowed(smaller, wanted):
                children.setdefault(smaller, []).append((float(significance[dropped].sum()), v))
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


def _significance(system: System, u: FloatArray) -> FloatArray:
    """How much each orbit carries: weight · ‖φ(representative)‖², smallest where it is least missed."""
    norms = [np.square(system.basis.jet(system.values(u[None], b)[0], b.type)[:, 0]).sum(axis=1) for b in system.blocks]
    return u[: system.orbits] * np.concatenate(norms)


def _without(system: System, u: FloatArray, dropped: np.ndarray) -> tuple[Counts, FloatArray]:
    counts, weights, coordinates = [], [], []
    kept = np.ones(system.orbits, dtype=bool)
    kept[dropped] = False
    for block in system.blocks:
        here = kept[block.weights]
        if here.any():
            counts.append((block.type, int(here.sum())))
            weights.append(u[block.weights][here])
            coordinates.append(u[block.coordinates].reshape(block.count, block.free)[here].ravel())
    if not counts:
        return (), u[:0]
    w = np.concatenate(weights)
    return tuple(counts), np.concatenate([w / w.sum(), *coordinates])


def _shake(system: System, pool: FloatArray, rng: np.random.Generator, size: float) -> FloatArray:
    """Solutions reached from disturbed ones; the old ones where none is."""
    noise = np.exp(size * rng.standard_normal((2 * _POOL, system.size)))
    moved = pool[rng.integers(len(pool), size=2 * _POOL)] * noise
    moved = moved[system.slack(moved).min(axis=1) > 0]
    solved = solve_batch(system, moved) if len(moved) else moved
    return solved[:_POOL] if len(solved) else pool
