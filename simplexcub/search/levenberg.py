"""Levenberg–Marquardt on many candidates at once, kept inside the simplex.

One array computation steps the whole batch; each candidate has its own damping. A step is shortened so that no weight
and no coordinate loses more than a fixed share of itself, so iterates never leave.

References: K. Levenberg, Q. Appl. Math. 2 (1944) 164; D. W. Marquardt, SIAM J. Appl. Math. 11 (1963) 431.
"""

from __future__ import annotations

import math
import time
from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar

import numpy as np
from numpy.typing import NDArray

from simplexcub.search.system import System

FloatArray = NDArray[np.float64]

_SOLVED = 1e-12  # norm of residuals at which a candidate counts as solved,
_SOLVED_NOISE = 20.0  # or so many times the error of the functions themselves

_DEADLINE: ContextVar[float] = ContextVar("deadline", default=math.inf)


class Overdue(Exception):
    """The time was up before a result was there; `partial` is what the task had by then, if anything."""

    def __init__(self, partial: object = None) -> None:
        super().__init__(partial)
        self.partial = partial


@contextmanager
def until(deadline: float) -> Iterator[None]:
    """Within this block batches give up with `Overdue` at `deadline`, by ``time.monotonic()``."""
    token = _DEADLINE.set(deadline)
    try:
        yield
    finally:
        _DEADLINE.reset(token)


def solve_batch(
    system: System, u: FloatArray, *, iterations: int = 120, keep: float = 0.05, enough: int | None = None
) -> FloatArray:
    """Run the batch; return the candidates that solve the equations inside the simplex, shape (S, size).

    Parameters
    ----------
    u : ndarray, shape (B, size)
        Starts; overwritten.
    iterations : int
        Most steps of one candidate; those that stop gaining are given up sooner.
    keep : float
        Share of itself that every weight and coordinate keeps in one step.
    enough : int, optional
        Return as soon as so many candidates have solved the equations.

    Raises
    ------
    Overdue
        The deadline set by `until` came first.
    """
    residual, jacobian = system.evaluate(u)
    cost = np.einsum("be,be->b", residual, residual)
    damping = 1e-2 * np.ones(len(u))
    solved_at = max(_SOLVED, _SOLVED_NOISE * system.basis.noise)
    best_before = cost.copy()
    solved: list[FloatArray] = []
    for iteration in range(1, iterations + 1):
        if time.monotonic() > _DEADLINE.get():
            raise Overdue
        scale = system.scale(u)
        step = scale * _damped_step(residual, jacobian * scale[:, None, :], damping * np.minimum(cost, 1.0) ** 0.5)
        slack = system.slack(u)
        change = step @ system.slack_matrix.T
        with np.errstate(divide="ignore", invalid="ignore"):
            ratio = np.where(change < 0, (1 - keep) * slack / -change, np.inf).min(axis=1)
        trial = u + np.minimum(ratio, 1.0)[:, None] * step
        new_residual, new_jacobian = system.evaluate(trial)
        new_cost = np.einsum("be,be->b", new_residual, new_residual)
        better = new_cost < cost
        u[better], residual[better], jacobian[better], cost[better] = (
            trial[better],
            new_residual[better],
            new_jacobian[better],
            new_cost[better],
        )
        damping = np.where(better, damping * 0.5, damping * 3.0)
        done = cost < solved_at**2
        if done.any():
            solved.append(u[done])
            if enough is not None and sum(map(len, solved)) >= enough:
                break
        alive = ~done & (damping < 1e12)
        if iteration % 10 == 0:
            alive &= cost < 0.5 * best_before
            best_before = cost.copy()
        if not alive.all():
            u, residual, jacobian, cost, damping, best_before = (
                a[alive] for a in (u, residual, jacobian, cost, damping, best_before)
            )
        if not len(u):
            break
    return np.concatenate(solved) if solved else np.empty((0, system.size))


def _damped_step(residual: FloatArray, jacobian: FloatArray, damping: FloatArray) -> FloatArray:
    """−(JᵀJ + d)⁻¹ Jᵀ F, through whichever of JᵀJ and J Jᵀ is smaller; of least norm where J has a kernel."""
    wide = jacobian.shape[1] < jacobian.shape[2]
    transposed = jacobian.transpose(0, 2, 1)
    normal = jacobian @ transposed if wide else transposed @ jacobian
    side = residual[:, :, None] if wide else transposed @ residual[:, :, None]
    diagonal = np.arange(normal.shape[1])
    # Keeps the system regular where a weight or orbit dies out, or nothing can move.
    floor = 1e-14 * np.einsum("bnn->b", normal) + 1e-30
    normal[:, diagonal, diagonal] += (damping + floor)[:, None]
    solved = -np.linalg.solve(normal, side)
    step = transposed @ solved if wide else solved
    return np.asarray(step[:, :, 0], dtype=np.float64)
