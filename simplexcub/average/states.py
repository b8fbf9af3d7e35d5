"""Means over whole density matrices: spectra from a rule, eigenvectors from a finite set of unitaries.

ρ = U diag(λ) U† with U from the Haar measure and λ from the spectrum's measure, independently, is how every unitarily
invariant ensemble is made. A polynomial of degree d in the entries of ρ has degree d in λ and d in U and U* each, so a
rule of degree s on all polynomials, or on symmetric ones, with a unitary t-design is exact to degree min(s, t).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from simplexcub.average.unitaries import ComplexArray, checked_unitaries, design_degree
from simplexcub.errors import InputError
from simplexcub.rule import Rule

FloatArray = NDArray[np.float64]
MOST_STATES = 2_000_000
_MERGED = 12  # decimals to which two states count as one


@dataclass(frozen=True)
class StateRule:
    """Density matrices with weights; build it with :func:`lift`.

    Attributes
    ----------
    rule : Rule
        That of the spectra.
    degree : int
        Means of polynomials in the entries of ρ up to this degree are exact.
    design : int
        Highest t for which the unitaries are a t-design, up to 12.
    states : ndarray, shape (S, N, N), complex, read-only
    weights : ndarray, shape (S,), read-only
        Summing to 1.
    """

    rule: Rule
    degree: int
    design: int
    states: ComplexArray = field(repr=False)
    weights: FloatArray = field(repr=False)

    def __len__(self) -> int:
        return len(self.weights)

    def average(self, f: Callable[[ComplexArray], Any]) -> Any:
        """Σ w f(ρ); f takes all states at once, shape (S, N, N), and returns shape (S,) or (S, …).

        Raises
        ------
        InputError
            `f` returned an array whose first axis is not the states.
        """
        values = np.asarray(f(self.states))
        if values.shape[:1] != (len(self),):
            raise InputError(f"f must return one value per state, first axis {len(self)}", f"shape {values.shape}")
        mean = np.tensordot(self.weights, values, axes=1)
        return mean.item() if mean.ndim == 0 else mean


def lift(rule: Rule, unitaries: Any) -> StateRule:
    """Pair the spectra of a rule with unitaries, to average functions of density matrices.

    Parameters
    ----------
    rule : Rule
        For the spectrum of a unitarily invariant ensemble, such as Hilbert–Schmidt or Bures.
    unitaries : array_like, shape (U, N, N), or "clifford"
        A finite set, all of one weight; ``"clifford"`` is the Clifford group of one qubit, a 3-design.

    Returns
    -------
    StateRule
        Equal states are merged, so the Clifford group gives 6 directions and not 24.

    Raises
    ------
    InputError
        Matrices of another size or not unitary, a measure that is not symmetric, or too many states.

    Examples
    --------
    >>> import simplexcub as sc
    >>> states = sc.lift(sc.load(sc.hilbert_schmidt(2), degree=3), "clifford")
    >>> states.degree, len(states)
    (3, 6)
    >>> round(states.average(lambda rho: abs(rho[:, 0, 1]) ** 2), 12)  # E[x² + y²]/4, Bloch ball
    0.1
    """
    if not isinstance(rule, Rule):
        raise InputError("rule must be a rule such as load(hilbert_schmidt(2), degree=3)", repr(rule))
    if not rule.measure.is_symmetric:
        remedy = "The unitaries permute eigenvalues, so their law must not depend on the order."
        raise InputError("the measure must be symmetric", rule.measure, remedy)
    u = checked_unitaries(unitaries, rule.measure.N)
    if len(u) * len(rule) > MOST_STATES:
        raise InputError(f"there must be at most {MOST_STATES} states", len(u) * len(rule))
    design = design_degree(u)
    states = np.einsum("uij,mj,ukj->umik", u, rule.nodes, u.conj()).reshape(-1, *u.shape[1:])
    weights = np.tile(rule.weights / len(u), len(u))
    rounded = np.round(states, _MERGED) + 0.0  # -0 and 0 are one
    _, first, which = np.unique(rounded.reshape(len(states), -1), axis=0, return_index=True, return_inverse=True)
    merged, shared = states[first], np.asarray(np.bincount(which.ravel(), weights=weights), dtype=np.float64)
    for array in (merged, shared):
        array.flags.writeable = False
    return StateRule(rule, min(rule.degree, design), design, merged, shared)
