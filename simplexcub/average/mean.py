"""The mean of any function, to a tolerance, with an estimate of its error.

Four ways, each begun where the one before stops making headway:

1. the ladder of shipped rules (Gauss rules for N = 2), `simplexcub.average.ladder`;
2. products of Gauss–Jacobi rules on the chamber, or the simplex, up to N = 6, `simplexcub.average.products`;
3. adaptive subdivision there, `simplexcub.average.cells`;
4. sampling with exact moments as control variates, `simplexcub.average.sampling`, the only way for N ≥ 7.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Literal

from simplexcub.average.climb import Work
from simplexcub.average.exact import Exact
from simplexcub.average.functions import SpectralFunction, exact_mean
from simplexcub.average.integrand import SPACES, Function, Integrand, Space, Stopped
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import Measure, Ordered
from simplexcub.search import Progress

MAX_EVALUATIONS = 1_000_000
_FEW = 64  # evaluations below which none goes into finding out whether f is symmetric


@dataclass(frozen=True)
class Mean:
    """A mean with what is known about its error.

    Attributes
    ----------
    value : float, complex or ndarray
        Of the shape of one value of f.
    error : float or ndarray
        Estimated bound on |value − E[f]|, component by component; 0 where the mean is exact, inf where there was too
        little to tell.
    evaluations : int
        Points at which f was evaluated.
    how : str
        What produced the value.
    exact : Exact or None
        The mean in closed form, where f is a named function and the moments give it.
    reason : str
        Why the tolerance was not met; empty where it was.
    """

    value: Any
    error: Any
    evaluations: int
    how: str
    exact: Exact | None = None
    reason: str = ""

    @property
    def met(self) -> bool:
        """Whether the estimated error is within the tolerance."""
        return not self.reason


def average(
    f: Function,
    measure: Measure,
    *,
    tol: float = 1e-8,
    space: Literal["auto", "all", "symmetric", "ordered"] = "auto",
    max_evaluations: int = MAX_EVALUATIONS,
    budget: float = 0.0,
    seed: int = 0,
    progress: Callable[[Progress], None] | None = None,
) -> Mean:
    """The mean E[f] to a tolerance, with an estimate of its error.

    Named functions that are polynomials are averaged exactly, without evaluations.

    Parameters
    ----------
    f : callable
        Takes points, shape (M, N), and returns real or complex values, shape (M,) or (M, …). See also
        :func:`simplexcub.average.functions.spectral_function`.
    measure : Measure
    tol : float
        Absolute tolerance, for every component of f; the work ends as soon as the estimated error is no larger.
    space : {"auto", "all", "symmetric", "ordered"}
        ``all`` gives f the components in their order, ``ordered`` the largest first; ``symmetric`` promises that the
        order does not matter to f. ``auto`` tries f on some points and their permutations, and takes ``symmetric`` or
        ``all``; named functions and the ordered measures know their own.
    max_evaluations : int
        Most points at which f is evaluated.
    budget : float
        Seconds in which rules may be searched where none is shipped; 0 searches none. Worth it where f is so slow that
        a rule of few nodes is wanted.
    seed : int
        Of the samples, where it comes to sampling.
    progress : callable, optional
        Called with a :class:`simplexcub.search.Progress` after each rule or generation of cells.

    Returns
    -------
    Mean
        With the best value there is, also where its error exceeds `tol`; then ``reason`` says why.

    Raises
    ------
    InputError
        A parameter out of range; f returned another shape, or had no finite value before anything was found.
    NothingFound
        The evaluations ended before anything was found.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> mean = average(lambda x: x[:, 0] ** 4, flat(2))
    >>> abs(mean.value - 1 / 5) < 1e-15
    True
    """
    _check(measure, tol=tol, space=space, max_evaluations=max_evaluations, budget=budget, seed=seed)
    exact = exact_mean(f, measure)
    if exact is not None and isinstance(f, SpectralFunction) and f.is_polynomial and space in ("auto", f.space):
        return Mean(float(exact.value), 0.0, 0, "exact moments", exact)
    base = measure.base if isinstance(measure, Ordered) else measure
    integrand = Integrand(f, measure.N, max_evaluations)
    work = Work(integrand, base, tol, budget, seed, progress)
    reason = ""
    try:
        work.space = _space(integrand, f, measure, space)
        work.run()
    except Stopped as stop:
        if work.best is None:
            remedy = "Allow more evaluations."
            raise stop.cause or NothingFound(f"mean over {measure}", stop.reason, remedy) from stop.__cause__
        reason = stop.reason
    except KeyboardInterrupt:
        if work.best is None:
            raise
        reason = "interrupted"
    assert work.best is not None
    value, error, how = work.best
    worst = float(error.max())
    missed = f"tolerance {tol:g} was not met, the estimated error is {worst:.1e}: {reason or work.reason}"
    return Mean(
        integrand.shaped(value),
        integrand.shaped(error),
        integrand.evaluations,
        how,
        exact,
        "" if worst <= tol else missed,
    )


def _space(integrand: Integrand, f: Function, measure: Measure, asked: str) -> Space:
    own = getattr(f, "space", None)
    if asked == "symmetric" and own is not None and own != asked:
        remedy = "Take space all, or ordered for the ordered spectrum."
        raise InputError("space symmetric must be asked of a function that does not mind the order", f, remedy)
    if asked != "auto":
        return asked  # type: ignore[return-value]
    if isinstance(measure, Ordered):
        return "symmetric" if own == "symmetric" else "ordered"
    if own in SPACES:
        return own  # type: ignore[no-any-return]
    if integrand.limit < _FEW or not measure.is_symmetric:
        return "all"
    return "symmetric" if integrand.is_symmetric() else "all"


def _check(measure: object, *, tol: float, space: str, max_evaluations: int, budget: float, seed: int) -> None:
    if not isinstance(measure, Measure):
        raise InputError("measure must be a measure such as flat(3)", repr(measure))
    if isinstance(tol, bool) or not isinstance(tol, int | float) or not 0 < tol < math.inf:
        raise InputError("tol must be a positive number", tol)
    if space not in ("auto", *SPACES):
        raise InputError(f"space must be one of auto, {', '.join(SPACES)}", space)
    if not budget >= 0:
        raise InputError("budget must be a number of seconds, at least 0", budget)
    for name, value, least in (("max_evaluations", max_evaluations, 1), ("seed", seed, 0)):
        if isinstance(value, bool) or not isinstance(value, int) or value < least:
            raise InputError(f"{name} must be an integer of at least {least}", value)
