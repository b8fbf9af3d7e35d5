"""Named functions of a spectrum or probability vector, vectorised over arrays of shape ``(M, N)``.

Entropies are in nats, or in bits where that is asked for; all others have no unit. With p_q = Σ λ_i^q, e_k the
elementary symmetric polynomials, λ_1 ≥ … ≥ λ_N, and 1/N the maximally mixed state:

=================  =================================  =================================================================
name               value                              remarks
=================  =================================  =================================================================
purity             p_2
linear             1 − p_2
von-neumann        −Σ λ_i ln λ_i                      nats or bits
renyi-Q            ln(p_Q) / (1 − Q), Q ≥ 0           nats or bits; 0: ln(rank); 1: von-neumann; inf: −ln λ_1
tsallis-Q          (1 − p_Q) / (Q − 1), Q ≥ 0         nats or bits for Q = 1, von-neumann; 0: rank − 1
min-entropy        −ln λ_1                            nats or bits; renyi-inf
max-entropy        ln(rank)                           nats or bits; renyi-0, not the smooth one-shot quantity renyi-1/2
power-sum-Q        p_Q, Q ≥ 0                         0: rank
participation      1 / p_2
largest            λ_1
smallest           λ_N
eigenvalue-K       λ_K, the K-th largest
gap-K              λ_K − λ_{K+1}
rank-E             number of λ_i > E
determinant        Π λ_i = e_N
elementary-K       e_K
trace-distance     ½ Σ |λ_i − 1/N|                    to the maximally mixed state
fidelity           (Σ √λ_i)² / N                      with the maximally mixed state, squared convention
relative-entropy   ln N + Σ λ_i ln λ_i                to the maximally mixed state; nats or bits
=================  =================================  =================================================================

References: A. Rényi, Proc. 4th Berkeley Symp. Math. Stat. Prob. 1 (1961) 547; C. Tsallis, J. Stat. Phys. 52 (1988) 479;
R. Jozsa, J. Mod. Opt. 41 (1994) 2315 for the squared fidelity.
"""

from __future__ import annotations

import difflib
import re
from collections.abc import Callable
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import lru_cache
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from simplexcub.average import formulas
from simplexcub.average.exact import (
    Closed,
    Exact,
    elementary_mean,
    entropy_mean,
    in_bits,
    ordered_mean,
    power_sum_mean,
    relative_entropy_mean,
)
from simplexcub.errors import InputError
from simplexcub.measures import Measure

FloatArray = NDArray[np.float64]
Unit = Literal["nats", "bits"]
UNITS = ("nats", "bits")


@dataclass(frozen=True)
class SpectralFunction:
    """A named function; call it with spectra of shape ``(M, N)`` for values of shape ``(M,)``.

    Attributes
    ----------
    name : str
        As on the command line.
    mean : callable or None
        From a measure to its exact mean, where the moments give it.
    is_polynomial : bool
        Whether the exact mean stands in for any numerical one.
    is_entropic : bool
        Whether its values have a unit.
    space : {"symmetric", "ordered"}
        ``ordered`` where it is smooth in the ordered spectrum only.
    least : int
        Fewest components that it needs.
    unit : {"nats", "bits"}
        Of its values, where they have one.
    """

    name: str
    formula: Callable[[FloatArray], FloatArray]
    mean: Closed | None = None
    is_polynomial: bool = False
    is_entropic: bool = False
    space: Literal["symmetric", "ordered"] = "symmetric"
    least: int = 1
    unit: Unit = "nats"

    def __call__(self, spectra: ArrayLike) -> FloatArray:
        x = np.asarray(spectra, dtype=np.float64)
        if x.shape[-1] < self.least:
            raise InputError(f"{self.name} must have at least {self.least} components", x.shape[-1])
        return self.formula(x)


def _renyi(name: str, order: Fraction | None) -> SpectralFunction:
    if order is None:
        return replace(_FIXED["min-entropy"], name=name)
    if order == 1:
        return replace(_FIXED["von-neumann"], name=name)
    return SpectralFunction(name, lambda x: formulas.renyi(x, order), is_entropic=True)


def _tsallis(name: str, order: Fraction | None) -> SpectralFunction:
    q = _finite(name, order)
    if q == 1:
        return replace(_FIXED["von-neumann"], name=name)
    mean = power_sum_mean(q, 1 / (q - 1), -1 / (q - 1))
    return SpectralFunction(name, lambda x: formulas.tsallis(x, q), mean, _is_whole(q))


def _power_sum(name: str, order: Fraction | None) -> SpectralFunction:
    q = _finite(name, order)
    mean = power_sum_mean(q, Fraction(0), Fraction(1))
    return SpectralFunction(name, lambda x: formulas.power_sum(x, float(q)), mean, _is_whole(q))


def _eigenvalue(name: str, order: Fraction | None) -> SpectralFunction:
    k = _whole(name, order)
    mean = ordered_mean(lambda _: {k - 1: 1})
    return SpectralFunction(name, lambda x: formulas.nth_largest(x, k), mean, space="ordered", least=k)


def _gap(name: str, order: Fraction | None) -> SpectralFunction:
    k = _whole(name, order)
    mean = ordered_mean(lambda _: {k - 1: 1, k: -1})
    return SpectralFunction(name, lambda x: formulas.gap(x, k), mean, space="ordered", least=k + 1)


