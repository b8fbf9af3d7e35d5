"""Building measures: one function per family, and from the record in a table or the options of a command."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from fractions import Fraction
from typing import Any

from simplexcub.errors import InputError
from simplexcub.measures.arguments import exact_number, whole_number
from simplexcub.measures.base import Measure, Rational
from simplexcub.measures.beta import BetaEnsemble
from simplexcub.measures.dirichlet import Dirichlet
from simplexcub.measures.ordered import ordered
from simplexcub.measures.polynomial import polynomial_density
from simplexcub.measures.spectra import BuresHall, Induced


def dirichlet(alpha: Sequence[Rational]) -> Dirichlet:
    """Dirichlet measure with parameters α_i > 0.

    Parameters
    ----------
    alpha : sequence of int, Fraction or str
        Exact numbers: ``2``, ``Fraction(1, 2)``, ``"1/2"``, ``"0.5"``. Floats are refused, since moments are exact.

    Raises
    ------
    InputError
        Fewer than two parameters, one that is not positive or not exact.

    Examples
    --------
    >>> dirichlet(["1/2", "1/2"]).moment((1, 1))
    Fraction(1, 8)
    """
    values = [exact_number("alpha", a) for a in alpha]
    for value in values:
        if value <= 0:
            raise InputError("every alpha must be positive", value)
    if len(values) < 2:
        raise InputError("alpha must have at least 2 entries", tuple(str(v) for v in values))
    return Dirichlet(tuple(values))


def flat(N: int) -> Dirichlet:
    """Flat (uniform) measure on the simplex of N ≥ 2 components.

    Examples
    --------
    >>> flat(3).moment((1, 1, 0))
    Fraction(1, 12)
    """
    return Dirichlet((Fraction(1),) * whole_number("N", N, 2))


def hilbert_schmidt(N: int) -> Induced:
    """Eigenvalue measure of random N×N density matrices with respect to the Hilbert–Schmidt distance, N ≥ 2."""
    return induced(N, N)


def induced(N: int, K: int) -> Induced:
    """Eigenvalue measure of the N×N marginal of a random pure state of N·K dimensions, K ≥ N ≥ 2.

    Raises
    ------
    InputError
        N < 2 or K < N. For K < N the spectrum has N − K zeros; its other part is ``induced(K, N)``.
    """
    n = whole_number("N", N, 2)
    remedy = f"K is the environment's dimension; for K < N the non-zero spectrum follows induced(N={K}, K={N})."
    return Induced(n, whole_number("K", K, n, remedy))


def bures(N: int) -> BuresHall:
    """Eigenvalue measure of random N×N density matrices with respect to the Bures distance, N ≥ 2.

    Examples
    --------
    >>> bures(4).power_sum_moment((2,))
    Fraction(9, 16)
    """
    return BuresHall(whole_number("N", N, 2), Fraction(-1, 2))


def bures_hall(N: int, K: int | None = None, *, exponent: Rational | None = None) -> BuresHall:
    """Induced Bures–Hall measure ∝ Π λ_i^c Π (λ_i − λ_j)²/(λ_i + λ_j), with c = K − N − 1/2 or c given.

    Parameters
    ----------
    N : int
        At least 2.
    K : int, optional
        Dimension of the environment, at least N; K = N is the Bures measure.
    exponent : int, Fraction or str, optional
        c > −1, exact, in place of K.

    Raises
    ------
    InputError
        Both or neither of K and exponent, K < N, c ≤ −1.

    Examples
    --------
    >>> bures_hall(2, exponent="1/2").moment((2, 0))
    Fraction(3, 8)
    """
    n = whole_number("N", N, 2)
    if (K is None) == (exponent is None):
        raise InputError("one of K and exponent must be given", "neither" if K is None else "both")
    if K is not None:
        return BuresHall(n, whole_number("K", K, n) - n - Fraction(1, 2))
    return BuresHall(n, _exponent(exponent))


def orthogonal(N: int, K: int) -> BetaEnsemble:
    """Eigenvalue measure of real N×N density matrices G Gᵀ/Tr G Gᵀ, G a real N×K Ginibre matrix, K ≥ N ≥ 2.

    Density ∝ Π λ_i^((K−N−1)/2) Π |λ_i − λ_j|.

    Examples
    --------
    >>> orthogonal(2, 2).power_sum_moment((2,))
    Fraction(5, 6)
    """
    return _matrix_ensemble(N, K, Fraction(1))


def symplectic(N: int, K: int) -> BetaEnsemble:
    """Measure of the N distinct eigenvalues of quaternion density matrices, with N×K Ginibre matrices, K ≥ N ≥ 2.

    Density ∝ Π λ_i^(2(K−N)+1) Π (λ_i − λ_j)⁴, the eigenvalues taken once each and with sum 1.
    """
    return _matrix_ensemble(N, K, Fraction(4))


def _matrix_ensemble(N: int, K: int, beta: Fraction) -> BetaEnsemble:
    n = whole_number("N", N, 2)
    k = whole_number("K", K, n, "K is the environment's dimension.")
    return BetaEnsemble(n, beta, beta / 2 * (k - n + 1) - 1)


def beta_ensemble(N: int, beta: Rational, exponent: Rational) -> BetaEnsemble | Induced:
    """Fixed-trace β-ensemble ∝ Π λ_i^c Π |λ_i − λ_j|^β with rational β > 0 and c = `exponent` > −1.

    β = 2 with an integer c ≥ 0 is the induced measure with K = N + c, and is returned as such.

    Raises
    ------
    InputError
        β ≤ 0, c ≤ −1, or either not exact.
    """
    n = whole_number("N", N, 2)
    b, c = exact_number("beta", beta), _exponent(exponent)
    if b <= 0:
        raise InputError("beta must be positive", b)
    if b == 2 and c.denominator == 1 and c >= 0:
        return Induced(n, n + int(c))
    return BetaEnsemble(n, b, c)


def _exponent(value: object) -> Fraction:
    c = exact_number("exponent", value)
    if c <= -1:
        raise InputError("exponent must be above -1, for the density to be integrable", c)
    return c


def _polynomial(alpha: Sequence[Rational], polynomial: str) -> Measure:
    return polynomial_density(dirichlet(alpha), polynomial)


# family: (parameters it needs, parameters it may have, builder)
_BUILDERS: dict[str, tuple[tuple[str, ...], tuple[str, ...], Callable[..., Measure]]] = {
    "flat": (("N",), (), flat),
    "dirichlet": (("alpha",), (), dirichlet),
    "hilbert-schmidt": (("N",), (), hilbert_schmidt),
    "induced": (("N", "K"), (), induced),
    "bures": (("N",), (), bures),
    "bures-hall": (("N",), ("K", "exponent"), bures_hall),
    "orthogonal": (("N", "K"), (), orthogonal),
    "symplectic": (("N", "K"), (), symplectic),
    "beta": (("N", "beta", "exponent"), (), beta_ensemble),
    "polynomial": (("alpha", "polynomial"), (), _polynomial),
}
FAMILIES = tuple(_BUILDERS)
_PARAMETERS = ("N", "K", "alpha", "exponent", "beta", "polynomial")


def from_parameters(record: Mapping[str, Any]) -> Measure:
    """The measure that a table's ``measure`` field or a command line describes.

    Raises
    ------
    InputError
        An unknown family, a missing or foreign parameter, or one out of range.

    Examples
    --------
    >>> from_parameters({"family": "bures-hall", "N": 3, "K": 5}).family
    'bures-hall'
    """
    family = record.get("family")
    if family == "ordered":
        inner = record.get("of")
        if not isinstance(inner, Mapping) or inner.get("family") == "ordered":
            raise InputError("measure ordered needs the record of a measure under 'of'", inner)
        return ordered(from_parameters(inner))
    if not isinstance(family, str) or family not in _BUILDERS:
        raise InputError(f"measure must be one of {', '.join(FAMILIES)}", family)
    needed, optional, build = _BUILDERS[family]
    missing = [name for name in needed if record.get(name) is None]
    if missing:
        raise InputError(f"measure {family} needs {' and '.join(needed)}", f"no {' and no '.join(missing)}")
    given = {name: record[name] for name in (*needed, *optional) if record.get(name) is not None}
    measure = build(**given)
    stated = {"N": measure.N, **measure.parameters()}
    for name in _PARAMETERS:
        value = record.get(name)
        if value is None or name in given:
            continue
        if name not in stated:
            raise InputError(f"measure {family} must have no {name}", value)
        if value != stated[name]:
            raise InputError(f"{name} must agree with the measure {measure}", value)
    return measure
