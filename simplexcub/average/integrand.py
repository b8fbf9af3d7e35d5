"""The user's function behind one door: points in, checked values out, every evaluation counted.

Values may be real or complex, of shape (M,) or (M, …); inside they are a table (M, C), one column per component.

Spaces, which say how a point of the measure is given to f:

=============  ======================================================================================
all            components in their order
symmetric      largest component first; f must not care
ordered        largest component first, and f may: x1 is the largest
=============  ======================================================================================
"""

from __future__ import annotations

import math
from collections.abc import Callable
from itertools import permutations
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from simplexcub.errors import InputError

FloatArray = NDArray[np.float64]
Function = Callable[[FloatArray], Any]
Space = Literal["all", "symmetric", "ordered"]
SPACES = ("all", "symmetric", "ordered")
BATCH = 65_536  # points given to f at once
_PROBES = 6


class Stopped(Exception):
    """f gave no usable value, or the evaluations are used up; `cause` is what to raise where nothing was found yet."""

    def __init__(self, reason: str, cause: Exception | None = None) -> None:
        super().__init__(reason)
        self.reason = reason
        self.cause = cause


class Integrand:
    """f with its space, counting evaluations.

    Attributes
    ----------
    shape : tuple of int or None
        Shape of one value of f, known after the first call.
    evaluations : int
        Points given to f so far.
    """

    def __init__(self, f: Function, N: int, limit: int) -> None:
        self.f = f
        self.N = N
        self.limit = limit
        self.evaluations = 0
        self.shape: tuple[int, ...] | None = None

    @property
    def left(self) -> int:
        """Evaluations that may still be made."""
        return self.limit - self.evaluations

    def __call__(self, points: FloatArray) -> NDArray[Any]:
        """Values at `points`, shape (M, N), as a table of shape (M, C).

        Raises
        ------
        Stopped
            Too many points, f raised, or returned a value that is not finite.
        InputError
            f returned another shape or no numbers.
        """
        if len(points) > self.left:
            raise Stopped(f"the budget of {self.limit} evaluations has ended")
        parts = [self._checked(points[k : k + BATCH]) for k in range(0, len(points), BATCH)]
        return parts[0] if len(parts) == 1 else np.concatenate(parts)

    def _checked(self, points: FloatArray) -> NDArray[Any]:
        self.evaluations += len(points)
        try:
            with np.errstate(all="ignore"):
                values = np.asarray(self.f(points))
        except InputError:
            raise
        except Exception as error:
            what = f"{type(error).__name__}: {error}".rstrip(": ")
            raise Stopped(f"f raised {what}", InputError("f must not raise", what)) from error
        if values.shape[:1] != (len(points),) or values.dtype.kind not in "biufc":
            remedy = "f receives all points at once, shape (M, N); reduce over the last axis."
            raise InputError("f must return one value per point", f"shape {values.shape}, {values.dtype}", remedy)
        if self.shape is None:
            self.shape = values.shape[1:]
        if values.shape[1:] != self.shape or not values.size:
            raise InputError("f must return values of one shape", f"{values.shape[1:]} after {self.shape}")
        table = values.reshape(len(points), -1)
        if table.dtype.kind != "c":
            table = table.astype(np.float64)
        bad = ~np.isfinite(table).all(axis=1)
        if bad.any():
            k = int(np.argmax(bad))
            shown = f"{values[k].tolist()} at {points[k].tolist()}"
            raise Stopped(f"f returned {shown}", InputError("f must be finite inside the simplex", shown))
        return table

    def probe(self, points: FloatArray) -> NDArray[Any] | None:
        """Values, or None where f has none: used on the boundary, where f may be infinite."""
        try:
            return self(points)
        except Stopped:
            if (points > 0).all() or self.left < len(points):
                raise
            return None

    def shaped(self, row: NDArray[Any]) -> Any:
        """One row of a table in the shape of f's own values; a number where they are numbers."""
        value = row.reshape(self.shape or ())
        return value.item() if value.ndim == 0 else value

    def is_symmetric(self) -> bool:
        """Whether a few seeded points and their permutations say that the order of components does not matter."""
        rng = np.random.default_rng(2026)
        base = rng.dirichlet(np.ones(self.N), _PROBES)
        orders = [rng.permutation(self.N) for _ in range(2)] + [np.roll(np.arange(self.N), 1), np.arange(self.N)[::-1]]
        first = self(base)
        size = np.abs(first).max() + 1e-300
        return all(float(np.abs(self(base[:, order]) - first).max()) <= 1e-11 * size for order in orders)


def over_orders(integrand: Integrand, points: FloatArray) -> NDArray[Any]:
    """Mean of f over all orders of the components of each point, as a table."""
    orders = [list(order) for order in permutations(range(integrand.N))]
    if len(points) * len(orders) > integrand.left:
        raise Stopped(f"the budget of {integrand.limit} evaluations has ended")
    return sum((integrand(points[:, order]) for order in orders[1:]), integrand(points[:, orders[0]])) / len(orders)


def cost_of_orders(N: int) -> int:
    """Evaluations per point of :func:`over_orders`."""
    return math.factorial(N)