def _rank(name: str, order: Fraction | None) -> SpectralFunction:
    above = float(_finite(name, order))
    return SpectralFunction(name, lambda x: formulas.rank(x, above), space="ordered")


def _elementary(name: str, order: Fraction | None) -> SpectralFunction:
    k = _whole(name, order)
    return SpectralFunction(name, lambda x: formulas.elementary(x, k), elementary_mean(k), True, least=k)


def _is_whole(q: Fraction) -> bool:
    return q.denominator == 1 and q <= 200


_PURITY = power_sum_mean(Fraction(2), Fraction(0), Fraction(1))
_FIXED = {
    f.name: f
    for f in (
        SpectralFunction("purity", lambda x: formulas.power_sum(x, 2.0), _PURITY, True),
        SpectralFunction(
            "linear",
            lambda x: 1 - formulas.power_sum(x, 2.0),
            power_sum_mean(Fraction(2), Fraction(1), Fraction(-1)),
            True,
        ),
        SpectralFunction("von-neumann", formulas.von_neumann, entropy_mean, is_entropic=True),
        SpectralFunction("min-entropy", formulas.min_entropy, is_entropic=True, space="ordered"),
        SpectralFunction("max-entropy", lambda x: formulas.renyi(x, Fraction(0)), is_entropic=True),
        SpectralFunction("participation", lambda x: 1 / formulas.power_sum(x, 2.0)),
        SpectralFunction(
            "largest", lambda x: np.asarray(x.max(axis=-1)), ordered_mean(lambda _: {0: 1}), space="ordered"
        ),
        SpectralFunction(
            "smallest", lambda x: np.asarray(x.min(axis=-1)), ordered_mean(lambda n: {n - 1: 1}), space="ordered"
        ),
        SpectralFunction("determinant", lambda x: np.asarray(x.prod(axis=-1)), elementary_mean(None), True),
        SpectralFunction("trace-distance", formulas.trace_distance, space="ordered"),
        SpectralFunction("fidelity", formulas.fidelity),
        SpectralFunction("relative-entropy", formulas.relative_entropy, relative_entropy_mean, is_entropic=True),
    )
}
# Bounded in length: an order such as 1e999999999 would be written out in full before it could be refused.
_ORDER = re.compile(r"-?(\d{1,9}(/0*[1-9]\d{0,8})?|\d{0,9}\.\d{1,30})")
_WITH_ORDER = {
    "renyi": (_renyi, "Q"),
    "tsallis": (_tsallis, "Q"),
    "power-sum": (_power_sum, "Q"),
    "eigenvalue": (_eigenvalue, "K"),
    "gap": (_gap, "K"),
    "rank": (_rank, "E"),
    "elementary": (_elementary, "K"),
}

NAMES = (*_FIXED, *(f"{family}-{letter}" for family, (_, letter) in _WITH_ORDER.items()))


def spectral_function(name: str, *, unit: Unit = "nats") -> SpectralFunction:
    """The function called `name`.

    Parameters
    ----------
    name : str
        One of ``NAMES``, with Q or E a number such as ``2``, ``1/2``, ``0.5`` or, for ``renyi``, ``inf``, and K a whole
        number of at least 1.
    unit : {"nats", "bits"}
        Of an entropy; other functions refuse bits.

    Raises
    ------
    InputError
        An unknown name or unit, or an order that is negative or no number.

    Examples
    --------
    >>> spectral_function("tsallis-2")([[0.5, 0.5], [1.0, 0.0]]).tolist()
    [0.5, 0.0]
    >>> spectral_function("von-neumann", unit="bits")([[0.5, 0.5]]).tolist()
    [1.0]
    """
    if unit not in UNITS:
        raise InputError(f"unit must be one of {', '.join(UNITS)}", repr(unit))
    return _in_unit(_named(name), unit)


def exact_mean(f: object, measure: Measure) -> Exact | None:
    """E[f] in closed form, or None where `f` is no named function or the moments do not give its mean.

    Examples
    --------
    >>> from simplexcub.measures import hilbert_schmidt
    >>> exact_mean(spectral_function("purity"), hilbert_schmidt(3)).fraction
    Fraction(3, 5)
    """
    if not isinstance(f, SpectralFunction) or f.mean is None or f.least > measure.N:
        return None
    return _closed(f.mean, measure)


@lru_cache(maxsize=256)
def _closed(mean: Closed, measure: Measure) -> Exact | None:
    """Kept, since the closed form takes longer than the numerical mean."""
    try:
        return mean(measure)
    except InputError:  # a measure without such a formula, or a degree beyond its reach
        return None


def _in_unit(f: SpectralFunction, unit: Unit) -> SpectralFunction:
    if unit == "nats":
        return f
    if not f.is_entropic:
        raise InputError("bits must be asked of an entropy", repr(f.name), "Other functions have no unit.")
    mean = f.mean
    exact: Closed | None = None if mean is None else lambda measure: in_bits(mean(measure))
    return replace(f, formula=lambda x: f.formula(x) / np.log(2), mean=exact, unit="bits")


def _named(name: str) -> SpectralFunction:
    if name in _FIXED:
        return _FIXED[name]
    for family, (build, _) in _WITH_ORDER.items():
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


def _whole(name: str, order: Fraction | None) -> int:
    if order is None or order.denominator != 1 or order < 1:
        raise InputError("K must be a whole number of at least 1", repr(name))
    return int(order)
