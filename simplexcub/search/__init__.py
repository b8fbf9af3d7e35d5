"""Finding rules. Nothing here certifies anything: that is the verifier's work, which shares no numerical code."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Sequence
from concurrent.futures import Executor
from pathlib import Path
from typing import get_args

import numpy as np
from mpmath import mp, mpf

from simplexcub.errors import InputError, NothingFound
from simplexcub.invariants import invariant_basis
from simplexcub.measures import Chamber, Measure, ordered
from simplexcub.rounded import rule_from_nodes, rule_from_orbits, rule_from_representatives
from simplexcub.rule import Provenance, Rule, Space
from simplexcub.search.chebyshev import Chebyshev, chebyshev, chebyshev_rule
from simplexcub.search.conical import MOST_NODES, conical_count, conical_rule
from simplexcub.search.driver import Budget, Found, Progress, Search
from simplexcub.search.embed import embed
from simplexcub.search.extra import KnownMean
from simplexcub.search.gauss import gauss_rule
from simplexcub.search.levenberg import Overdue
from simplexcub.search.patterns import PatternSearch
from simplexcub.search.record import Record
from simplexcub.search.spaces import folded, gauss_pairs, unfolded
from simplexcub.search.symmetries import groups_for, within_reach
from simplexcub.search.system import FloatArray
from simplexcub.search.wish import Wish, fixed_integers, make_wish, with_claims
from simplexcub.search.workers import Workers, local_workers
from simplexcub.symmetry import Group, Spectra, spectra
from simplexcub.version import VERSION

__all__ = ["Chebyshev", "KnownMean", "Progress", "chebyshev", "embed", "product_rule", "solve"]

_SPARE_DIGITS = 10  # of the chamber's coordinates, which are added up
MOST_DIGITS, MOST_DEGREE = 1000, 500
_PRODUCT_SHARE = 2  # products with up to so many nodes per equation are worth setting out from
_NO_PROVENANCE = Provenance("", 0, "", "conical product")


def solve(
    measure: Measure,
    degree: int,
    *,
    space: Space = "all",
    symmetry: str = "full",
    equal_weights: bool = False,
    integer_weights: int | None = None,
    also: str | KnownMean | Sequence[str | KnownMean] = (),
    include: str | Sequence[str] = (),
    digits: int = 50,
    seed: int = 0,
    budget: float = 60.0,
    jobs: int = 1,
    executor: Executor | None = None,
    resume: str | Path | None = None,
    progress: Callable[[Progress], None] | None = None,
) -> Rule:
    """A rule with positive weights and nodes inside, exact for all polynomials of the given degree in a space.

    N = 2 gives a Gauss rule. For N ≥ 3 a rule with as few nodes as can be is searched; if the budget ends before any
    is found, the conical-product rule is returned instead, and ``rule.provenance.method`` says so.

    Parameters
    ----------
    measure : Measure
    degree : int
        From 1 to 500. A Gauss rule reaches the next odd degree, which is then the rule's degree.
    space : {"all", "symmetric", "ordered"}
        What the rule is exact for: every polynomial; every symmetric one, with as few representatives of orbits as can
        be; every one of the ordered spectrum λ_1 ≥ … ≥ λ_N, for a measure with exact moments there.
    symmetry : str
        Permutations that leave the node set unchanged: ``full``; ``alternating``, ``dihedral``, ``cyclic``; ``klein``
        (N = 4); ``stabiliser`` of the last component; ``product-2-1`` and the like, within consecutive blocks;
        ``none``. Fewer symmetries often need fewer nodes. ``best`` tries several and keeps the fewest nodes. For a
        Dirichlet measure with unequal α, ``full`` means the permutations among components of equal α. Only space
        ``all`` has a choice.
    equal_weights : bool
        Every node has the weight 1/M. For N = 2 it is decided exactly which numbers of nodes up to degree + 1 serve.
    integer_weights : int, optional
        Weights are integers up to this one, over their sum.
    also : str or sequence of str or KnownMean
        Functions to average exactly besides the polynomials: ``entropy`` is Σ λ ln λ, ``entropy-K`` Σ λ^K ln λ,
        ``power-Q`` Σ λ^Q, and a :class:`KnownMean` any symmetric function with a known mean.
    include : {"vertices", "centre", "edge-midpoints"} or sequence of them
        Nodes that the rule must have, for those who hold values there; their weights are free, but positive.
    digits : int
        Significant digits of nodes and weights, from 5 to 1000.
    seed : int
        Of the random starts; the same seed gives the same rule.
    budget : float
        Seconds of search. The search ends by itself when every cheaper structure has had its share of starts.
    jobs : int
        Processes to search with. More than one needs the usual ``if __name__ == "__main__"`` guard in a script.
    executor : concurrent.futures.Executor, optional
        Searches there instead, with `jobs` tasks at a time.
    resume : path, optional
        Folder that remembers finished work; a search that was stopped goes on from there.
    progress : callable, optional
        Called with a :class:`Progress` now and then.

    Raises
    ------
    InputError
        A parameter out of range, a symmetry that the measure or the space does not have, or a measure without exact
        moments of its ordered spectrum.
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
    _check(degree=degree, space=space, digits=digits, seed=seed, budget=budget, jobs=jobs)
    if space != "all" and symmetry not in ("full", "best", *(("none",) if space == "ordered" else ())):
        raise InputError(f"rules of space {space} must be left their own symmetry", symmetry, "Leave it out.")
    wish = make_wish(measure, degree, symmetry, include, also, fixed_integers(equal_weights, integer_weights))
    if space != "all" and not wish.plain:
        remedy = "Ask for space all; its fully symmetric rules can be folded into ordered spectra."
        raise InputError("space must be all where weights, nodes or more functions are asked for", space, remedy)
    if space == "ordered":
        chamber = Chamber(ordered(measure))
        rule = solve(
            chamber,
            degree,
            digits=digits + _SPARE_DIGITS,
            seed=seed,
            budget=budget,
            jobs=jobs,
            executor=executor,
            resume=resume,
            progress=progress,
        )
        return unfolded(rule, measure, digits)
    groups: list[Group] = [spectra(measure.N)] if space == "symmetric" else groups_for(measure, symmetry)
    if measure.N == 2 and space == "symmetric":
        return gauss_pairs(measure, degree, digits=digits, provenance=_provenance(seed, "Gauss"))
    if jobs > 1 or executor is not None:
        wish.check_portable()
    reason = ""
    if measure.N == 2 and equal_weights:
        try:
            return chebyshev_rule(measure, degree, digits=digits, provenance=_provenance(seed, ""))
        except NothingFound as none:
            reason = f"{none.tried}; "
    if measure.N == 2 and wish.plain:
        return product_rule(measure, degree, digits=digits, seed=seed)
    groups = [group for group in groups if within_reach(group, degree)]
    record = None if resume is None else Record(resume)
    if executor is None:
        with local_workers(jobs, record) as workers:
            found = _search(groups, wish, digits, seed, budget, workers, progress)
    else:
        workers = Workers(lambda: executor, jobs, record, owned=False)
        found = _search(groups, wish, digits, seed, budget, workers, progress)
    if found is not None:
        return _rule(found, digits, _provenance(seed, f"{wish.method}; {reason}".removesuffix("; ")))
    if not wish.plain:
        wish.give_up(budget, reason)
    product = product_rule(measure, degree, digits=digits, seed=seed)
    return folded(product) if space == "symmetric" else product


