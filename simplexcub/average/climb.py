"""One mean under way: four ways of finding it, each begun where the one before stops making headway.

1. The ladder of shipped rules, while it can be expected to settle; a product with other nodes checks the outcome.
2. Products on the chart, until they stall or have had their share of the evaluations. What they miss of the purity,
   whose mean is known exactly, is added to their error: a steep density may need more nodes than f.
3. Cells of the chart, around the best value so far.
4. Sampling.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from simplexcub.average.cells import subdivide
from simplexcub.average.convergence import (
    HIGHEST_ORDER,
    STEPS,
    Rung,
    estimated_error,
    has_stalled,
    per_component,
    settling_error,
)
from simplexcub.average.integrand import Integrand, Space, Stopped
from simplexcub.average.ladder import ladder
from simplexcub.average.products import ROUNDING, log_mass, plan, product_value, products, resolution
from simplexcub.average.sampling import sampled_mean
from simplexcub.measures import Measure
from simplexcub.search import Progress

PRODUCT_SHARE = 0.4  # of the evaluations; the rest is left to cells
CELL_SHARE = 0.7  # of what is left then, on two axes or more; a jump is better sampled than cut out
FEWEST_FOR_CELLS = 100
HIGHEST_SHIPPED = {2: 41, 3: 20, 4: 10}  # beyond it the ladder has nothing to wait for
CHECK_SIZES = {1: 16, 2: 9, 3: 6, 4: 5, 5: 4}  # nodes per axis of the product that checks the ladder


class Work:
    """One mean under way: the best value so far, as (value, error, how) with rows of shape (C,)."""

    def __init__(
        self,
        integrand: Integrand,
        measure: Measure,
        tol: float,
        budget: float,
        seed: int,
        progress: Callable[[Progress], None] | None,
    ) -> None:
        self.integrand, self.measure, self.tol = integrand, measure, tol
        self.budget, self.seed, self.progress = budget, seed, progress
        self.space: Space = "all"
        self.best: tuple[NDArray[Any], NDArray[np.float64], str] | None = None
        self.reason = ""
        self._start = time.monotonic()

    def run(self) -> None:
        """Try one way after the other until the tolerance is met."""
        for way in (self._ladder, self._products, self._cells, self._sampling):
            if way() or self._is_at_the_floor():
                return
        if self.best is None:
            raise Stopped(f"the budget of {self.integrand.limit} evaluations is too small for any rule")
        self.reason = self.reason or f"the budget of {self.integrand.limit} evaluations has ended"

    def _offer(self, value: NDArray[Any], error: NDArray[np.float64], how: str) -> bool:
        """Keep the value unless a better one is there; say whether the tolerance is met.

        Where the two disagree by more than their errors, the error of the earlier one was too small and is corrected.
        """
        if self.best is not None and np.isfinite(error).all():
            kept, kept_error, kept_how = self.best
            self.best = kept, np.maximum(kept_error, np.abs(value - kept) - error), kept_how
        if self.best is None or not error.max() > self.best[1].max():
            self.best = value, error, how
        if self.progress is not None:
            text = f"{self.integrand.evaluations} evaluations, error {self.best[1].max():.1e}: {how}"
            self.progress(Progress(text, time.monotonic() - self._start))
        return bool(error.max() <= self.tol)

    def _is_at_the_floor(self) -> bool:
        """Whether rounding alone is above the tolerance, so that more work would be lost."""
        if self.best is None:
            return False
        floor = 3 * ROUNDING * float(np.abs(self.best[0]).max())
        if self.tol < floor and self.best[1].max() <= 4 * floor:
            self.reason = "double precision holds no more digits of this mean"
            return True
        return False

    def _ladder(self) -> bool:
        rungs: list[Rung] = []
        for step in ladder(self.measure, self.space, budget=self.budget, progress=self.progress):
            values = self.integrand.probe(step.points)
            if values is None:
                continue
            rounding = ROUNDING * (step.weights @ np.abs(values))
            rungs.append(Rung(step.degree, step.weights @ values, rounding))
            error = per_component(estimated_error, rungs)
            span = f"{len(rungs)} rules of degree {rungs[0].degree} to {step.degree}"
            how = f"{span}, the last by {step.origin}"
            if float(error.max()) <= self.tol:
                return self._confirmed(rungs[-1].value, error, how)
            self._offer(rungs[-1].value, error, how)
            hope = (step.degree / HIGHEST_SHIPPED.get(self.measure.N, 2 * step.degree)) ** HIGHEST_ORDER
            if len(rungs) >= STEPS and float(error.max()) * hope > self.tol:
                return False
        return False

    def _confirmed(self, value: NDArray[Any], error: NDArray[np.float64], how: str) -> bool:
        """Offer what the ladder settled at, if a product with other nodes agrees: few nodes can all miss a feature."""
        size = CHECK_SIZES.get(self.measure.N - 1)
        other = None if size is None else product_value(self.measure, self.space, self.integrand, size)
        if other is not None:
            error = np.maximum(error, 4 * np.abs(value - other.value) - other.rounding)
            how = f"{how}, checked by a product"
        return self._offer(value, error, how)

    def _products(self) -> bool:
        found = plan(self.measure, self.space)
        if found is None:
            return False
        axes, allowed = found.chart.axes, self.integrand.left * PRODUCT_SHARE
        rungs: list[Rung] = []
        climbed = self.best
        for rung in products(self.measure, self.space, self.integrand):
            rungs.append(rung)
            unresolved = 2 * resolution(self.measure, self.space, rung.degree) * rung.rounding / ROUNDING
            error = per_component(settling_error, rungs) + unresolved
            if climbed is not None:  # few nodes can all miss a feature, so each product checks the ladder anew
                value, claimed, how = climbed
                self.best = value, np.maximum(claimed, 2 * np.abs(value - rung.value)), how
            shape = " × ".join([str(rung.degree)] * axes)
            if self._offer(rung.value, error, f"product of {shape} nodes on the {found.name}"):
                return True
            if float(error.max()) <= 4 * float(rung.rounding.max()):
                self.reason = "double precision holds no more digits of this mean"
                return False
            allowed -= rung.degree**axes * found.cost
            if has_stalled(rungs) or allowed < 2 * rung.degree**axes * found.cost:
                return False
        return False

    def _cells(self) -> bool:
        found = plan(self.measure, self.space)
        if found is None or self.best is None or self.reason:
            return False
        chart, centre = found.flat, self.best[0]
        if not chart.is_bounded:  # flat rules would understate their error at the singularity
            return False
        whole = log_mass(self.measure, self.space)
        if whole is None:
            return False
        spent = self.integrand.evaluations
        allowed = int(self.integrand.left * (CELL_SHARE if chart.axes > 1 else 1.0))

        def values(t: NDArray[np.float64]) -> NDArray[Any]:
            points, remainder = chart.points(t)
            table = found.values(self.integrand, points) - centre
            return np.asarray(table * np.exp(chart.log_density(t, remainder) - whole)[:, None])

        def left() -> int:
            return (allowed - (self.integrand.evaluations - spent)) // found.cost

        def report(cells: int, error: float) -> None:
            if self.progress is not None:
                text = f"{self.integrand.evaluations} evaluations, error {error:.1e}: {cells} cells"
                self.progress(Progress(text, time.monotonic() - self._start))

        if left() < FEWEST_FOR_CELLS:
            return False
        cut = subdivide(values, chart.axes, tol=self.tol, points_left=left, report=report)
        rounding = ROUNDING * (np.abs(centre) + np.abs(cut.value))
        how = f"{cut.cells} cells of the {found.name}"
        return self._offer(centre + cut.value, cut.error + rounding, how)

    def _sampling(self) -> bool:
        if self.reason:
            return False
        useful = math.inf if self.best is None else float(self.best[1].max())

        def report(draws: int, error: float) -> None:
            if self.progress is not None:
                text = f"error {error:.1e} after {draws} samples"
                self.progress(Progress(text, time.monotonic() - self._start))

        found = sampled_mean(
            self.integrand, self.measure, self.space, tol=self.tol, useful=useful, seed=self.seed, report=report
        )
        if found is None:
            return False
        if found.given_up:
            self.reason = "sampling cannot reach it in the evaluations allowed"
        how = f"{found.draws} samples with exact moments as control variates, error of 3 standard errors"
        return self._offer(found.value, found.error, how)
