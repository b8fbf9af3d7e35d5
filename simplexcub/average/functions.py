"""Named functions of a spectrum or probability vector, vectorised over arrays of shape ``(M, N)``.

Entropies are in nats. Components that are zero, or negative by rounding, count as absent: 0 log 0 = 0, and a rank is
the number of positive components. With p_q = Σ λ_i^q:

===============  =======================================  =====================================================
name             value                                    limits
===============  =======================================  =====================================================
purity           p_2
linear           1 − p_2
von-neumann      −Σ λ_i ln λ_i
renyi-Q          ln(p_Q) / (1 − Q), Q ≥ 0                 0: ln(rank); 1: von-neumann; inf: −ln(largest)
tsallis-Q        (1 − p_Q) / (Q − 1), Q ≥ 0               0: rank − 1; 1: von-neumann
power-sum-Q      p_Q, Q ≥ 0                               0: rank
largest          max λ_i
smallest         min λ_i
===============  =======================================  =====================================================

References: A. Rényi, Proc. 4th Berkeley Symp. Math. Stat. Prob. 1 (1961) 547; C. Tsallis, J. Stat. Phys. 52 (1988) 479.
"""

from __future__ import annotations

import difflib
import re
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import ArrayLike, NDArray

from simplexcub.errors import InputError

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class PowerSum:
    """`constant` + `factor` · Σ λ_i^power, an expression whose mean the exact moments give."""

    constant: Fraction
    factor: Fraction
    power: int


@dataclass(frozen=True)
class SpectralFunction:
    """A named function; call it with spectra of shape ``(M, N)`` for values of shape ``(M,)``.

    Attributes
    ----------
    name : str
        As on the command line.
    power_sum : PowerSum or None
        The function written as a polynomial, where it is one.
    """

    name: str
    formula: Callable[[FloatArray], FloatArray]
    power_sum: PowerSum | None = None

    def __call__(self, spectra: ArrayLike) -> FloatArray:
        return self.formula(np.asarray(spectra, dtype=np.float64))


def _power_sum(x: FloatArray, q: float) -> FloatArray:
    present = x > 0
    powers: FloatArray = np.where(present, np.where(present, x, 1.0) ** q, 0.0)
    return np.asarray(powers.sum(axis=-1))


def _excess(x: FloatArray, r: float) -> FloatArray:
    """Σ λ_i^(1+r) − 1 for a small r, with no cancellation: the terms λ_i (λ_i^r − 1) are summed instead."""
    present = x > 0
    terms: FloatArray = np.where(present, x * np.expm1(r * np.log(np.where(present, x, 1.0))), 0.0)
    return np.asarray(terms.sum(axis=-1))


def _von_neumann(x: FloatArray) -> FloatArray:
    present = x > 0
    terms: FloatArray = np.where(present, -x * np.log(np.where(present, x, 1.0)), 0.0)
    return np.asarray(terms.sum(axis=-1))


def _min_entropy(x: FloatArray) -> FloatArray:
    return np.asarray(-np.log(x.max(axis=-1)))


def _renyi(x: FloatArray, order: Fraction) -> FloatArray:
    r = float(order - 1)
    if abs(r) < 0.5:
        return np.asarray(np.log1p(_excess(x, r)) / -r)
    # The largest component is taken out, so that no power of a high order underflows.
    top = x.max(axis=-1, keepdims=True)
    inner = np.log(_power_sum(x / top, 1 + r))
    return np.asarray((inner + (1 + r) * np.log(top[..., 0])) / -r)


def _tsallis(x: FloatArray, order: Fraction) -> FloatArray:
    r = float(order - 1)
    return np.asarray(-_excess(x, r) / r) if abs(r) < 0.5 else np.asarray((1 - _power_sum(x, 1 + r)) / r)


def _build_renyi(name: str, order: Fraction | None) -> SpectralFunction:
    if order is None:
        return SpectralFunction(name, _min_entropy)
    if order == 1:
        return SpectralFunction(name, _von_neumann)
    return SpectralFunction(name, lambda x: _renyi(x, order))


def _build_tsallis(name: str, order: Fraction | None) -> SpectralFunction:
    q = _finite(name, order)
    if q == 1:
        return SpectralFunction(name, _von_neumann)
    exact = PowerSum(1 / (q - 1), -1 / (q - 1), int(q)) if q.denominator == 1 else None
    return SpectralFunction(name, lambda x: _tsallis(x, q), exact)


def _build_power_sum(name: str, order: Fraction | None) -> SpectralFunction:
    q = _finite(name, order)
    exact = PowerSum(Fraction(0), Fraction(1), int(q)) if q.denominator == 1 else None
    return SpectralFunction(name, lambda x: _power_sum(x, float(q)), exact)


_FIXED = {
    "purity": SpectralFunction("purity", lambda x: _power_sum(x, 2.0), PowerSum(Fraction(0), Fraction(1), 2)),
    "linear": SpectralFunction("linear", lambda x: 1 - _power_sum(x, 2.0), PowerSum(Fraction(1), Fraction(-1), 2)),
    "von-neumann": SpectralFunction("von-neumann", _von_neumann),
    "largest": SpectralFunction("largest", lambda x: np.asarray(x.max(axis=-1))),
    "smallest": SpectralFunction("smallest", lambda x: np.asarray(x.min(axis=-1))),
}
# Bounded in length: an order such as 1e999999999 would be written out in full before it could be refused.
_ORDER = re.compile(r"-?(\d{1,9}(/0*[1-9]\d{0,8})?|\d{0,9}\.\d{1,30})")
_WITH_ORDER = {"renyi": _build_renyi, "tsallis": _build_tsallis, "power-sum": _build_power_sum}

NAMES = (*_FIXED, *(f"{family}-Q" for family in _WITH_ORDER))


def spectral_function(name: str) -> SpectralFunction:
    """The function called `name`.

    Parameters
    ----------
    name : str
        One of ``NAMES``, with Q a number such as ``2``, ``1/2``, ``0.5`` or, for ``renyi``, ``inf``.

    Raises
    ------
    InputError
        An unknown name, or an order that is negative or no number.

    Examples
    --------
    >>> spectral_function("tsallis-2")([[0.5, 0.5], [1.0, 0.0]]).tolist()
    [0.5, 0.0]
    """
    if name in _FIXED:
        return _FIXED[name]
    for family, build in _WITH_ORDER.items():
        if name.startswith(family + "-"):
            return build(name, _order(name, name[len(family) + 1 :]))
    near = difflib.get_close_matches(name, [*_FIXED, *_WITH_ORDER], n=1)
    remedy = f"Q is an order, as in renyi-2 or tsallis-1/2. Nearest: {near[0]}" if near else ""
    if near and near[0] in _FIXED:
        remedy = f"Nearest: {near[0]}"
    raise InputError(f"function must be one of {', '.join(NAMES)}", repr(name), remedy)


def _order(name: str, text: str) -> Fraction | None:
    """The order that `text` spells; None for infinity."""
    if text == "inf":
        return None
    if not _ORDER.fullmatch(text):
        raise InputError("the order Q must be a number such as 2, 1/2, 0.5 or inf", repr(name))
    order = Fraction(text)
    if order < 0:
        raise InputError("the order Q must be at least 0", repr(name), "Negative orders have no value at a zero.")
    return order


def _finite(name: str, order: Fraction | None) -> Fraction:
    if order is None:
        raise InputError("the order Q must be finite", repr(name), "renyi-inf is the min-entropy.")
    return order