def product_rule(measure: Measure, degree: int, *, digits: int = 50, seed: int = 0) -> Rule:
    """The rule that needs no search: the Gauss rule for N = 2, else the conical product of Gauss rules.

    Parameters
    ----------
    measure : Measure
    degree : int
    digits : int
        Significant digits of nodes and weights.
    seed : int
        Of the search that it stands in for; only its provenance tells it.

    Raises
    ------
    NothingFound
        The product would be unreasonably large.
    """
    if measure.N == 2:
        return gauss_rule(measure, degree, digits=digits, provenance=_provenance(seed, "Gauss"))
    return conical_rule(measure, degree, digits=digits, provenance=_provenance(seed, "conical product"))


def _provenance(seed: int, method: str) -> Provenance:
    today = datetime.datetime.now(datetime.UTC).date().isoformat()
    return Provenance(f"simplexcub {VERSION}", seed, today, method)


def _search(
    groups: list[Group],
    wish: Wish,
    digits: int,
    seed: int,
    budget: float,
    workers: Workers,
    progress: Callable[[Progress], None] | None,
) -> Found | None:
    """The best rule over the groups, each with its share of the budget; an interrupt keeps the best so far."""
    best: Found | None = None
    allowance = Budget(budget)
    for i, group in enumerate(groups):
        share = Budget((budget - allowance.elapsed) / (len(groups) - i))
        most = MOST_NODES if best is None else best.nodes - 1
        kind = PatternSearch if isinstance(group, Spectra) else Search
        search = kind(
            wish.problem(group),
            digits=digits,
            seed=seed,
            budget=share,
            workers=workers,
            most_nodes=most,
            progress=progress,
            known=_known(wish.measure, wish.degree, group, best) if wish.plain else (),
        )
        workers.deadline = share.start + share.seconds
        try:
            search.run()
        except KeyboardInterrupt:
            if search.best is None and best is None:
                raise
            return search.best or best
        except Overdue:
            pass  # what was found before counts
        best = search.best or best
    return best


