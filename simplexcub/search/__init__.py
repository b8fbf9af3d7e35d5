"""Finding rules. Nothing here certifies anything: that is the verifier's work, which shares no numerical code."""

from __future__ import annotations

import datetime
import os
from collections.abc import Callable, Iterator
from concurrent.futures import Executor, ProcessPoolExecutor
from contextlib import contextmanager
from dataclasses import replace
from multiprocessing import get_context
from typing import Literal

import simplexcub
from simplexcub.errors import InputError
from simplexcub.measures import Measure
from simplexcub.rule import Provenance, Rule, rule_from_orbits
from simplexcub.search.conical import MOST_NODES, conical_rule
from simplexcub.search.gauss import gauss_rule
from simplexcub.search.orbits import Budget, Progress, find_orbits

__all__ = ["Progress", "solve"]

_SYMMETRIES = ("full", "none")
_SPACES = ("all",)
_THREADS = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")


def solve(
    measure: Measure,
    degree: int,
    *,
    space: Literal["all"] = "all",
    symmetry: Literal["full", "none"] = "full",
    digits: int = 50,
    seed: int = 0,
    budget: float = 60.0,
    jobs: int = 1,
    progress: Callable[[Progress], None] | None = None,
) -> Rule:
    """A rule with positive weights and nodes inside, exact for all polynomials of the given degree.

    N = 2 gives the Gauss rule. For N ≥ 3 and a symmetric measure, fully symmetric rules are searched with as few
    nodes as can be; if the budget ends before any is found, the conical-product rule is returned instead, and
    ``rule.provenance.method`` says so. A measure without full symmetry, or ``symmetry="none"``, gets the
    conical-product rule at once.

    Parameters
    ----------
    measure : Measure
    degree : int
        At least 1. A Gauss rule reaches the next odd degree, which is then the rule's degree.
    space : {"all"}
        What the rule is exact for: every polynomial.
    symmetry : {"full", "none"}
        Whether the node set is invariant under all permutations.
    digits : int
        Significant digits of nodes and weights, at least 5.
    seed : int
        Of the random starts; the same seed gives the same rule.
    budget : float
        Seconds of search. The search ends by itself when every cheaper structure has had its share of starts.
    jobs : int
        Processes to search with. More than one needs the usual ``if __name__ == "__main__"`` guard in a script.
    progress : callable, optional
        Called with a :class:`Progress` now and then.

    Raises
    ------
    InputError
        A parameter out of range.
    NothingFound
        Nothing was found and the conical product would be unreasonably large.

    References
    ----------
    H. Xiao, Z. Gimbutas, Comput. Math. Appl. 59 (2010) 663; F. D. Witherden, P. E. Vincent, Comput. Math. Appl. 69
    (2015) 1232.

    Examples
    --------
    >>> import simplexcub as sc
    >>> rule = sc.solve(sc.flat(2), degree=3, digits=10)
    >>> sorted(rule.node_decimals)[0]
    ('0.2113248654', '0.7886751346')
    """
    _check(degree=degree, space=space, symmetry=symmetry, digits=digits, seed=seed, budget=budget, jobs=jobs)
    package = f"simplexcub {simplexcub.__version__}"
    provenance = Provenance(package, seed, datetime.datetime.now(datetime.UTC).date().isoformat(), "Gauss")
    if measure.N == 2:
        return gauss_rule(measure, degree, digits=digits, provenance=provenance)
    product = replace(provenance, method="conical product")
    if measure.is_symmetric and symmetry == "full":
        allowance = Budget(budget)
        with _workers(jobs) as executor:
            orbits = find_orbits(
                measure,
                degree,
                digits=digits,
                seed=seed,
                budget=allowance,
                most_nodes=MOST_NODES,
                executor=executor,
                progress=progress,
            )
        if orbits is not None:
            found = replace(provenance, method="orbit search")
            return rule_from_orbits(measure, degree, orbits, digits=digits, provenance=found)
    return conical_rule(measure, degree, digits=digits, provenance=product)


@contextmanager
def _workers(jobs: int) -> Iterator[Executor | None]:
    """A pool of processes with one linear-algebra thread each, or None for one job."""
    if jobs == 1:
        yield None
        return
    before = {name: os.environ.get(name) for name in _THREADS}
    os.environ.update(dict.fromkeys(_THREADS, "1"))  # inherited by the workers; this process has read its own already
    try:
        with ProcessPoolExecutor(jobs, mp_context=get_context("spawn")) as pool:
            yield pool
    finally:
        for name, value in before.items():
            if value is None:
                os.environ.pop(name, None)
            else:
                os.environ[name] = value


def _check(*, degree: int, space: str, symmetry: str, digits: int, seed: int, budget: float, jobs: int) -> None:
    for name, value, least in (("degree", degree, 1), ("digits", digits, 5), ("seed", seed, 0), ("jobs", jobs, 1)):
        if isinstance(value, bool) or not isinstance(value, int) or value < least:
            raise InputError(f"{name} must be an integer of at least {least}", value)
    if not budget > 0:
        raise InputError("budget must be a positive number of seconds", budget)
    if space not in _SPACES:
        raise InputError(f"space must be one of {', '.join(_SPACES)}", space)
    if symmetry not in _SYMMETRIES:
        raise InputError(f"symmetry must be one of {', '.join(_SYMMETRIES)}", symmetry)