def _known(measure: Measure, degree: int, group: Group, best: Found | None) -> list[tuple[FloatArray, FloatArray]]:
    """Rules that a search without symmetry can set out from: the best so far, or a conical product if that is small."""
    if group.generators or isinstance(group, Spectra):
        return []
    if best is not None:
        nodes, weights = _written_out(best, 16)
        return [(np.array(nodes, dtype=float), np.array(weights, dtype=float))]
    try:
        small = conical_count(measure, degree) <= _PRODUCT_SHARE * len(invariant_basis(group, degree))
        product = conical_rule(measure, degree, digits=16, provenance=_NO_PROVENANCE) if small else None
    except NothingFound:  # some measures have no product rule
        return []
    return [] if product is None else [(product.nodes, product.weights)]


def _rule(found: Found, digits: int, provenance: Provenance) -> Rule:
    problem = found.problem
    if isinstance(problem.group, Spectra):
        orbits = [(t.multiplicities, values, weight) for t, values, weight in found.orbits]
        return rule_from_representatives(problem.measure, problem.degree, orbits, digits=digits, provenance=provenance)
    if problem.group.is_full:
        orbits = [(t.multiplicities, values, weight) for t, values, weight in found.orbits]
        rule = rule_from_orbits(problem.measure, problem.degree, orbits, digits=digits, provenance=provenance)
        return with_claims(rule, found)
    nodes, weights = _written_out(found, digits)
    rule = rule_from_nodes(
        problem.measure,
        problem.degree,
        nodes,
        weights,
        digits=digits,
        provenance=provenance,
        symmetry=problem.group.name,
    )
    return with_claims(rule, found)


def _written_out(found: Found, digits: int) -> tuple[list[list[mpf]], list[mpf]]:
    """Every node of every orbit, with its share of the orbit's weight."""
    nodes, weights = [], []
    with mp.workdps(digits + 10):
        for type_, values, weight in found.orbits:
            for pattern in found.problem.group.arrangements(type_):
                nodes.append([values[label] for label in pattern])
                weights.append(weight / type_.size)
    return nodes, weights


def _check(*, degree: int, space: str, digits: int, seed: int, budget: float, jobs: int) -> None:
    for name, value, least in (("degree", degree, 1), ("digits", digits, 5), ("seed", seed, 0), ("jobs", jobs, 1)):
        if isinstance(value, bool) or not isinstance(value, int) or value < least:
            raise InputError(f"{name} must be an integer of at least {least}", value)
    if digits > MOST_DIGITS:
        raise InputError(f"digits must be at most {MOST_DIGITS}", digits)
    if degree > MOST_DEGREE:
        raise InputError(f"degree must be at most {MOST_DEGREE}", degree)
    if not budget > 0:
        raise InputError("budget must be a positive number of seconds", budget)
    if space not in get_args(Space):
        raise InputError(f"space must be one of {', '.join(get_args(Space))}", space)
